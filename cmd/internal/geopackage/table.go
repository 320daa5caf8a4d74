package geopackage

import (
	"fmt"
	"slices"
	"strings"

	"zombiezen.com/go/sqlite"
)

// A Column is one column of a table, as declared.
type Column struct {
	Name    string
	Type    string // declared: "REAL", "TEXT", "MEDIUMINT", …; empty in a view of expressions
	NotNull bool
}

// A Table is a table or view that a GeoPackage offers to its readers.
type Table struct {
	Name     string
	View     bool
	Contents string // data_type of gpkg_contents: "features", "attributes", …; empty for a table that is not listed there
	Key      string // the INTEGER PRIMARY KEY, which is the row's number; empty for views
	Columns  []Column
	Geometry *GeometryColumn // nil without one
}

// A GeometryColumn is a row of gpkg_geometry_columns.
type GeometryColumn struct {
	Name string
	Type string // "LINESTRING", "GEOMETRY", …
	SRS  int64  // srs_id
	Z, M int64  // 0 prohibited, 1 mandatory, 2 optional
}

// Column returns a column by its name; SQL's names are the same in any letter case.
func (t *Table) Column(name string) (Column, bool) {
	at := slices.IndexFunc(t.Columns, func(c Column) bool { return strings.EqualFold(c.Name, name) })
	if at < 0 {
		return Column{}, false
	}
	return t.Columns[at], true
}

// Tables returns the names of the layers and tables that the file lists in gpkg_contents, in the order of their names.
func (f *File) Tables() ([]string, error) {
	var out []string
	err := f.Rows("SELECT table_name FROM gpkg_contents WHERE data_type IN ('features', 'attributes') ORDER BY table_name", func(s *sqlite.Stmt) error {
		out = append(out, s.ColumnText(0))
		return nil
	})
	return out, err
}

// Has reports whether a table, view or index of the name exists in the file, listed or not.
func (f *File) Has(name string) (bool, error) {
	n, err := f.Integer("SELECT count(*) FROM sqlite_master WHERE lower(name) = lower(?)", name)
	return n > 0, err
}

// Table describes a table or view of the file, whether gpkg_contents lists it or not. One that does not exist is an error that names those that do.
func (f *File) Table(name string) (*Table, error) {
	t := &Table{}
	err := f.Rows("SELECT name, type FROM sqlite_master WHERE type IN ('table', 'view') AND lower(name) = lower(?)", func(s *sqlite.Stmt) error {
		t.Name, t.View = s.ColumnText(0), s.ColumnText(1) == "view"
		return nil
	}, name)
	if err != nil {
		return nil, err
	}
	if t.Name == "" {
		names, err := f.Tables()
		if err != nil {
			return nil, err
		}
		return nil, fmt.Errorf("%s has no table or layer %q; it has %s", f.Path, name, strings.Join(names, ", "))
	}
	keys := 0
	err = f.Rows("SELECT name, type, \"notnull\", pk FROM pragma_table_info(?)", func(s *sqlite.Stmt) error {
		c := Column{Name: s.ColumnText(0), Type: s.ColumnText(1), NotNull: s.ColumnInt(2) != 0}
		t.Columns = append(t.Columns, c)
		if s.ColumnInt(3) > 0 {
			keys++
			if strings.EqualFold(c.Type, "INTEGER") {
				t.Key = c.Name
			}
		}
		return nil
	}, t.Name)
	if err != nil {
		return nil, err
	}
	if keys != 1 {
		t.Key = ""
	}
	if t.Contents, err = f.Text("SELECT data_type FROM gpkg_contents WHERE lower(table_name) = lower(?)", t.Name); err != nil {
		return nil, err
	}
	if has, err := f.Has("gpkg_geometry_columns"); err != nil || !has {
		return t, err
	}
	err = f.Rows("SELECT column_name, geometry_type_name, srs_id, z, m FROM gpkg_geometry_columns WHERE lower(table_name) = lower(?)", func(s *sqlite.Stmt) error {
		t.Geometry = &GeometryColumn{Name: s.ColumnText(0), Type: strings.ToUpper(s.ColumnText(1)), SRS: s.ColumnInt64(2), Z: s.ColumnInt64(3), M: s.ColumnInt64(4)}
		return nil
	}, t.Name)
	return t, err
}
