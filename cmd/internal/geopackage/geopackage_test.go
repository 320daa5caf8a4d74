package geopackage_test

import (
	"bytes"
	"context"
	"errors"
	"fmt"
	"math"
	"os"
	"path/filepath"
	"slices"
	"strings"
	"sync"
	"testing"
	"time"

	"zombiezen.com/go/sqlite"

	"leat/cmd/internal/geopackage"
	"leat/cmd/internal/geopackage/geopackagetest"
)

var noon = time.Date(2026, 6, 1, 12, 0, 0, 0, time.UTC)

// layer makes a file of its own with the layer of makeLayer.
func layer(t *testing.T) (path string) {
	t.Helper()
	made.Do(func() { content, _ = os.ReadFile(makeLayer(t)) })
	path = filepath.Join(t.TempDir(), "small.gpkg")
	if err := os.WriteFile(path, content, 0o600); err != nil || len(content) == 0 {
		t.Fatal(err, len(content))
	}
	return path
}

var (
	made    sync.Once
	content []byte
)

// makeLayer makes a file with a layer of three lines, the last without a geometry, their index, description and style.
func makeLayer(t *testing.T) (path string) {
	t.Helper()
	path = filepath.Join(t.TempDir(), "made.gpkg")
	f, err := geopackage.Create(t.Context(), path)
	if err != nil {
		t.Fatal(err)
	}
	defer f.Close()
	must := func(err error) {
		t.Helper()
		if err != nil {
			t.Fatal(err)
		}
	}
	must(f.Run("PRAGMA synchronous = OFF"))
	must(f.Run(`CREATE TABLE ditches (fid INTEGER PRIMARY KEY, geom LINESTRING, name TEXT, width DOUBLE)`))
	must(f.ListFeatures(geopackage.Description{Table: "ditches", Identifier: "Ditches", Changed: noon}, geopackage.GeometryColumn{Name: "geom", Type: "LINESTRING", SRS: -1, Z: 1, M: 1}))
	table, err := f.Table("DITCHES")
	must(err)
	must(f.AddIndex(table))
	for i, g := range [][]byte{
		geopackage.Line(-1, []geopackage.Point{{X: 1000, Y: 2000, Z: 3, M: 0}, {X: 1100, Y: 2050, Z: 2.9, M: 111.8}}, true, true),
		geopackage.Line(-1, []geopackage.Point{{X: -50.5, Y: 20, Z: 3, M: 0}, {X: 0, Y: 0, Z: 2.9, M: 50}}, true, true),
		nil,
	} {
		var blob any
		if g != nil {
			blob = g
		}
		must(f.Run("INSERT INTO ditches VALUES (?, ?, ?, ?)", i+1, blob, fmt.Sprint("ditch ", i+1), 0.5))
	}
	must(f.Describe("ditches", []geopackage.ColumnText{{Column: "width", Title: "Width [m]", Description: "at the bottom"}}))
	must(f.Touch(table, noon))
	must(f.AddStyle(table, &geopackage.Style{Name: "plain", Column: "name", Classes: []geopackage.Class{{Is: "ditch 1", Label: "the <first>", Width: 1}, {Label: "others", Width: 0.5}}}))
	return path
}

func TestFilesKeepTheStandardsRules(t *testing.T) {
	geopackagetest.Judge(t, layer(t))
}

