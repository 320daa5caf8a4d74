package geojson

import (
	"context"
	"encoding/json"
	"errors"
	"io"
	"os"
	"path/filepath"
	"slices"
	"strings"
	"testing"

	"leat/cmd/internal/register/row"
	"leat/cmd/internal/register/store"
)

const collection = `{"type":"FeatureCollection","name":"drains","crs":{"type":"name","properties":{"name":"urn:ogc:def:crs:EPSG::3035"}},"features":[
{"type":"Feature","id":"A1","geometry":{"type":"LineString","coordinates":[[1.50,2,3],[4,5e0,6]]},"properties":{"kind":"box","width":300,"open":true,"points":[[0,1],[1,0]]}},
{ "properties" : {"kind":"a \"b\" \u00e9","width":2.5,"extra":null}, "geometry":null,"id":"A2","type":"Feature"},
{"type":"Feature","id":"A3","properties":null},
{"type":"Feature","id":"A4","properties":{"width":12345678901234567890}}
],"later":[1,2,{"a":"]}"}]}
`

func write(t *testing.T, text string) string {
	t.Helper()
	path := filepath.Join(t.TempDir(), "register.geojson")
	if err := os.WriteFile(path, []byte(text), 0o600); err != nil {
		t.Fatal(err)
	}
	return path
}

func openText(t *testing.T, text, key string) store.Source {
	t.Helper()
	s, err := OpenSource(context.Background(), &store.SourceSpec{Path: write(t, text), Key: key})
	if err != nil {
		t.Fatal(err)
	}
	return s
}

func all(t *testing.T, s store.Source, q store.Query, limit int) (out []string) {
	t.Helper()
	r, err := s.Read(context.Background(), &q)
	if err != nil {
		t.Fatal(err)
	}
	defer r.Close()
	var page row.Page
	for {
		err := r.Next(context.Background(), &page, limit)
		if errors.Is(err, io.EOF) {
			return out
		}
		if err != nil {
			t.Fatal(err)
		}
		for i := range page.Rows() {
			var cells []string
			for _, v := range page.Row(i) {
				cells = append(cells, v.Kind.String()+" "+v.String())
			}
			out = append(out, strings.Join(cells, "|"))
		}
	}
}

func TestFeatures(t *testing.T) {
	s := openText(t, collection, "id")
	var names []string
	for _, c := range s.Columns() {
		names = append(names, c.Name)
	}
	if strings.Join(names, " ") != "kind width open points extra id geometry" {
		t.Fatalf("%v", names)
	}
	for i, want := range []row.Kind{row.Text, row.Float, row.Bool, row.Null, row.Null, row.Text, row.Bytes} {
		if got := s.Columns()[i].Kind; got != want {
			t.Errorf("%s: %v, want %v", names[i], got, want)
		}
	}
	geometry := s.Columns()[len(names)-1]
	if geometry.Geometry != coding || !strings.Contains(geometry.Spatial.System.Definition, "EPSG::3035") {
		t.Errorf("%+v", geometry)
	}
	want := []string{
		`text A1|text box|number 300|true or false true|bytes [[0,1],[1,0]]|bytes {"type":"LineString","coordinates":[[1.50,2,3],[4,5e0,6]]}`,
		`text A2|text a "b" é|number 2.5|any |any |any `,
		"text A3|any |any |any |any |any ",
		"text A4|any |number 12345678901234567000|any |any |any ",
	}
	for _, limit := range []int{1, 3, 10} {
		if got := all(t, s, store.Query{Columns: []string{"id", "kind", "width", "open", "points", "geometry"}}, limit); !slices.Equal(got, want) {
			t.Errorf("%q", got)
		}
	}
	if n, err := s.Count(context.Background(), &store.Query{}); n != 4 || err != nil {
		t.Error(n, err)
	}
	if err := s.CheckKey(context.Background(), nil); err != nil {
		t.Error(err)
	}
	filter := []store.Condition{{Column: "width", Op: store.AtLeast, Values: []row.Value{row.OfInt(100)}}}
	if got := all(t, s, store.Query{Columns: []string{"id"}, Filter: filter}, 10); !slices.Equal(got, []string{"text A1", "text A4"}) {
		t.Errorf("%q", got)
	}
	if got := all(t, s, store.Query{Columns: []string{"id"}, After: row.OfString("A1"), Until: row.OfString("A3")}, 1); !slices.Equal(got, []string{"text A2", "text A3"}) {
		t.Errorf("%q", got)
	}
}

// Properties called like the columns that are no properties come first.
func TestNamesThatAreTaken(t *testing.T) {
	s := openText(t, `{"type":"FeatureCollection","features":[{"type":"Feature","id":1,"geometry":null,"properties":{"id":"own","geometry":"long"}}]}`, "id")
	if got := all(t, s, store.Query{Columns: []string{"id", "geometry"}}, 10); !slices.Equal(got, []string{"text own|text long"}) {
		t.Errorf("%q", got)
	}
	s = openText(t, `{"type":"FeatureCollection","features":[{"type":"Feature","id":1,"geometry":{"type":"Point","coordinates":[1,2]},"properties":{"id":"own"}}]}`, "id")
	if got := all(t, s, store.Query{Columns: []string{"id", "geometry"}}, 10); !slices.Equal(got, []string{`text own|bytes {"type":"Point","coordinates":[1,2]}`}) {
		t.Errorf("%q", got)
	}
}

