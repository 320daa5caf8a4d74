package geopackage

import "zombiezen.com/go/sqlite/sqlitex"

// The tables of the extension gpkg_schema (annex F.9).
const schemaTables = `
CREATE TABLE IF NOT EXISTS gpkg_data_columns (
  table_name TEXT NOT NULL,
  column_name TEXT NOT NULL,
  name TEXT,
  title TEXT,
  description TEXT,
  mime_type TEXT,
  constraint_name TEXT,
  CONSTRAINT pk_gdc PRIMARY KEY (table_name, column_name),
  CONSTRAINT gdc_tn UNIQUE (table_name, name)
);
CREATE TABLE IF NOT EXISTS gpkg_data_column_constraints (
  constraint_name TEXT NOT NULL,
  constraint_type TEXT NOT NULL,
  value TEXT,
  min NUMERIC,
  min_is_inclusive BOOLEAN,
  max NUMERIC,
  max_is_inclusive BOOLEAN,
  description TEXT,
  CONSTRAINT gdcc_ntv UNIQUE (constraint_name, constraint_type, value)
);`

const schemaExtension = "http://www.geopackage.org/spec140/#extension_schema"

// ColumnText says what a column means, for people.
type ColumnText struct {
	Column      string
	Title       string // "Normal depth [m]"
	Description string
}

// Describe writes titles and descriptions of columns to gpkg_data_columns (requirements 103 to 106 and 141) in place of those that stood there.
func (f *File) Describe(table string, columns []ColumnText) error {
	if err := sqlitex.ExecuteScript(f.Conn, schemaTables, nil); err != nil {
		return Explain(f.Path, err)
	}
	for _, name := range []string{"gpkg_data_columns", "gpkg_data_column_constraints"} {
		if err := f.Extend(name, "", "gpkg_schema", schemaExtension, "read-write"); err != nil {
			return err
		}
	}
	for _, c := range columns {
		err := f.Run("INSERT INTO gpkg_data_columns (table_name, column_name, name, title, description) VALUES (?, ?, ?, ?, ?) "+
			"ON CONFLICT (table_name, column_name) DO UPDATE SET title = excluded.title, description = excluded.description", table, c.Column, c.Column, c.Title, c.Description)
		if err != nil {
			return err
		}
	}
	return nil
}