// Each statement breaks one rule; a judge that does not notice proves nothing.
func TestTheJudgeSees(t *testing.T) {
	for _, row := range []struct{ requirement, statement string }{
		{"2", "PRAGMA application_id = 0"},
		{"2", "PRAGMA user_version = 3"},
		{"4", "CREATE TABLE stray (x INTEGER)"},
		{"5", "CREATE TABLE odd (fid INTEGER PRIMARY KEY, x NUMBER); INSERT INTO gpkg_contents (table_name, data_type) VALUES ('odd', 'attributes')"},
		{"10", "ALTER TABLE gpkg_spatial_ref_sys ADD COLUMN more TEXT"},
		{"11", "UPDATE gpkg_spatial_ref_sys SET organization = 'nobody' WHERE srs_id = 0"},
		{"7", "PRAGMA foreign_keys = OFF; UPDATE gpkg_contents SET srs_id = 27 WHERE table_name = 'ditches'"},
		{"12", "PRAGMA foreign_keys = OFF; UPDATE gpkg_contents SET srs_id = 27 WHERE table_name = 'ditches'"},
		{"13", "ALTER TABLE gpkg_contents ADD COLUMN more TEXT"},
		{"14", "INSERT INTO gpkg_contents (table_name, data_type) VALUES ('nowhere', 'attributes')"},
		{"15", "UPDATE gpkg_contents SET last_change = 'yesterday'"},
		{"19", "UPDATE ditches SET geom = x'010203' WHERE fid = 3"},
		{"22", "DELETE FROM gpkg_geometry_columns"},
		{"25", "UPDATE gpkg_geometry_columns SET geometry_type_name = 'linestring'"},
		{"27", "UPDATE gpkg_geometry_columns SET z = 0"},
		{"28", "UPDATE gpkg_geometry_columns SET m = 3"},
		{"31", "UPDATE gpkg_geometry_columns SET geometry_type_name = 'POINT'"},
		{"32", "UPDATE gpkg_geometry_columns SET geometry_type_name = 'POINT'"},
		{"33", "UPDATE gpkg_geometry_columns SET srs_id = 0"},
		{"146", "UPDATE gpkg_geometry_columns SET srs_id = 0"},
		{"60", "INSERT INTO gpkg_extensions VALUES ('nowhere', NULL, 'leat_x', 'x', 'read-write')"},
		{"61", "INSERT INTO gpkg_extensions VALUES ('ditches', 'nowhere', 'leat_x', 'x', 'read-write')"},
		{"62", "INSERT INTO gpkg_extensions VALUES ('ditches', NULL, 'leat-x', 'x', 'read-write')"},
		{"63", "INSERT INTO gpkg_extensions VALUES ('ditches', NULL, 'leat_x', '', 'read-write')"},
		{"64", "INSERT INTO gpkg_extensions VALUES ('ditches', NULL, 'leat_x', 'x', 'read')"},
		{"76", "UPDATE gpkg_extensions SET scope = 'read-write' WHERE extension_name = 'gpkg_rtree_index'"},
		{"77", "DROP TRIGGER rtree_ditches_geom_update6"},
		{"77", "DELETE FROM rtree_ditches_geom WHERE id = 1"},
		{"104", "INSERT INTO gpkg_data_columns (table_name, column_name) VALUES ('nowhere', 'x')"},
		{"105", "INSERT INTO gpkg_data_columns (table_name, column_name) VALUES ('ditches', 'x')"},
		{"119", "CREATE TABLE keyless (x TEXT); INSERT INTO gpkg_contents (table_name, data_type) VALUES ('keyless', 'attributes')"},
		{"141", "DELETE FROM gpkg_extensions WHERE table_name = 'gpkg_data_columns'"},
		{"148", "UPDATE gpkg_contents SET max_x = 50 WHERE table_name = 'ditches'"},
	} {
		t.Run(row.requirement, func(t *testing.T) {
			path := layer(t)
			f, err := geopackage.Open(t.Context(), path, geopackage.Write)
			if err != nil {
				t.Fatal(err)
			}
			for _, statement := range strings.Split(row.statement, "; ") {
				if err := f.Run(statement); err != nil {
					t.Fatalf("%s: %v", statement, err)
				}
			}
			if err := f.Close(); err != nil {
				t.Fatal(err)
			}
			broken, err := geopackagetest.Broken(path)
			if err != nil {
				t.Fatal(err)
			}
			if !slices.ContainsFunc(broken, func(b string) bool { return strings.HasPrefix(b, "requirement "+row.requirement+":") }) {
				t.Errorf("after %s the judge says %q", row.statement, broken)
			}
		})
	}
}

func TestAGeometryIsReadAsItWasWritten(t *testing.T) {
	points := []geopackage.Point{{X: 3, Y: -4, Z: 5, M: 6}, {X: 1e6, Y: 0.1, Z: math.Copysign(0, -1), M: 7}}
	for _, form := range []struct{ z, m bool }{{false, false}, {true, false}, {false, true}, {true, true}} {
		blob := geopackage.Line(27, points, form.z, form.m)
		g, err := geopackage.ReadGeometry(blob)
		if err != nil || g.SRS != 27 || g.Empty || g.Envelope != (geopackage.Envelope{MinX: 3, MaxX: 1e6, MinY: -4, MaxY: 0.1}) {
			t.Errorf("%+v: %+v, %v", form, g, err)
		}
		// Without the header's envelope that of the points is the same.
		bare := append([]byte{'G', 'P', 0, 1}, blob[4:8]...)
		h, err := geopackage.ReadGeometry(append(bare, blob[40:]...))
		if err != nil || h.Envelope != g.Envelope || !bytes.Equal(h.Body, g.Body) {
			t.Errorf("%+v without envelope: %+v, %v", form, h, err)
		}
		for n := range blob {
			if g, err := geopackage.ReadGeometry(blob[:n]); err == nil && n < 40 {
				t.Errorf("cut to %d bytes: %+v", n, g)
			}
		}
	}
	// An empty point, as the note of clause 2.1.3 codes it: NaN for each ordinate, without envelope.
	empty := []byte{'G', 'P', 0, 1 | 16, 0, 0, 0, 0, 1, 1, 0, 0, 0, 0, 0, 0, 0, 0, 0, 0xf8, 0x7f, 0, 0, 0, 0, 0, 0, 0xf8, 0x7f}
	if g, err := geopackage.ReadGeometry(empty); err != nil || !g.Empty {
		t.Errorf("an empty point: %+v, %v", g, err)
	}
}

