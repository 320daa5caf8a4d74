package geojson

import (
	"bytes"
	"context"
	"errors"
	"fmt"
	"io"
	"slices"
	"strconv"

	"github.com/go-json-experiment/json/jsontext"

	"leat/cmd/internal/register/row"
	"leat/cmd/internal/register/store"
)

// A source is a GeoJSON feature collection. Its columns are the properties of all features, the features' id and their geometry.
type source struct {
	spec    *store.SourceSpec
	columns []row.Column
	count   int64

	ownID, ownGeometry bool // the columns id and geometry are the features' own, not properties
}

// The columns that are no properties, unless a property bears the name.
const (
	idColumn       = "id"
	geometryColumn = "geometry"
)

// coding is what row.Column.Geometry says of geometries of GeoJSON.
const coding = "geojson"

// OpenSource opens a GeoJSON file as a register. It is read once to find its columns.
func OpenSource(ctx context.Context, spec *store.SourceSpec) (store.Source, error) {
	if spec.Points != nil {
		return nil, &store.Misfit{Field: "points", Detail: "A GeoJSON register has no table of points; give the points as a property that is a list of pairs, and feed section_points from it."}
	}
	s := &source{spec: spec}
	if err := s.survey(ctx); err != nil {
		return nil, &store.Misfit{Field: "path", Detail: "The file cannot be read: " + err.Error() + "."}
	}
	return s, nil
}

// survey finds the columns.
func (s *source) survey(ctx context.Context) error {
	d, err := open(s.spec.Path)
	if err != nil {
		return err
	}
	defer d.Close()
	places := map[string]int{}
	var names []string
	var seen []kinds
	var id kinds
	for {
		f, err := d.next()
		if errors.Is(err, io.EOF) {
			break
		}
		if err != nil {
			return err
		}
		if ctx.Err() != nil {
			return context.Cause(ctx)
		}
		s.count++
		if f.id != nil {
			id.add(cell(f.id))
		}
		err = members(f.properties, func(name string, value jsontext.Value) {
			at, known := places[name]
			if !known {
				at = len(names)
				places[name], names, seen = at, append(names, name), append(seen, 0)
			}
			seen[at].add(cell(value))
		})
		if err != nil {
			return fmt.Errorf("the properties of feature %d are no object", f.index)
		}
	}
	for i, name := range names {
		s.columns = append(s.columns, row.Column{Name: name, Kind: seen[i].common()})
	}
	_, isProperty := places[idColumn]
	s.ownID = id != 0 && !isProperty
	_, isProperty = places[geometryColumn]
	s.ownGeometry = !isProperty
	if s.ownID {
		s.columns = append(s.columns, row.Column{Name: idColumn, Kind: id.common()})
	}
	if s.ownGeometry {
		s.columns = append(s.columns, row.Column{
			Name: geometryColumn, Kind: row.Bytes, Geometry: coding,
			Spatial: &row.Spatial{Type: "GEOMETRY", System: row.ReferenceSystem{Definition: string(d.system)}},
		})
	}
	return nil
}

// kinds are those that the values of a property have, as bits.
type kinds uint

func (k *kinds) add(v row.Value) { *k |= 1 << v.Kind }

// common is the kind that they have in common, whole numbers being numbers; Null where there is none. Where values are missing does not count.
func (k kinds) common() row.Kind {
	switch k &^ (1 << row.Null) {
	case 1 << row.Int:
		return row.Int
	case 1 << row.Float, 1<<row.Float | 1<<row.Int:
		return row.Float
	case 1 << row.Text:
		return row.Text
	case 1 << row.Bool:
		return row.Bool
	}
	return row.Null
}

// Columns are those of all features.
func (s *source) Columns() []row.Column { return s.columns }

// ChildColumns is nil.
func (s *source) ChildColumns() []row.Column { return nil }

// Ordered is false: features come as they stand.
func (s *source) Ordered() bool { return false }

// CheckKey reads the file once, and again where it must.
func (s *source) CheckKey(ctx context.Context, filter []store.Condition) error {
	return store.CheckKeys(func(found func(row.Value)) error {
		return s.each(ctx, filter, func(key row.Value, _ int64) { found(key) })
	})
}

// each calls found with each feature's key.
func (s *source) each(ctx context.Context, filter []store.Condition, found func(key row.Value, index int64)) error {
	r, err := s.read(&store.Query{Columns: []string{s.spec.Key}, Filter: filter})
	if err != nil {
		return err
	}
	defer r.Close()
	var page row.Page
	for {
		switch err := r.Next(ctx, &page, 1); {
		case errors.Is(err, io.EOF):
			return nil
		case err != nil:
			return err
		}
		found(page.Row(0)[0], page.Line(0))
	}
}

// Count is known since the file was opened, unless a filter or a bound leaves some out.
func (s *source) Count(_ context.Context, q *store.Query) (int64, error) {
	if len(q.Filter) > 0 || !q.After.IsNull() || !q.Until.IsNull() {
		return -1, nil
	}
	return s.count, nil
}

