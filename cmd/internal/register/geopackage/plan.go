package geopackage

import (
	"fmt"
	"slices"
	"strings"
	"time"

	"zombiezen.com/go/sqlite"

	"leat/cmd/internal/geopackage"
	"leat/cmd/internal/register/row"
	"leat/cmd/internal/register/store"
)

// ledger is the table that names the tables which are ours; no other may be written to. An extension of the standard's kind would say so too, but then
// programs that do not know it warn against editing anything.
const ledger = "leat_register_tables"

const ledgerText = "Tables that leat register made. They may be dropped; they must not gain or lose columns"

// names are those of the three tables.
type names struct{ results, problems, runs string }

func namesOf(spec *store.TargetSpec) names {
	n := names{spec.Table, spec.Problems, spec.Table + "_runs"}
	if n.problems == "" {
		n.problems = spec.Table + "_problems"
	}
	return n
}

// A plan is what the tables look like for a layout.
type plan struct {
	names    names
	layout   *store.Layout
	key      string // of the results: the INTEGER PRIMARY KEY, named so that no column has its name
	geometry int    // place of the geometry among the columns, -1 without one
}

// problemColumns are the names and types of store.ProblemColumns, the asset's excepted.
var problemTypes = []string{"", "INTEGER", "TEXT", "TEXT", "TEXT", "TEXT"}

func (n names) plan(layout *store.Layout) (*plan, error) {
	p := &plan{names: n, layout: layout, key: "fid", geometry: -1}
	taken := map[string]string{}
	for i, c := range layout.Columns {
		lower := strings.ToLower(c.Name)
		if other, is := taken[lower]; is {
			return nil, &store.Misfit{Field: "copy", Detail: fmt.Sprintf("Two columns of the results would be called %s and %s, which SQLite takes for one name; give a prefix or copy fewer columns.", other, c.Name)}
		}
		taken[lower] = c.Name
		if c.Geometry == "" {
			continue
		}
		if c.Geometry != "geopackage" || c.Spatial == nil {
			return nil, &store.Misfit{Field: "copy", Detail: fmt.Sprintf("The geometry %s is coded as %s; into a GeoPackage only the geometry of a layer of a GeoPackage can be copied.", c.Name, c.Geometry)}
		}
		if p.geometry >= 0 {
			return nil, &store.Misfit{Field: "copy", Detail: fmt.Sprintf("A layer has one geometry, so %s and %s cannot both be copied.", layout.Columns[p.geometry].Name, c.Name)}
		}
		p.geometry = i
	}
	for taken[p.key] != "" {
		p.key += "_"
	}
	return p, nil
}

// declared is the type that a column of the results is declared with.
func (p *plan) declared(i int) string {
	c := &p.layout.Columns[i]
	if i == p.geometry {
		return c.Spatial.Type
	}
	switch c.Kind {
	case row.Int:
		return "INTEGER"
	case row.Float:
		return "DOUBLE"
	case row.Bool:
		return "BOOLEAN"
	case row.Bytes:
		return "BLOB"
	case row.Time:
		return "DATETIME"
	}
	return "TEXT"
}

// columns are names and types of the three tables, without their keys.
func (p *plan) columns() (results, problems, runs [][2]string) {
	for i, c := range p.layout.Columns {
		results = append(results, [2]string{c.Name, p.declared(i)})
	}
	asset := p.declared(0)
	problems = append(problems, [2]string{"run", "TEXT"})
	for i, name := range store.ProblemColumns {
		kind := problemTypes[i]
		if i == 0 {
			kind = asset
		}
		problems = append(problems, [2]string{name, kind})
	}
	runs = [][2]string{{"run", "TEXT"}, {"layout", "TEXT"}, {"engine_version", "TEXT"}, {"mapping", "TEXT"}, {"begun", "DATETIME"}, {"finished", "DATETIME"},
		{"fresh", "BOOLEAN"}, {"journal_mode", "TEXT"}, {"mark", asset}}
	for _, name := range []string{"read", "computed", "unchanged", "bad", "removed", "problems"} {
		runs = append(runs, [2]string{name, "INTEGER"})
	}
	return results, problems, runs
}

// check makes sure that what is there is ours and of this layout. A file that was copied without some of our tables gets them anew.
func (p *plan) check(f *geopackage.File) error {
	ours, err := written(f)
	if err != nil {
		return err
	}
	results, problems, runs := p.columns()
	for _, t := range []struct {
		field, name string
		columns     [][2]string
	}{{"table", p.names.results, results}, {"problems", p.names.problems, problems}, {"table", p.names.runs, runs}} {
		has, err := f.Has(t.name)
		if err != nil {
			return err
		}
		if !has {
			continue
		}
		if !slices.ContainsFunc(ours, func(name string) bool { return strings.EqualFold(name, t.name) }) {
			return &store.Misfit{Field: t.field, Detail: fmt.Sprintf("%s holds a table %s that leat register did not make; it is not overwritten. Name another table.", f.Path, t.name)}
		}
		table, err := f.Table(t.name)
		if err != nil {
			return err
		}
		var have [][2]string
		for _, c := range table.Columns {
			if c.Name != table.Key {
				have = append(have, [2]string{c.Name, c.Type})
			}
		}
		if !slices.Equal(have, t.columns) {
			return &store.Misfit{Field: t.field, Detail: fmt.Sprintf("The table %s of an earlier run has other columns than this mapping asks for (%s). Name another table, or delete that one in the GIS first.", t.name, difference(have, t.columns))}
		}
	}
	if p.geometry < 0 {
		return nil
	}
	return p.checkSystem(f)
}