func FuzzReadGeometry(f *testing.F) {
	f.Add(geopackage.Line(27, []geopackage.Point{{X: 1, Y: 2}, {X: 3, Y: 4}}, true, true))
	f.Add([]byte("GP\x00\x01\x00\x00\x00\x00\x01\x07\x00\x00\x00\xff\xff\xff\xff"))
	f.Add([]byte("GP\x00\x01\x00\x00\x00\x00\x01\x03\x00\x00\x00\x01\x00\x00\x00\x00\x00\x00\x00"))
	f.Fuzz(func(t *testing.T, blob []byte) {
		g, err := geopackage.ReadGeometry(blob)
		if err == nil && !g.Empty && g.Envelope.MinX != g.Envelope.MinX {
			t.Errorf("an envelope of NaN: %+v", g)
		}
	})
}

func TestWhatIsNoGeoPackageIsToldSo(t *testing.T) {
	folder := t.TempDir()
	text := filepath.Join(folder, "text.gpkg")
	if err := os.WriteFile(text, []byte("asset,width\nA,1\n"), 0o600); err != nil {
		t.Fatal(err)
	}
	plain := filepath.Join(folder, "plain.gpkg")
	conn, err := sqlite.OpenConn(plain, sqlite.OpenReadWrite|sqlite.OpenCreate)
	if err != nil {
		t.Fatal(err)
	}
	if err := (&geopackage.File{Conn: conn, Path: plain}).Run("CREATE TABLE x (y INTEGER)"); err != nil {
		t.Fatal(err)
	}
	conn.Close()
	for path, want := range map[string]string{
		filepath.Join(folder, "none.gpkg"): "there is no file",
		folder:                             "is a folder",
		text:                               "no SQLite file",
		plain:                              "an SQLite file, but no GeoPackage",
	} {
		f, err := geopackage.Open(t.Context(), path, geopackage.Read)
		if err == nil || !strings.Contains(err.Error(), want) {
			t.Errorf("%s: %v, want %q", path, err, want)
		}
		if err == nil {
			f.Close()
		}
	}
}

// Whoever is kept from writing by another program is told what to do, and whoever reads is not kept at all in WAL mode.
func TestALockIsExplained(t *testing.T) {
	path := layer(t)
	holder, err := geopackage.Open(t.Context(), path, geopackage.Write)
	if err != nil {
		t.Fatal(err)
	}
	defer holder.Close()
	if err := holder.Run("BEGIN IMMEDIATE"); err != nil {
		t.Fatal(err)
	}
	f, err := geopackage.Open(t.Context(), path, geopackage.Write)
	if err != nil {
		t.Fatal(err)
	}
	defer f.Close()
	f.SetBusyTimeout(10 * time.Millisecond)
	err = f.Within(func() error { return nil })
	if !errors.Is(err, geopackage.ErrBusy) || !strings.Contains(err.Error(), "desktop GIS") {
		t.Errorf("a lock is told as %v", err)
	}
}

func TestStatementsEndWithTheirContext(t *testing.T) {
	ctx, cancel := context.WithCancel(t.Context())
	f, err := geopackage.Open(ctx, layer(t), geopackage.Read)
	if err != nil {
		t.Fatal(err)
	}
	defer f.Close()
	time.AfterFunc(20*time.Millisecond, cancel)
	_, err = f.Integer("WITH RECURSIVE n(i) AS (SELECT 1 UNION ALL SELECT i + 1 FROM n) SELECT max(i) FROM n")
	if err == nil {
		t.Error("an endless statement has ended by itself")
	}
}

func TestNames(t *testing.T) {
	for name, lawful := range map[string]bool{"leat_results": true, "_x9": true, "": false, "9x": false, "a b": false, "gpkg_x": false, "RTREE_x": false, "größe": false, `a"b`: false, strings.Repeat("x", 61): false} {
		if err := geopackage.CheckName(name); (err == nil) != lawful {
			t.Errorf("%q: %v", name, err)
		}
	}
	if q := geopackage.Quote(`a"b; DROP TABLE x`); q != `"a""b; DROP TABLE x"` {
		t.Error(q)
	}
}
