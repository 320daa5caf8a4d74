// Package geopackagetest judges files by the structural rules of the GeoPackage standard (OGC 12-128r19, version 1.4), for tests. It reads them by
// SQL of its own and shares nothing with the package that writes them.
package geopackagetest

import (
	"encoding/binary"
	"fmt"
	"math"
	"os"
	"path/filepath"
	"regexp"
	"slices"
	"strings"
	"testing"

	"zombiezen.com/go/sqlite"
	"zombiezen.com/go/sqlite/sqlitex"
)

// Judge fails the test with each rule that the file breaks, by the number of its requirement.
func Judge(t testing.TB, path string) {
	t.Helper()
	broken, err := Broken(path)
	if err != nil {
		t.Fatal(err)
	}
	for _, b := range broken {
		t.Errorf("%s breaks %s", filepath.Base(path), b)
	}
}

// Broken returns the rules that the file breaks, each as "requirement N: what is wrong". The error is one of reading.
func Broken(path string) ([]string, error) {
	conn, err := sqlite.OpenConn(path, sqlite.OpenReadOnly)
	if err != nil {
		return nil, err
	}
	defer conn.Close()
	j := &judge{conn: conn, path: path}
	for _, rule := range []func(){
		j.container, j.integrity, j.systems, j.contents, j.types, j.features, j.geometries, j.extensions, j.indexes, j.schema, j.attributes,
	} {
		rule()
	}
	return j.broken, j.err
}

type judge struct {
	conn   *sqlite.Conn
	path   string
	broken []string
	err    error
}

func (j *judge) say(requirement int, form string, arguments ...any) {
	j.broken = append(j.broken, fmt.Sprintf("requirement %d: %s", requirement, fmt.Sprintf(form, arguments...)))
}

// rows returns all rows of a statement as texts, NULL as "<null>".
func (j *judge) rows(statement string, arguments ...any) [][]string {
	var out [][]string
	err := sqlitex.ExecuteTransient(j.conn, statement, &sqlitex.ExecOptions{Args: arguments, ResultFunc: func(s *sqlite.Stmt) error {
		r := make([]string, s.ColumnCount())
		for i := range r {
			r[i] = s.ColumnText(i)
			if s.ColumnIsNull(i) {
				r[i] = "<null>"
			}
		}
		out = append(out, r)
		return nil
	}})
	if err != nil && j.err == nil {
		j.err = fmt.Errorf("%s: %w", statement, err)
	}
	return out
}

func (j *judge) one(statement string, arguments ...any) string {
	r := j.rows(statement, arguments...)
	if len(r) == 0 || len(r[0]) == 0 {
		return ""
	}
	return r[0][0]
}

func (j *judge) has(table string) bool {
	return j.one("SELECT count(*) FROM sqlite_master WHERE name = ?", table) != "0"
}

func quote(name string) string { return `"` + strings.ReplaceAll(name, `"`, `""`) + `"` }

func (j *judge) container() {
	head := make([]byte, 100)
	file, err := os.Open(j.path)
	if err == nil {
		_, err = file.Read(head)
		file.Close()
	}
	if err != nil {
		j.err = err
		return
	}
	if string(head[:16]) != "SQLite format 3\x00" {
		j.say(1, "the file begins with %q", head[:16])
	}
	if id := binary.BigEndian.Uint32(head[68:]); id != 0x47504B47 {
		j.say(2, "application_id is %#x", id)
	}
	if version := binary.BigEndian.Uint32(head[60:]); version < 10200 || version >= 20000 {
		j.say(2, "user_version is %d", version)
	}
	if filepath.Ext(j.path) != ".gpkg" {
		j.say(3, "the name ends in %q", filepath.Ext(j.path))
	}
}

func (j *judge) integrity() {
	if r := j.one("PRAGMA integrity_check"); r != "ok" {
		j.say(6, "integrity_check says %s", r)
	}
	for _, r := range j.rows("PRAGMA foreign_key_check") {
		j.say(7, "foreign_key_check says %v", r)
	}
}

