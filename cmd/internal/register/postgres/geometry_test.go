package postgres_test

import (
	"encoding/hex"
	"strings"
	"testing"

	"leat/cmd/internal/register/row"
	"leat/cmd/internal/register/store"
)

// Geometries of PostGIS are copied as they are; those of a GeoPackage (clause 2.1.3 of OGC 12-128r18: header, envelope, ISO well-known binary) become those of PostGIS.
func TestTargetCopiesGeometries(t *testing.T) {
	address := database(t, `create extension postgis`, `create table assets (id bigint primary key, line geometry(LineStringZM, 25832))`,
		`insert into assets values (1, 'SRID=25832;LINESTRING ZM (500000 5300000 1 0, 500010 5300000 0.5 10)'), (2, null)`)
	source := openSource(t, store.SourceSpec{Table: "assets", Key: "id"})
	ewkb, err := hex.DecodeString(query(t, address, "select line::text from assets where id = 1")[0])
	if err != nil {
		t.Fatal(err)
	}
	iso, err := hex.DecodeString(query(t, address, "select encode(st_asbinary(line, 'NDR'), 'hex') from assets where id = 1")[0])
	if err != nil {
		t.Fatal(err)
	}
	for name, test := range map[string]struct {
		column row.Column
		blob   []byte
	}{
		"ewkb":     {source.Columns()[1], ewkb},
		"bare":     {row.Column{Name: "line", Kind: row.Bytes, Geometry: "geopackage"}, append([]byte{'G', 'P', 0, 1, 0xe8, 0x64, 0, 0}, iso...)},
		"envelope": {row.Column{Name: "line", Kind: row.Bytes, Geometry: "geopackage"}, append(append([]byte{'G', 'P', 0, 3, 0xe8, 0x64, 0, 0}, make([]byte, 32)...), iso...)},
	} {
		l := layout(row.Int)
		l.Columns[1].Column = test.column
		target := openTarget(t, store.TargetSpec{Table: name})
		begin(t, target, l, start("a"))
		for range 2 { // straight, then by way of the staging table
			values := result(whole(1), 1, "a")
			values[1] = row.OfBytes(test.blob)
			without := result(whole(2), 1, "a")
			without[1] = row.Value{}
			commit(t, target, &store.Batch{Stretch: store.Stretch{Ordered: true}, Results: [][]row.Value{values, without}})
		}
		if got := query(t, address, "select count(*) from "+name+" r join assets a on a.id = r.asset where st_asewkb(a.line) is not distinct from st_asewkb(r.line)"); got[0] != "2" {
			t.Errorf("%s: %s geometries are as they were", name, got)
		}
		for range 2 {
			if err := target.Finish(t.Context(), &store.Summary{Run: "a", Finished: moment}); err != nil {
				t.Error(err)
			}
		}
		if indexes := query(t, address, "select indexdef from pg_indexes where tablename = '"+name+"' and indexdef like '%gist%'"); len(indexes) != 1 {
			t.Errorf("%s: indexes of the geometries: %v", name, indexes)
		}
		target.Close()
		again := openTarget(t, store.TargetSpec{Table: name})
		if err := again.Check(t.Context(), l); err != nil {
			t.Errorf("%s: %v", name, err)
		}
	}
	if declared := query(t, address, "select format_type(atttypid, atttypmod) from pg_attribute where attrelid = 'ewkb'::regclass and attname = 'line'"); declared[0] != "geometry(LineStringZM,25832)" {
		t.Error(declared)
	}
	l := layout(row.Int)
	l.Columns[1].Column = row.Column{Name: "line", Kind: row.Bytes, Geometry: "geopackage"}
	target := openTarget(t, store.TargetSpec{Table: "broken"})
	begin(t, target, l, start("a"))
	values := result(whole(1), 1, "a")
	for _, blob := range []string{"", "GP", "XX\x00\x01\x00\x00\x00\x00\x01\x02\x00\x00\x00", "GP\x00\x0f\x00\x00\x00\x00\x01\x02\x00\x00\x00", "GP\x00\x01\x00\x00\x00\x00\x01"} {
		values[1] = row.OfBytes([]byte(blob))
		if err := target.Commit(t.Context(), &store.Batch{Stretch: store.Stretch{Ordered: true}, Results: [][]row.Value{values}}); err == nil || !strings.Contains(err.Error(), "GeoPackage") {
			t.Errorf("%q: %v", blob, err)
		}
	}
}
