package geopackage_test

import (
	"errors"
	"fmt"
	"io"
	"slices"
	"strings"
	"testing"

	"leat/cmd/internal/geopackage"
	gpkg "leat/cmd/internal/register/geopackage"
	"leat/cmd/internal/register/row"
	"leat/cmd/internal/register/store"
)

// read reads a query to its end, as texts: each row, then its child rows behind a bar.
func read(t *testing.T, s store.Source, query *store.Query, limit int) []string {
	t.Helper()
	r, err := s.Read(t.Context(), query)
	if err != nil {
		t.Fatal(err)
	}
	defer r.Close()
	var out []string
	var page row.Page
	for {
		err := r.Next(t.Context(), &page, limit)
		if errors.Is(err, io.EOF) {
			if page.Rows() != 0 {
				t.Error("the end comes with rows")
			}
			return out
		}
		if err != nil {
			t.Fatal(err)
		}
		if page.Rows() > limit || page.Rows() == 0 {
			t.Fatalf("a page of %d rows, asked for %d", page.Rows(), limit)
		}
		for i := range page.Rows() {
			var text []string
			for _, v := range page.Row(i) {
				text = append(text, fmt.Sprint(v.Kind, " ", v.String()))
			}
			if len(query.Child) > 0 {
				text = append(text, "|")
				for _, v := range page.Children(i) {
					text = append(text, v.String())
				}
			}
			out = append(out, strings.Join(text, ","))
		}
	}
}

func open(t *testing.T, spec *store.SourceSpec) store.Source {
	t.Helper()
	s, err := gpkg.OpenSource(t.Context(), spec)
	if err != nil {
		t.Fatal(err)
	}
	t.Cleanup(func() { s.Close() })
	return s
}

// Whether the key has an index or not, and however long a page is, the same rows come in the order of their keys, each with its points.
func TestPagesAreInTheOrderOfTheKey(t *testing.T) {
	const rows = 57
	var want []string
	for i := range rows {
		line := fmt.Sprintf("text C-%06d,true or false %t,number %g,|", i, i%3 == 0, float64(i%10)/10)
		for k := i%4 - 1; k >= 0; k-- { // place falls where the offset rises
			line += fmt.Sprintf(",%d,%g", k, 2+0.1*float64(k))
		}
		want = append(want, line)
	}
	query := &store.Query{Columns: []string{"code", "in use", "width"}, Child: []string{"offset", "level"}}
	for _, index := range []bool{true, false} {
		s := open(t, build(t, rows, index).source())
		for _, limit := range []int{1, 7, 57, 1000} {
			if got := read(t, s, query, limit); !slices.Equal(got, want) {
				t.Errorf("index %t, pages of %d:\n%s\nwant\n%s", index, limit, strings.Join(got, "\n"), strings.Join(want, "\n"))
			}
		}
		bounded := *query
		bounded.After, bounded.Until = row.OfString("C-000009"), row.OfString("C-000031")
		if got := read(t, s, &bounded, 5); !slices.Equal(got, want[10:32]) {
			t.Errorf("index %t, between two keys: %q", index, got)
		}
		if n, err := s.Count(t.Context(), &bounded); err != nil || n != 22 {
			t.Errorf("counted %d, %v", n, err)
		}
	}
}

func TestNumbersAsKeys(t *testing.T) {
	x := build(t, 23, false)
	for _, key := range []string{"fid", "number"} {
		spec := x.source()
		spec.Key, spec.Points = key, nil
		s := open(t, spec)
		got := read(t, s, &store.Query{Columns: []string{key}, After: row.OfInt(3), Until: row.OfInt(12)}, 4)
		if len(got) != 9 || got[0] != "whole number 4" || got[8] != "whole number 12" {
			t.Errorf("%s: %q", key, got)
		}
		if err := s.CheckKey(t.Context(), nil); err != nil {
			t.Errorf("%s: %v", key, err)
		}
	}
}