// columns holds a table of the standard to its columns: name, type, not null, place in the primary key.
func (j *judge) columns(requirement int, table string, want ...string) {
	got := j.rows(`SELECT name, type, "notnull", pk FROM pragma_table_info(?)`, table)
	var have []string
	for _, r := range got {
		have = append(have, strings.Join(r, " "))
	}
	slices.Sort(have)
	slices.Sort(want)
	if !slices.Equal(have, want) {
		j.say(requirement, "%s has the columns %q, want %q", table, have, want)
	}
}

func (j *judge) systems() {
	j.columns(10, "gpkg_spatial_ref_sys", "srs_name TEXT 1 0", "srs_id INTEGER 0 1", "organization TEXT 1 0", "organization_coordsys_id INTEGER 1 0",
		"definition TEXT 1 0", "description TEXT 0 0")
	for _, r := range [][]string{{"4326", "EPSG", "4326"}, {"-1", "NONE", "-1"}, {"0", "NONE", "0"}} {
		if j.one("SELECT count(*) FROM gpkg_spatial_ref_sys WHERE srs_id = ? AND upper(organization) = ? AND organization_coordsys_id = ?", r[0], r[1], r[2]) != "1" {
			j.say(11, "the record of srs_id %s is missing", r[0])
		}
	}
	for _, r := range j.rows("SELECT table_name, srs_id FROM gpkg_contents WHERE srs_id IS NOT NULL AND srs_id NOT IN (SELECT srs_id FROM gpkg_spatial_ref_sys)") {
		j.say(12, "the reference system of %v is not defined", r)
	}
}

var moment = regexp.MustCompile(`^\d{4}-\d\d-\d\dT\d\d:\d\d(:\d\d(\.\d+)?)?Z$`)

func (j *judge) contents() {
	j.columns(13, "gpkg_contents", "table_name TEXT 1 1", "data_type TEXT 1 0", "identifier TEXT 0 0", "description TEXT 0 0", "last_change DATETIME 1 0",
		"min_x DOUBLE 0 0", "min_y DOUBLE 0 0", "max_x DOUBLE 0 0", "max_y DOUBLE 0 0", "srs_id INTEGER 0 0")
	for _, r := range j.rows("SELECT table_name, last_change FROM gpkg_contents") {
		if !j.has(r[0]) {
			j.say(14, "%s is listed and does not exist", r[0])
		}
		if !moment.MatchString(r[1]) {
			j.say(15, "last_change of %s is %q", r[0], r[1])
		}
	}
}

var lawful = regexp.MustCompile(`^(BOOLEAN|TINYINT|SMALLINT|MEDIUMINT|INT|INTEGER|FLOAT|DOUBLE|REAL|(TEXT|BLOB)(\(\d+\))?|DATE|DATETIME|` + geometryTypes + `)$`)

const geometryTypes = `GEOMETRY|POINT|LINESTRING|POLYGON|MULTIPOINT|MULTILINESTRING|MULTIPOLYGON|GEOMETRYCOLLECTION|CIRCULARSTRING|COMPOUNDCURVE|CURVEPOLYGON|MULTICURVE|MULTISURFACE|CURVE|SURFACE`

func (j *judge) types() {
	for _, r := range j.rows("SELECT m.name, c.name, c.type FROM sqlite_master m, pragma_table_info(m.name) c WHERE m.type = 'table' AND m.name IN (SELECT table_name FROM gpkg_contents)") {
		if !lawful.MatchString(r[2]) {
			j.say(5, "column %s of %s is declared as %q", r[1], r[0], r[2])
		}
	}
	registered := "SELECT lower(table_name) FROM gpkg_contents"
	if j.has("gpkg_extensions") {
		registered += " UNION SELECT lower(table_name) FROM gpkg_extensions WHERE table_name IS NOT NULL"
	}
	for _, r := range j.rows("SELECT name FROM sqlite_master WHERE type IN ('table', 'view') AND name NOT LIKE 'gpkg\\_%' ESCAPE '\\' AND name NOT LIKE 'sqlite\\_%' ESCAPE '\\' " +
		"AND name NOT LIKE 'rtree\\_%' ESCAPE '\\' AND lower(name) NOT IN (" + registered + ")") {
		j.say(4, "table %s is neither listed nor registered as an extension", r[0])
	}
}

