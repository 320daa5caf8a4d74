package geopackage_test

import (
	"context"
	"fmt"
	"math/rand/v2"
	"path/filepath"
	"testing"
	"time"

	"leat/cmd/internal/geopackage"
	"leat/cmd/internal/register/row"
	"leat/cmd/internal/register/store"
)

var noon = time.Date(2026, 6, 1, 12, 0, 0, 0, time.UTC)

// A fixture is a small register: a layer "channels" with lines of four ordinates, whose key code is text, and its points.
type fixture struct {
	path string
	keys []string // in the order of the file
}

// build makes a register of so many channels, in an order that is not that of their keys. index says that the key has an index.
func build(t testing.TB, rows int, index bool) *fixture {
	t.Helper()
	path := filepath.Join(t.TempDir(), "register.gpkg")
	f, err := geopackage.Create(context.Background(), path)
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
	must(f.Run(`INSERT INTO gpkg_spatial_ref_sys VALUES ('District grid', 990001, 'NONE', 990001, 'LOCAL_CS["District grid",UNIT["metre",1],AXIS["Easting",EAST],AXIS["Northing",NORTH]]', 'a grid of the district''s own')`))
	must(f.Run(`CREATE TABLE channels (fid INTEGER PRIMARY KEY, shape LINESTRING, code TEXT, number INTEGER, width DOUBLE, "in use" BOOLEAN, surveyed DATE)`))
	must(f.Run(`CREATE TABLE points (fid INTEGER PRIMARY KEY, channel TEXT, place INTEGER, "offset" DOUBLE, level DOUBLE)`))
	must(f.ListFeatures(geopackage.Description{Table: "channels", Identifier: "channels", Changed: noon}, geopackage.GeometryColumn{Name: "shape", Type: "LINESTRING", SRS: 990001, Z: 1, M: 1}))
	must(f.ListAttributes(geopackage.Description{Table: "points", Identifier: "points", Changed: noon}))
	table, err := f.Table("channels")
	must(err)
	must(f.AddIndex(table))
	must(f.Run("CREATE VIEW narrow AS SELECT fid, code, width FROM channels WHERE width < 0.5"))
	must(f.ListAttributes(geopackage.Description{Table: "narrow", Identifier: "narrow", Changed: noon}))
	if index {
		must(f.Run("CREATE UNIQUE INDEX channels_code ON channels (code)"))
		must(f.Run("CREATE INDEX points_channel ON points (channel)"))
	}
	x := &fixture{path: path}
	dice := rand.New(rand.NewPCG(4, 7))
	must(f.Within(func() error {
		for _, i := range dice.Perm(rows) {
			key := fmt.Sprintf("C-%06d", i)
			x.keys = append(x.keys, key)
			p := geopackage.Point{X: 5000 + 1000*dice.Float64(), Y: 3000 + 500*dice.Float64(), Z: 4 * dice.Float64()}
			q := geopackage.Point{X: p.X + 80*dice.Float64(), Y: p.Y + 80*dice.Float64(), Z: p.Z - 0.1, M: 113 * dice.Float64()}
			if err := f.Run("INSERT INTO channels VALUES (NULL, ?, ?, ?, ?, ?, '2024-05-01')", geopackage.Line(990001, []geopackage.Point{p, q}, true, true), key, i, float64(i%10)/10, i%3 == 0); err != nil {
				return err
			}
			for k := range i % 4 {
				if err := f.Run("INSERT INTO points VALUES (NULL, ?, ?, ?, ?)", key, 10-k, float64(k), 2+0.1*float64(k)); err != nil {
					return err
				}
			}
		}
		// Points of an asset that does not exist, as registers have them.
		return f.Run("INSERT INTO points VALUES (NULL, 'A-nowhere', 1, 0, 0), (NULL, 'C-000001x', 1, 0, 0), (NULL, 'Z', 1, 0, 0)")
	}))
	must(f.Touch(table, noon))
	return x
}

// source is the specification of the fixture's layer.
func (x *fixture) source() *store.SourceSpec {
	return &store.SourceSpec{Format: "geopackage", Path: x.path, Table: "channels", Key: "code",
		Points: &store.PointsSpec{Table: "points", Key: "channel", Order: "place", Offset: "offset", Level: "level"}}
}

// layout is one of results with a copied geometry.
func layout(spatial *row.Spatial) *store.Layout {
	column := func(name string, kind row.Kind, role store.Role) store.ResultColumn {
		return store.ResultColumn{Column: row.Column{Name: name, Kind: kind}, Role: role}
	}
	l := &store.Layout{Hash: "one", Columns: []store.ResultColumn{
		column("asset", row.Text, store.RoleAsset),
		column("shape", row.Bytes, store.RoleCopied),
		column("normal_depth", row.Float, store.RoleAnswer),
		column("verdict", row.Text, store.RoleAnswer),
		column("surcharged", row.Bool, store.RoleAnswer),
		column("run", row.Text, store.RoleRun),
		column("fingerprint", row.Text, store.RoleFingerprint),
		column("copied", row.Int, store.RoleCopiedHash),
		column("engine_version", row.Text, store.RoleEngineVersion),
		column("computed_at", row.Time, store.RoleComputedAt),
	}}
	l.Columns[1].Geometry, l.Columns[1].Spatial = "geopackage", spatial
	l.Columns[2].Unit, l.Columns[2].UCUM, l.Columns[2].Description = "m", "m", "Lowest normal depth."
	return l
}