// written returns the tables that are ours.
func written(f *geopackage.File) ([]string, error) {
	if has, err := f.Has(ledger); err != nil || !has {
		return nil, err
	}
	var out []string
	err := f.Rows("SELECT table_name FROM "+ledger, func(s *sqlite.Stmt) error {
		out = append(out, s.ColumnText(0))
		return nil
	})
	return out, err
}

// checkSystem makes sure that the number which the geometries bear means the same reference system in this file, or nothing yet.
func (p *plan) checkSystem(f *geopackage.File) error {
	s := &p.layout.Columns[p.geometry].Spatial.System
	other, err := f.Text("SELECT srs_name || ' (' || organization || ' ' || organization_coordsys_id || ')' FROM gpkg_spatial_ref_sys WHERE srs_id = ? AND NOT (upper(organization) = upper(?) AND organization_coordsys_id = ?)",
		s.ID, s.Organization, s.Code)
	if err == nil && other != "" {
		err = &store.Misfit{Field: "copy", Detail: fmt.Sprintf("The geometries are in the reference system %d, which is %s (%s %d) in the source and %s in %s; write to another file, or leave the geometry out.",
			s.ID, s.Name, s.Organization, s.Code, other, f.Path)}
	}
	return err
}

// difference names the first columns that are in one list only.
func difference(have, want [][2]string) string {
	for _, c := range want {
		if !slices.Contains(have, c) {
			return "it lacks " + c[0] + " " + c[1]
		}
	}
	for _, c := range have {
		if !slices.Contains(want, c) {
			return "it has " + c[0] + " " + c[1] + " beyond them"
		}
	}
	return "their order differs"
}

// make makes the tables that are missing, lists and describes them.
func (p *plan) make(f *geopackage.File, now time.Time) error {
	if has, err := f.Has(ledger); err != nil {
		return err
	} else if !has {
		if err := f.Run("CREATE TABLE " + ledger + " (fid INTEGER PRIMARY KEY, table_name TEXT NOT NULL UNIQUE)"); err != nil {
			return err
		}
		if err := f.ListAttributes(geopackage.Description{Table: ledger, Identifier: ledger, Description: ledgerText, Changed: now}); err != nil {
			return err
		}
	}
	results, problems, runs := p.columns()
	asset := geopackage.Quote(p.layout.Columns[0].Name)
	source := "Results of leat register"
	for _, t := range []struct {
		name, key, title string
		columns          [][2]string
		more             string
		after            []string
	}{
		{p.names.results, p.key, source, results, ", UNIQUE (" + asset + ")", nil},
		{p.names.problems, "fid", source + ": rows that could not be computed, and why", problems, "", []string{
			"CREATE INDEX " + geopackage.Quote(p.names.problems+"_asset") + " ON " + geopackage.Quote(p.names.problems) + " (asset)"}},
		{p.names.runs, "fid", source + ": runs", runs, ", UNIQUE (run)", nil},
	} {
		if has, err := f.Has(t.name); err != nil {
			return err
		} else if has {
			continue
		}
		if err := f.Unlist(t.name); err != nil { // what a program that dropped the table may have left behind
			return err
		}
		create := "CREATE TABLE " + geopackage.Quote(t.name) + " (" + geopackage.Quote(t.key) + " INTEGER PRIMARY KEY"
		for _, c := range t.columns {
			create += ", " + geopackage.Quote(c[0]) + " " + c[1]
		}
		for _, statement := range append([]string{create + t.more + ")"}, t.after...) {
			if err := f.Run(statement); err != nil {
				return err
			}
		}
		if err := p.list(f, geopackage.Description{Table: t.name, Identifier: t.name, Description: t.title, Changed: now}); err != nil {
			return err
		}
		if err := f.Run("INSERT OR IGNORE INTO "+ledger+" (table_name) VALUES (?)", t.name); err != nil {
			return err
		}
	}
	return f.Describe(p.names.results, p.texts())
}

// list lists a new table: the results as a layer where they have a geometry, with its index and style.
func (p *plan) list(f *geopackage.File, d geopackage.Description) error {
	if d.Table != p.names.results || p.geometry < 0 {
		return f.ListAttributes(d)
	}
	c := &p.layout.Columns[p.geometry]
	s := &c.Spatial.System
	err := f.Run("INSERT INTO gpkg_spatial_ref_sys (srs_name, srs_id, organization, organization_coordsys_id, definition, description) SELECT ?1, ?2, ?3, ?4, ?5, ?6 WHERE NOT EXISTS (SELECT 1 FROM gpkg_spatial_ref_sys WHERE srs_id = ?2)",
		s.Name, s.ID, s.Organization, s.Code, s.Definition, s.Description)
	if err != nil {
		return err
	}
	g := geopackage.GeometryColumn{Name: c.Name, Type: c.Spatial.Type, SRS: s.ID, Z: int64(c.Spatial.Z), M: int64(c.Spatial.M)}
	if err := f.ListFeatures(d, g); err != nil {
		return err
	}
	table, err := f.Table(d.Table)
	if err != nil {
		return err
	}
	if err := f.AddIndex(table); err != nil {
		return err
	}
	if style := styleOf(p.layout); style != nil {
		return f.AddStyle(table, style)
	}
	return nil
}

// texts describes the columns of the results for people: "Normal depth [m]".
func (p *plan) texts() []geopackage.ColumnText {
	var out []geopackage.ColumnText
	for _, c := range p.layout.Columns {
		title := strings.ReplaceAll(c.Name, "_", " ")
		title = strings.ToUpper(title[:1]) + title[1:]
		if c.Unit != "" {
			title += " [" + c.Unit + "]"
		}
		text := c.Description
		if c.UCUM != "" {
			text = strings.TrimSpace(strings.TrimSuffix(text, ".") + " (UCUM " + c.UCUM + ")")
		}
		out = append(out, geopackage.ColumnText{Column: c.Name, Title: title, Description: text})
	}
	return out
}