func (j *judge) features() {
	if j.one("SELECT count(*) FROM gpkg_contents WHERE data_type = 'features'") == "0" {
		return
	}
	j.columns(21, "gpkg_geometry_columns", "table_name TEXT 1 1", "column_name TEXT 1 2", "geometry_type_name TEXT 1 0", "srs_id INTEGER 1 0", "z TINYINT 1 0", "m TINYINT 1 0")
	for _, r := range j.rows("SELECT table_name FROM gpkg_contents WHERE data_type = 'features' AND table_name NOT IN (SELECT table_name FROM gpkg_geometry_columns)") {
		j.say(22, "%s is a layer without a geometry column", r[0])
	}
	for _, r := range j.rows("SELECT table_name FROM gpkg_geometry_columns WHERE table_name NOT IN (SELECT table_name FROM gpkg_contents WHERE data_type = 'features')") {
		j.say(23, "%s has a geometry column and is no layer", r[0])
	}
	for _, r := range j.rows("SELECT g.table_name, g.column_name, g.geometry_type_name, g.srs_id, g.z, g.m, coalesce(c.srs_id, g.srs_id) FROM gpkg_geometry_columns g JOIN gpkg_contents c USING (table_name)") {
		info := j.rows("SELECT type FROM pragma_table_info(?) WHERE name = ?", r[0], r[1])
		if len(info) != 1 {
			j.say(24, "%s has no column %s", r[0], r[1])
			continue
		}
		if !regexp.MustCompile("^(" + geometryTypes + ")$").MatchString(r[2]) {
			j.say(25, "the geometry type of %s is %q", r[0], r[2])
		}
		if j.one("SELECT count(*) FROM gpkg_spatial_ref_sys WHERE srs_id = ?", r[3]) != "1" {
			j.say(26, "srs_id %s of %s is not defined", r[3], r[0])
		}
		if !slices.Contains([]string{"0", "1", "2"}, r[4]) {
			j.say(27, "z of %s is %s", r[0], r[4])
		}
		if !slices.Contains([]string{"0", "1", "2"}, r[5]) {
			j.say(28, "m of %s is %s", r[0], r[5])
		}
		if info[0][0] != r[2] {
			j.say(31, "the geometry of %s is declared as %s and listed as %s", r[0], info[0][0], r[2])
		}
		if r[6] != r[3] {
			j.say(146, "srs_id of %s is %s in gpkg_contents and %s in gpkg_geometry_columns", r[0], r[6], r[3])
		}
		j.primaryKey(29, r[0])
	}
}

// primaryKey demands one INTEGER primary key.
func (j *judge) primaryKey(requirement int, table string) {
	if j.one("SELECT type FROM sqlite_master WHERE name = ?", table) == "view" {
		return
	}
	keys := j.rows("SELECT type FROM pragma_table_info(?) WHERE pk > 0", table)
	if len(keys) != 1 || keys[0][0] != "INTEGER" {
		j.say(requirement, "the primary key of %s is %v, not one INTEGER", table, keys)
	}
}

func (j *judge) attributes() {
	for _, r := range j.rows("SELECT table_name FROM gpkg_contents WHERE data_type = 'attributes'") {
		j.primaryKey(119, r[0])
	}
}

// wkbTypes are the codes of well-known binary by the type's name; a type without one admits any.
var wkbTypes = map[string]uint32{"POINT": 1, "LINESTRING": 2, "POLYGON": 3, "MULTIPOINT": 4, "MULTILINESTRING": 5, "MULTIPOLYGON": 6}

