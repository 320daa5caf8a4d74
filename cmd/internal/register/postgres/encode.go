package postgres

import (
	"bytes"
	"encoding/binary"
	"errors"
	"fmt"
	"math"
	"unicode/utf8"

	"leat/cmd/internal/register/row"
)

// A copyColumn is a column that COPY fills.
type copyColumn struct {
	name     string
	kind     row.Kind // Null is text too
	geometry string   // how the geometries given are coded, where the column is one of PostGIS
}

// A copyBuffer holds rows in the binary form of COPY. Its memory is used again.
type copyBuffer struct {
	data   []byte
	reader bytes.Reader
}

// reset begins a new set of rows.
func (b *copyBuffer) reset() {
	b.data = append(b.data[:0], "PGCOPY\n\xff\r\n\x00\x00\x00\x00\x00\x00\x00\x00\x00"...)
}

// begin begins a row of so many columns.
func (b *copyBuffer) begin(columns int) {
	b.data = binary.BigEndian.AppendUint16(b.data, uint16(columns))
}

// row adds a row.
func (b *copyBuffer) row(columns []copyColumn, values []row.Value) error {
	if len(values) != len(columns) {
		return fmt.Errorf("a row of %d values was given for %d columns", len(values), len(columns))
	}
	b.begin(len(columns))
	for i := range columns {
		if err := b.add(&columns[i], values[i]); err != nil {
			return err
		}
	}
	return nil
}

// rows ends the set and returns it for COPY.
func (b *copyBuffer) rows() *bytes.Reader {
	b.data = append(b.data, 0xff, 0xff)
	b.reader.Reset(b.data)
	return &b.reader
}

func (b *copyBuffer) null() { b.data = append(b.data, 0xff, 0xff, 0xff, 0xff) }

func (b *copyBuffer) int(v int64) {
	b.data = append(b.data, 0, 0, 0, 8)
	b.data = binary.BigEndian.AppendUint64(b.data, uint64(v))
}

func (b *copyBuffer) float(v float64) { b.int(int64(math.Float64bits(v))) }

func (b *copyBuffer) bytes(v []byte) {
	b.data = binary.BigEndian.AppendUint32(b.data, uint32(len(v)))
	b.data = append(b.data, v...)
}

// text adds a text; what no text in the database can hold, a zero byte and bytes that are no UTF-8, becomes U+FFFD.
func (b *copyBuffer) text(v []byte) {
	if bytes.IndexByte(v, 0) >= 0 || !utf8.Valid(v) {
		v = bytes.ToValidUTF8(bytes.ReplaceAll(v, []byte{0}, []byte("\uFFFD")), []byte("\uFFFD"))
	}
	b.bytes(v)
}

func (b *copyBuffer) string(v string) { b.text([]byte(v)) }

// add adds a value as the type of its column.
func (b *copyBuffer) add(column *copyColumn, value row.Value) error {
	if value.IsNull() {
		b.null()
		return nil
	}
	switch column.kind {
	case row.Float:
		switch value.Kind {
		case row.Float:
			b.float(value.Float())
			return nil
		case row.Int:
			b.float(float64(value.Int()))
			return nil
		}
	case row.Int:
		if value.Kind == row.Int {
			b.int(value.Int())
			return nil
		}
	case row.Text, row.Null:
		if value.Kind == row.Text {
			b.text(value.Bytes())
		} else {
			b.text(value.Append(nil))
		}
		return nil
	case row.Bool:
		if value.Kind == row.Bool {
			var v byte
			if value.Bool() {
				v = 1
			}
			b.data = append(b.data, 0, 0, 0, 1, v)
			return nil
		}
	case row.Time:
		switch {
		case value.Kind == row.Time:
			b.int(value.Micros() - epoch)
			return nil
		case value.Kind == row.Text && string(value.Bytes()) == beforeAll:
			b.int(firstMoment)
			return nil
		case value.Kind == row.Text && string(value.Bytes()) == afterAll:
			b.int(lastMoment)
			return nil
		}
	case row.Bytes:
		if value.Kind == row.Bytes {
			if column.geometry != "geopackage" {
				b.bytes(value.Bytes())
				return nil
			}
			geometry, err := fromGeoPackage(value.Bytes())
			if err != nil {
				return fmt.Errorf("column %s: %w", quote(column.name), err)
			}
			b.bytes(geometry)
			return nil
		}
	}
	return fmt.Errorf("column %s takes a %s, and a %s came", quote(column.name), column.kind, value.Kind)
}

var errGeometry = errors.New("a geometry is not as the GeoPackage standard has it")

// fromGeoPackage turns a GeoPackage's geometry into the extended well-known binary of PostGIS, which bears the number of the reference system.
func fromGeoPackage(blob []byte) ([]byte, error) {
	// Clause 2.1.3.1.1 of the standard: "GP", version, flags, srs_id, an envelope of 0, 32, 48, 48 or 64 bytes.
	if len(blob) < 8 || blob[0] != 'G' || blob[1] != 'P' {
		return nil, errGeometry
	}
	var order binary.ByteOrder = binary.BigEndian
	if blob[3]&1 != 0 {
		order = binary.LittleEndian
	}
	system := order.Uint32(blob[4:])
	sizes := [...]int{0, 32, 48, 48, 64}
	envelope := int(blob[3] >> 1 & 7)
	if envelope >= len(sizes) || len(blob) < 8+sizes[envelope]+5 {
		return nil, errGeometry
	}
	geometry := blob[8+sizes[envelope]:]
	order = binary.BigEndian
	if geometry[0] == 1 {
		order = binary.LittleEndian
	}
	kind := order.Uint32(geometry[1:])
	// ISO adds 1000 for Z, 2000 for M, 3000 for both; the extended form sets a bit for each.
	extended := kind%1000 | 0x20000000
	if ordinates := kind / 1000; ordinates == 1 || ordinates == 3 {
		extended |= 0x80000000
	}
	if ordinates := kind / 1000; ordinates == 2 || ordinates == 3 {
		extended |= 0x40000000
	}
	out := make([]byte, 0, len(geometry)+4)
	out = append(out, geometry[0])
	append32 := func(v uint32) {
		var word [4]byte
		order.PutUint32(word[:], v)
		out = append(out, word[:]...)
	}
	append32(extended)
	append32(system)
	return append(out, geometry[5:]...), nil
}