// Read begins to read. Where After or Until are given, the file is gone through once to find them; a key that is not there any more bounds nothing.
func (s *source) Read(ctx context.Context, q *store.Query) (store.Reader, error) {
	first, last := int64(0), int64(-1)
	if !q.After.IsNull() || !q.Until.IsNull() {
		err := s.each(ctx, nil, func(key row.Value, index int64) {
			if sameKey(key, q.After) {
				first = index
			}
			if sameKey(key, q.Until) {
				last = index
			}
		})
		if err != nil {
			return nil, err
		}
	}
	r, err := s.read(q)
	if err != nil {
		return nil, err
	}
	r.first, r.last = first, last
	return r, nil
}

// sameKey compares keys as text: a target may have kept a number so.
func sameKey(key, bound row.Value) bool { return !bound.IsNull() && key.String() == bound.String() }

func (s *source) read(q *store.Query) (*reader, error) {
	d, err := open(s.spec.Path)
	if err != nil {
		return nil, err
	}
	r := &reader{document: d, query: q, last: -1, id: -1, geometry: -1, places: map[string]int{}}
	names := slices.Clone(q.Columns)
	for _, c := range q.Filter {
		if !slices.Contains(names, c.Column) {
			names = append(names, c.Column)
		}
	}
	for i, name := range names {
		switch {
		case name == geometryColumn && s.ownGeometry:
			r.geometry = i
		case name == idColumn && s.ownID:
			r.id = i
		default:
			r.places[name] = i
		}
	}
	r.names = names
	r.numbers = make([]bool, len(names))
	for i, name := range names {
		r.numbers[i] = slices.ContainsFunc(s.columns, func(c row.Column) bool { return c.Name == name && c.Kind == row.Float })
	}
	return r, nil
}

// A reader reads the features that its query lets through.
type reader struct {
	*document
	query        *store.Query
	names        []string // the query's columns, and then those of the filter only
	places       map[string]int
	numbers      []bool // by name: whole numbers are numbers there too
	id, geometry int    // places; -1 where not wanted
	first, last  int64
	ended        bool
	faults       []store.RowFault
	values       []row.Value
}

// Next reads the next features.
func (r *reader) Next(ctx context.Context, page *row.Page, limit int) error {
	page.Reset(len(r.query.Columns), 0)
	r.faults = r.faults[:0]
	for page.Rows() < limit && !r.ended {
		if ctx.Err() != nil {
			return context.Cause(ctx)
		}
		f, err := r.next()
		if errors.Is(err, io.EOF) {
			r.ended = true
			break
		}
		if err != nil {
			return err
		}
		if f.index <= r.first {
			continue
		}
		if r.last >= 0 && f.index > r.last {
			r.ended = true
			break
		}
		if err := r.feature(&f); err != nil {
			return err
		}
		if r.passes() {
			values := page.Add(f.index)
			for i := range values {
				values[i] = page.Keep(r.values[i])
			}
		}
	}
	if page.Rows() == 0 {
		return io.EOF
	}
	return nil
}

func (r *reader) passes() bool {
	for i := range r.query.Filter {
		c := &r.query.Filter[i]
		if !c.Matches(r.values[slices.Index(r.names, c.Column)], '.') {
			return false
		}
	}
	return true
}

// feature puts the values of a feature into r.values, where they live until the next one.
func (r *reader) feature(f *feature) error {
	r.values = slices.Grow(r.values[:0], len(r.names))[:len(r.names)]
	clear(r.values)
	if r.id >= 0 && f.id != nil {
		r.values[r.id] = cell(f.id)
	}
	if r.geometry >= 0 && f.geometry != nil && f.geometry.Kind() != 'n' {
		r.values[r.geometry] = row.OfBytes(f.geometry)
	}
	return members(f.properties, func(name string, value jsontext.Value) {
		if at, wanted := r.places[name]; wanted {
			v := cell(value)
			if r.numbers[at] && v.Kind == row.Int {
				v = row.OfFloat(float64(v.Int()))
			}
			r.values[at] = v
		}
	})
}

// cell is a JSON value as a cell: a list or an object as its JSON.
func cell(v jsontext.Value) row.Value {
	switch v.Kind() {
	case 't', 'f':
		return row.OfBool(v.Kind() == 't')
	case '"':
		if bytes.IndexByte(v, '\\') < 0 {
			return row.OfText(v[1 : len(v)-1])
		}
		text, err := jsontext.AppendUnquote(nil, v)
		if err != nil {
			return row.Value{}
		}
		return row.OfText(text)
	case '0':
		if !bytes.ContainsAny(v, ".eE") {
			if whole, err := strconv.ParseInt(string(v), 10, 64); err == nil {
				return row.OfInt(whole)
			}
		}
		if number, err := strconv.ParseFloat(string(v), 64); err == nil {
			return row.OfFloat(number)
		}
		return row.OfText(v) // beyond float64
	case '{', '[':
		return row.OfBytes(v)
	}
	return row.Value{}
}

// Faults is empty: what is no JSON ends the reading.
func (r *reader) Faults() []store.RowFault { return r.faults }

// Close has nothing to close: each reader has the file open for itself.
func (s *source) Close() error { return nil }