func (j *judge) geometries() {
	if !j.has("gpkg_geometry_columns") {
		return
	}
	for _, r := range j.rows("SELECT table_name, column_name, geometry_type_name, srs_id, z, m FROM gpkg_geometry_columns") {
		var extent [4]float64
		hasExtent := false
		for _, e := range j.rows("SELECT min_x, max_x, min_y, max_y FROM gpkg_contents WHERE table_name = ? AND min_x IS NOT NULL", r[0]) {
			hasExtent = true
			for i := range extent {
				fmt.Sscan(e[i], &extent[i])
			}
		}
		err := sqlitex.ExecuteTransient(j.conn, "SELECT "+quote(r[1])+" FROM "+quote(r[0]), &sqlitex.ExecOptions{ResultFunc: func(s *sqlite.Stmt) error {
			if s.ColumnIsNull(0) {
				return nil
			}
			blob := make([]byte, s.ColumnLen(0))
			s.ColumnBytes(0, blob)
			if s.ColumnType(0) != sqlite.TypeBlob || len(blob) < 8 || string(blob[:2]) != "GP" || blob[2] != 0 || blob[3]>>6 != 0 {
				j.say(19, "%s holds a geometry that is not coded as GeoPackageBinary", r[0])
				return nil
			}
			var order binary.ByteOrder = binary.BigEndian
			if blob[3]&1 == 1 {
				order = binary.LittleEndian
			}
			if srs := int32(order.Uint32(blob[4:])); fmt.Sprint(srs) != r[3] {
				j.say(33, "a geometry of %s has srs_id %d, its column %s", r[0], srs, r[3])
			}
			sizes := []int{0, 32, 48, 48, 64, -1, -1, -1}
			size := sizes[blob[3]>>1&7]
			if size < 0 || len(blob) < 8+size+5 {
				j.say(19, "the envelope or the geometry of a row of %s is cut", r[0])
				return nil
			}
			empty := blob[3]&16 != 0
			if size > 0 {
				var box [4]float64
				for i := range box {
					box[i] = math.Float64frombits(order.Uint64(blob[8+8*i:]))
				}
				switch {
				case empty != math.IsNaN(box[0]):
					j.say(149, "an envelope of %s is %v, empty %v", r[0], box, empty)
				case !empty && hasExtent && !(box[0] >= extent[0] && box[1] <= extent[1] && box[2] >= extent[2] && box[3] <= extent[3]):
					j.say(148, "an envelope of %s, %v, lies beyond the layer's %v", r[0], box, extent)
				}
			}
			body := blob[8+size:]
			var inner binary.ByteOrder = binary.BigEndian
			if body[0] == 1 {
				inner = binary.LittleEndian
			}
			kind := inner.Uint32(body[1:])
			if want, known := wkbTypes[r[2]]; known && kind%1000 != want || kind%1000 == 0 || kind >= 4000 {
				j.say(32, "a geometry of %s is of WKB type %d, its column %s", r[0], kind, r[2])
			}
			hasZ, hasM := kind/1000 == 1 || kind/1000 == 3, kind/1000 == 2 || kind/1000 == 3
			if r[4] == "0" && hasZ || r[4] == "1" && !hasZ {
				j.say(27, "a geometry of %s has z %v, its column says %s", r[0], hasZ, r[4])
			}
			if r[5] == "0" && hasM || r[5] == "1" && !hasM {
				j.say(28, "a geometry of %s has m %v, its column says %s", r[0], hasM, r[5])
			}
			return nil
		}})
		if err != nil && j.err == nil {
			j.err = err
		}
	}
}

func (j *judge) extensions() {
	if !j.has("gpkg_extensions") {
		return
	}
	j.columns(58, "gpkg_extensions", "table_name TEXT 0 0", "column_name TEXT 0 0", "extension_name TEXT 1 0", "definition TEXT 1 0", "scope TEXT 1 0")
	name := regexp.MustCompile(`^[a-zA-Z0-9]+_[a-zA-Z0-9_]+$`)
	for _, r := range j.rows("SELECT table_name, column_name, extension_name, definition, scope FROM gpkg_extensions") {
		if r[0] != "<null>" && !j.has(r[0]) {
			j.say(60, "extension %s is registered for %s, which does not exist", r[2], r[0])
		}
		if r[1] != "<null>" && j.one("SELECT count(*) FROM pragma_table_info(?) WHERE name = ?", r[0], r[1]) != "1" {
			j.say(61, "extension %s is registered for column %s of %s, which does not exist", r[2], r[1], r[0])
		}
		if !name.MatchString(r[2]) {
			j.say(62, "the extension's name %q", r[2])
		}
		if r[3] == "" {
			j.say(63, "extension %s is not defined anywhere", r[2])
		}
		if r[4] != "read-write" && r[4] != "write-only" {
			j.say(64, "the scope of %s is %q", r[2], r[4])
		}
	}
}

