// Package geojson reads registers from GeoJSON files (RFC 7946) and writes results to them.
package geojson

import (
	"bufio"
	"errors"
	"fmt"
	"io"
	"os"

	"github.com/go-json-experiment/json/jsontext"

	"leat/api/wellformed"
)

// A document is an open feature collection, read one feature at a time.
type document struct {
	decoder *jsontext.Decoder
	file    *os.File
	path    string
	inside  bool // of the features
	index   int64
	// system is the member crs, which older files have, as JSON; it may stand behind the features.
	system []byte
}

const bufferBytes = 256 << 10

func open(path string) (*document, error) {
	file, err := os.Open(path)
	if err != nil {
		return nil, err
	}
	d := &document{file: file, path: path, decoder: jsontext.NewDecoder(bufio.NewReaderSize(file, bufferBytes), jsontext.AllowDuplicateNames(true))}
	if token, err := d.decoder.ReadToken(); err != nil || token.Kind() != '{' {
		file.Close()
		return nil, fmt.Errorf("%s is not a GeoJSON feature collection", path)
	}
	return d, nil
}

func (d *document) Close() error { return d.file.Close() }

// A feature is one of a collection; its parts are JSON as they stand, nil where they are absent, and live until the next one is read.
type feature struct {
	index        int64 // from 1
	id, geometry jsontext.Value
	properties   jsontext.Value
}

// next reads the next feature; io.EOF after the last, with the whole document read.
func (d *document) next() (feature, error) {
	for !d.inside {
		token, err := d.decoder.ReadToken()
		if err != nil {
			return feature{}, d.wrong(err)
		}
		if token.Kind() == '}' {
			return feature{}, d.end()
		}
		name := token.String()
		if name == "features" {
			if token, err = d.decoder.ReadToken(); err != nil || token.Kind() != '[' {
				return feature{}, fmt.Errorf("%s: features is not a list", d.path)
			}
			d.inside = true
			break
		}
		value, err := d.decoder.ReadValue()
		if err != nil {
			return feature{}, d.wrong(err)
		}
		switch {
		case name == "type" && string(value) != `"FeatureCollection"`:
			return feature{}, fmt.Errorf("%s is a GeoJSON object of the type %s; a register is a FeatureCollection", d.path, value)
		case name == "crs":
			d.system = append([]byte(nil), value...)
		}
	}
	if d.decoder.PeekKind() == ']' {
		if _, err := d.decoder.ReadToken(); err != nil {
			return feature{}, d.wrong(err)
		}
		d.inside = false
		return d.next()
	}
	value, err := d.decoder.ReadValue()
	if err != nil {
		return feature{}, d.wrong(err)
	}
	d.index++
	f := feature{index: d.index}
	err = members(value, func(name string, value jsontext.Value) {
		switch name {
		case "id":
			f.id = value
		case "geometry":
			f.geometry = value
		case "properties":
			f.properties = value
		}
	})
	if err != nil {
		return f, fmt.Errorf("%s: feature %d is not an object", d.path, f.index)
	}
	return f, nil
}

func (d *document) wrong(err error) error {
	if errors.Is(err, io.EOF) {
		err = io.ErrUnexpectedEOF
	}
	return fmt.Errorf("%s is not JSON behind byte %d: %w", d.path, d.decoder.InputOffset(), err)
}

// end makes sure that nothing stands behind the collection.
func (d *document) end() error {
	if _, err := d.decoder.ReadToken(); !errors.Is(err, io.EOF) {
		return fmt.Errorf("%s goes on behind the feature collection", d.path)
	}
	return io.EOF
}

// members calls found for each member of an object; null and an absent object have none. The values are parts of the object.
func members(object jsontext.Value, found func(name string, value jsontext.Value)) error {
	if len(object) == 0 || object.Kind() == 'n' {
		return nil
	}
	if object.Kind() != '{' {
		return errors.New("not an object")
	}
	wellformed.Each(object, func(name, value []byte, _, _ int) { found(wellformed.Name(name), value) })
	return nil
}
