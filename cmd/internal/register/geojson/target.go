package geojson

import (
	"cmp"
	"context"
	"math"
	"slices"

	"github.com/go-json-experiment/json/jsontext"

	"leat/cmd/internal/register/csvfile"
	"leat/cmd/internal/register/row"
	"leat/cmd/internal/register/store"
	"leat/cmd/internal/register/wholefile"
)

// A target is a feature collection of results, with a CSV file of problems beside it. Both appear when the run is finished: a run that is
// broken off leaves nothing, and begun again computes everything.
type target struct {
	spec     *store.TargetSpec
	layout   *store.Layout
	geometry int // column; -1 without one
	file     *wholefile.File
	problems *csvfile.Problems
	any      bool // a feature is written
	line     []byte
}

// OpenTarget opens a GeoJSON file for results.
func OpenTarget(_ context.Context, spec *store.TargetSpec) (store.Target, error) {
	return &target{spec: spec}, nil
}

// Check looks at the paths and at the geometry.
func (t *target) Check(_ context.Context, layout *store.Layout) error {
	for _, c := range layout.Columns {
		if c.Geometry != "" && c.Geometry != coding {
			return &store.Misfit{Field: "copy", Detail: "The geometries of " + c.Name + " are not GeoJSON's and cannot be copied to a GeoJSON file; leave the column out, or write to the format of the source."}
		}
	}
	return csvfile.CheckPath(t.spec)
}

// Begin begins both files.
func (t *target) Begin(_ context.Context, layout *store.Layout, start store.Start) (store.State, error) {
	state := store.State{Run: cmp.Or(start.Run, start.New), Fresh: true}
	t.layout = layout
	t.geometry = slices.IndexFunc(layout.Columns, func(c store.ResultColumn) bool { return c.Geometry == coding })
	var err error
	if t.problems, err = csvfile.NewProblems(t.spec, state.Run); err != nil {
		return state, err
	}
	if t.file, err = wholefile.Create(t.spec.Path); err != nil {
		return state, err
	}
	head := `{"type":"FeatureCollection",`
	if t.geometry >= 0 {
		if system := layout.Columns[t.geometry].Spatial; system != nil && system.System.Definition != "" {
			head += `"crs":` + system.System.Definition + `,`
		}
	}
	_, err = t.file.WriteString(head + "\"features\":[\n")
	return state, err
}

// Stored finds nothing: each run computes everything.
func (t *target) Stored(context.Context, *store.Stretch, func(row.Value, store.Stored)) error {
	return nil
}

// Commit writes a batch.
func (t *target) Commit(_ context.Context, batch *store.Batch) error {
	for _, result := range batch.Results {
		t.line = t.line[:0]
		if t.any {
			t.line = append(t.line, ",\n"...)
		}
		t.any = true
		t.line = t.feature(t.line, result)
		if _, err := t.file.Write(t.line); err != nil {
			return err
		}
	}
	return t.problems.Write(batch.Problems)
}

// feature appends a result as a feature whose id is the asset's key.
func (t *target) feature(dst []byte, cells []row.Value) []byte {
	dst = appendValue(append(dst, `{"type":"Feature","id":`...), cells[0])
	dst = append(dst, `,"geometry":`...)
	if t.geometry >= 0 && !cells[t.geometry].IsNull() {
		dst = append(dst, cells[t.geometry].Bytes()...)
	} else {
		dst = append(dst, "null"...)
	}
	dst = append(dst, `,"properties":{`...)
	for i := range cells {
		if i == t.geometry {
			continue
		}
		if dst[len(dst)-1] != '{' {
			dst = append(dst, ',')
		}
		dst, _ = jsontext.AppendQuote(dst, t.layout.Columns[i].Name)
		dst = appendValue(append(dst, ':'), cells[i])
	}
	return append(dst, "}}"...)
}

// appendValue appends a cell as JSON. Bytes are JSON already.
func appendValue(dst []byte, v row.Value) []byte {
	switch v.Kind {
	case row.Null:
		return append(dst, "null"...)
	case row.Float:
		if math.IsNaN(v.Float()) || math.IsInf(v.Float(), 0) {
			return append(dst, "null"...)
		}
	case row.Text:
		dst, _ = jsontext.AppendQuote(dst, v.Bytes()) // bad UTF-8 becomes U+FFFD
		return dst
	case row.Time:
		return append(v.Append(append(dst, '"')), '"')
	}
	return v.Append(dst)
}

// Finish closes the collection and gives the files their names, that of the results last.
func (t *target) Finish(context.Context, *store.Summary) error {
	if _, err := t.file.WriteString("\n]}\n"); err != nil {
		return err
	}
	if err := t.problems.Finish(); err != nil {
		return err
	}
	return t.file.Finish()
}

// Close removes what is not finished.
func (t *target) Close() error {
	if t.file != nil {
		t.file.Discard()
	}
	if t.problems != nil {
		t.problems.Discard()
	}
	return nil
}