func TestBadFiles(t *testing.T) {
	for text, want := range map[string]string{
		``:                                 "not a GeoJSON feature collection",
		`[1]`:                              "not a GeoJSON feature collection",
		`{"type":"Feature"}`:               "of the type",
		`{"features":3}`:                   "features is not a list",
		`{"features":[3]}`:                 "feature 1 is not an object",
		`{"features":[{}`:                  "not JSON",
		`{"features":[]} {}`:               "goes on behind",
		`{"features":[{"a":1,}]}`:          "not JSON",
		`{"features":[{"properties":[]}]}`: "properties of feature 1",
	} {
		_, err := OpenSource(context.Background(), &store.SourceSpec{Path: write(t, text), Key: "id"})
		var misfit *store.Misfit
		if !errors.As(err, &misfit) || misfit.Field != "path" || !strings.Contains(misfit.Detail, want) {
			t.Errorf("%s: %v", text, err)
		}
	}
}

// Results are features with the geometry as it was, byte for byte, and valid by the rules of RFC 7946, sections 3.2 and 3.3.
func TestResults(t *testing.T) {
	folder := t.TempDir()
	source := openText(t, collection, "id")
	geometry := source.Columns()[len(source.Columns())-1]
	layout := &store.Layout{Columns: []store.ResultColumn{
		{Column: row.Column{Name: "asset"}}, {Column: geometry, Role: store.RoleCopied}, {Column: row.Column{Name: "points"}, Role: store.RoleCopied},
		{Column: row.Column{Name: "depth", Kind: row.Float}}, {Column: row.Column{Name: "note \"x\""}},
	}}
	spec := &store.TargetSpec{Path: filepath.Join(folder, "r.geojson"), Problems: filepath.Join(folder, "p.csv")}
	target, err := OpenTarget(context.Background(), spec)
	if err != nil {
		t.Fatal(err)
	}
	if err := target.Check(context.Background(), layout); err != nil {
		t.Fatal(err)
	}
	if _, err := target.Begin(context.Background(), layout, store.Start{New: "r"}); err != nil {
		t.Fatal(err)
	}
	line := `{"type":"LineString","coordinates":[[1.50,2,3],[4,5e0,6]]}`
	err = target.Commit(context.Background(), &store.Batch{Results: [][]row.Value{
		{row.OfString("A\"1"), row.OfBytes([]byte(line)), row.OfBytes([]byte("[[0,1],[1,0]]")), row.OfFloat(1e-7), row.OfString("a\nb")},
		{row.OfInt(7), {}, {}, {}, row.OfBool(true)},
	}})
	if err != nil {
		t.Fatal(err)
	}
	if err := errors.Join(target.Finish(context.Background(), &store.Summary{}), target.Close()); err != nil {
		t.Fatal(err)
	}
	content, err := os.ReadFile(spec.Path)
	if err != nil || !strings.Contains(string(content), `"geometry":`+line) {
		t.Fatalf("%s %v", content, err)
	}
	var got struct {
		Type     string
		CRS      json.RawMessage
		Features []map[string]any
	}
	if err := json.Unmarshal(content, &got); err != nil {
		t.Fatal(err)
	}
	if got.Type != "FeatureCollection" || len(got.Features) != 2 || !strings.Contains(string(got.CRS), "3035") {
		t.Errorf("%s", content)
	}
	for _, f := range got.Features {
		_, isText := f["id"].(string)
		_, isNumber := f["id"].(float64)
		_, hasGeometry := f["geometry"]
		_, hasProperties := f["properties"].(map[string]any)
		if f["type"] != "Feature" || !(isText || isNumber) || !hasGeometry || !hasProperties {
			t.Errorf("%v", f)
		}
	}
	first := got.Features[0]["properties"].(map[string]any)
	if first["depth"] != 1e-7 || first["note \"x\""] != "a\nb" || first["asset"] != "A\"1" || len(first["points"].([]any)) != 2 {
		t.Errorf("%v", first)
	}
	// Read as a register again it has the same features.
	back, err := OpenSource(context.Background(), &store.SourceSpec{Path: spec.Path, Key: "id"})
	if err != nil {
		t.Fatal(err)
	}
	if rows := all(t, back, store.Query{Columns: []string{"id", "geometry", "depth"}}, 10); rows[0] != `text A"1|bytes `+line+`|number 1e-07` || rows[1] != "whole number 7|any |any " {
		t.Errorf("%q", rows)
	}
	foreign := &store.Layout{Columns: []store.ResultColumn{{Column: row.Column{Name: "geom", Geometry: "geopackage"}}}}
	var misfit *store.Misfit
	if err := target.Check(context.Background(), foreign); !errors.As(err, &misfit) || misfit.Field != "copy" {
		t.Errorf("%v", err)
	}
}