func TestViewsAreRead(t *testing.T) {
	spec := build(t, 40, true).source()
	spec.Table = "narrow"
	s := open(t, spec)
	if got := read(t, s, &store.Query{Columns: []string{"code", "width"}, Child: []string{"level"}}, 6); len(got) != 20 || got[0] != "text C-000000,number 0,|" {
		t.Errorf("%q", got)
	}
}

func TestFilters(t *testing.T) {
	x := build(t, 30, false)
	s := open(t, x.source())
	texts := func(values ...string) (out []row.Value) {
		for _, v := range values {
			out = append(out, row.OfString(v))
		}
		return out
	}
	for _, c := range []struct {
		condition store.Condition
		rows      int
	}{
		{store.Condition{Column: "code", Op: store.AnyOf, Values: texts("C-000003", "C-000004", "nobody", `"; DROP TABLE channels; --`)}, 2},
		{store.Condition{Column: "code", Op: store.NoneOf, Values: texts("C-000003")}, 29},
		{store.Condition{Column: "in use", Op: store.AnyOf, Values: []row.Value{row.OfBool(true)}}, 10},
		{store.Condition{Column: "width", Op: store.Above, Values: []row.Value{row.OfFloat(0.5)}}, 12},
		{store.Condition{Column: "width", Op: store.AtLeast, Values: []row.Value{row.OfFloat(0.5)}}, 15},
		{store.Condition{Column: "number", Op: store.Below, Values: []row.Value{row.OfInt(7)}}, 7},
		{store.Condition{Column: "number", Op: store.AtMost, Values: []row.Value{row.OfInt(7)}}, 8},
		{store.Condition{Column: "shape", Op: store.IsNull}, 0},
		{store.Condition{Column: "shape", Op: store.NotNull}, 30},
	} {
		query := &store.Query{Columns: []string{"code"}, Filter: []store.Condition{c.condition}}
		if got := read(t, s, query, 7); len(got) != c.rows {
			t.Errorf("%+v: %d rows, want %d", c.condition, len(got), c.rows)
		}
		if n, err := s.Count(t.Context(), query); err != nil || n != int64(c.rows) {
			t.Errorf("%+v: counted %d, %v", c.condition, n, err)
		}
		if err := s.CheckKey(t.Context(), query.Filter); err != nil {
			t.Errorf("%+v: %v", c.condition, err)
		}
	}
}

func (x *fixture) run(t *testing.T, statements ...string) {
	t.Helper()
	f, err := geopackage.Open(t.Context(), x.path, geopackage.Write)
	if err != nil {
		t.Fatal(err)
	}
	defer f.Close()
	for _, s := range statements {
		if err := f.Run(s); err != nil {
			t.Fatal(err)
		}
	}
}

func TestKeysThatDoNotIdentify(t *testing.T) {
	x := build(t, 30, false)
	// Only an index on the bytes of this column alone, over all rows, keeps them apart; these do not.
	x.run(t, "CREATE UNIQUE INDEX two ON channels (code, number)", "CREATE UNIQUE INDEX part ON channels (code) WHERE number < 3", "CREATE INDEX plain ON channels (code)")
	x.run(t, "UPDATE channels SET code = 'C-000005' WHERE code IN ('C-000006', 'C-000007')")
	s := open(t, x.source())
	var fault *store.KeyFault
	if err := s.CheckKey(t.Context(), nil); !errors.As(err, &fault) || !slices.Equal(fault.Twice, []string{"C-000005"}) {
		t.Errorf("a key that stands in three rows: %v", err)
	}
	if err := s.CheckKey(t.Context(), []store.Condition{{Column: "number", Op: store.AnyOf, Values: []row.Value{row.OfInt(5), row.OfInt(8)}}}); err != nil {
		t.Errorf("the filter leaves one of them: %v", err)
	}
	if err := open(t, build(t, 5, true).source()).CheckKey(t.Context(), nil); err != nil {
		t.Errorf("a key with a unique index: %v", err)
	}
	x.run(t, "DROP INDEX part", "UPDATE channels SET code = NULL WHERE number < 3")
	if err := s.CheckKey(t.Context(), nil); !errors.As(err, &fault) || fault.Nulls != 3 {
		t.Errorf("three rows without a key: %v", err)
	}
	x.run(t, "UPDATE channels SET code = 'x' || number", "UPDATE channels SET code = x'00ff' WHERE number = 9")
	var misfit *store.Misfit
	if err := s.CheckKey(t.Context(), nil); !errors.As(err, &misfit) || misfit.Field != "key" || !strings.Contains(misfit.Detail, "blob") {
		t.Errorf("a key of another kind: %v", err)
	}
}