// indexes holds spatial indexes to their triggers and contents.
func (j *judge) indexes() {
	if !j.has("gpkg_extensions") {
		return
	}
	for _, r := range j.rows("SELECT table_name, coalesce(column_name, ''), scope FROM gpkg_extensions WHERE extension_name = 'gpkg_rtree_index'") {
		table, column := r[0], r[1]
		if j.one("SELECT count(*) FROM gpkg_geometry_columns WHERE table_name = ? AND column_name = ?", table, column) != "1" || r[2] != "write-only" {
			j.say(76, "the row of the index of %s.%s does not fit", table, column)
			continue
		}
		index := "rtree_" + table + "_" + column
		if sql := j.one("SELECT sql FROM sqlite_master WHERE name = ?", index); sql != "CREATE VIRTUAL TABLE "+quote(index)+" USING rtree(id, minx, maxx, miny, maxy)" {
			j.say(77, "the index %s is made by %q", index, sql)
			continue
		}
		var triggers []string
		for _, r := range j.rows("SELECT name FROM sqlite_master WHERE type = 'trigger' AND tbl_name = ? ORDER BY name", table) {
			triggers = append(triggers, strings.TrimPrefix(r[0], index+"_"))
		}
		if want := []string{"delete", "insert", "update2", "update4", "update5", "update6", "update7"}; !slices.Equal(triggers, want) {
			j.say(77, "%s has the triggers %q, want %q", table, triggers, want)
		}
		key := j.one("SELECT name FROM pragma_table_info(?) WHERE pk = 1", table)
		// An index that holds other rows than the layer's, or a rectangle that does not hold its geometry's, loses features from the map.
		if n := j.one("SELECT count(*) FROM " + quote(table) + " WHERE " + quote(column) + " IS NOT NULL AND " + quote(key) + " NOT IN (SELECT id FROM " + quote(index) + ")"); n != "0" {
			j.say(77, "%s rows of %s are not in its index", n, table)
		}
		if n := j.one("SELECT count(*) FROM " + quote(index) + " WHERE id NOT IN (SELECT " + quote(key) + " FROM " + quote(table) + ")"); n != "0" {
			j.say(77, "%s entries in the index of %s are of no row", n, table)
		}
	}
}

func (j *judge) schema() {
	if !j.has("gpkg_data_columns") {
		return
	}
	j.columns(103, "gpkg_data_columns", "table_name TEXT 1 1", "column_name TEXT 1 2", "name TEXT 0 0", "title TEXT 0 0", "description TEXT 0 0", "mime_type TEXT 0 0", "constraint_name TEXT 0 0")
	for _, r := range j.rows("SELECT DISTINCT table_name FROM gpkg_data_columns WHERE table_name NOT IN (SELECT table_name FROM gpkg_contents UNION SELECT table_name FROM gpkg_extensions WHERE table_name IS NOT NULL)") {
		j.say(104, "columns of %s are described, which is not listed", r[0])
	}
	for _, r := range j.rows("SELECT table_name, column_name FROM gpkg_data_columns d WHERE NOT EXISTS (SELECT 1 FROM pragma_table_info(d.table_name) c WHERE c.name = d.column_name)") {
		j.say(105, "column %s of %s is described and does not exist", r[1], r[0])
	}
	j.columns(107, "gpkg_data_column_constraints", "constraint_name TEXT 1 0", "constraint_type TEXT 1 0", "value TEXT 0 0", "min NUMERIC 0 0", "min_is_inclusive BOOLEAN 0 0",
		"max NUMERIC 0 0", "max_is_inclusive BOOLEAN 0 0", "description TEXT 0 0")
	var registered []string
	for _, r := range j.rows("SELECT table_name, scope FROM gpkg_extensions WHERE extension_name = 'gpkg_schema' ORDER BY table_name") {
		registered = append(registered, r[0]+" "+r[1])
	}
	if !slices.Equal(registered, []string{"gpkg_data_column_constraints read-write", "gpkg_data_columns read-write"}) {
		j.say(141, "the schema extension is registered for %q", registered)
	}
}