func TestSpecificationsThatDoNotFit(t *testing.T) {
	x := build(t, 3, false)
	for _, c := range []struct {
		change func(*store.SourceSpec)
		field  string
		says   string
	}{
		{func(s *store.SourceSpec) { s.Path += "x" }, "path", "There is no file"},
		{func(s *store.SourceSpec) { s.Table = "canals" }, "table", "channels, narrow, points"},
		{func(s *store.SourceSpec) { s.Key = "id" }, "key", "fid, shape, code"},
		{func(s *store.SourceSpec) { s.Key = "width" }, "key", `declared as "DOUBLE"`},
		{func(s *store.SourceSpec) { s.Points.Table = "pts" }, "points.table", "channels, narrow, points"},
		{func(s *store.SourceSpec) { s.Points.Key = "place" }, "points.key", "INTEGER"},
		{func(s *store.SourceSpec) { s.Points.Level = "z" }, "points.level", "offset, level"},
		{func(s *store.SourceSpec) { s.Points.Path = "/nowhere.gpkg" }, "points.path", "no file"},
	} {
		spec := x.source()
		c.change(spec)
		_, err := gpkg.OpenSource(t.Context(), spec)
		var misfit *store.Misfit
		if !errors.As(err, &misfit) || misfit.Field != c.field || !strings.Contains(misfit.Detail, c.says) || !strings.HasSuffix(misfit.Detail, ".") {
			t.Errorf("%s: %v", c.field, err)
		}
	}
}

// A column says what the layer says of its geometries.
func TestColumnsSayWhatTheyHold(t *testing.T) {
	s := open(t, build(t, 1, false).source())
	var got []string
	for _, c := range s.Columns() {
		got = append(got, c.Name+" "+c.Kind.String())
	}
	if want := []string{"fid whole number", "shape bytes", "code text", "number whole number", "width number", "in use true or false", "surveyed text"}; !slices.Equal(got, want) {
		t.Errorf("%q", got)
	}
	shape := s.Columns()[1]
	if shape.Geometry != "geopackage" || shape.Spatial == nil || shape.Spatial.Type != "LINESTRING" || shape.Spatial.Z != 1 || shape.Spatial.M != 1 || shape.Spatial.System.ID != 990001 || shape.Spatial.System.Name != "District grid" {
		t.Errorf("%+v %+v", shape, shape.Spatial)
	}
}

// SQLite types cells, not columns: a text in a column of numbers comes as a text, and is the mapping's to report.
func TestCellsOfAnotherKind(t *testing.T) {
	x := build(t, 3, false)
	x.run(t, "UPDATE channels SET width = '450 mm' WHERE number = 0", "UPDATE channels SET width = NULL, \"in use\" = 'yes' WHERE number = 1", "UPDATE channels SET number = 2.5 WHERE number = 2")
	got := read(t, open(t, x.source()), &store.Query{Columns: []string{"code", "width", "in use", "number"}}, 10)
	want := []string{"text C-000000,text 450 mm,true or false true,whole number 0", "text C-000001,any ,text yes,whole number 1", "text C-000002,number 0.2,true or false false,number 2.5"}
	if !slices.Equal(got, want) {
		t.Errorf("%q\nwant\n%q", got, want)
	}
}
