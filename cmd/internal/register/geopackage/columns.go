package geopackage

import (
	"errors"
	"strings"

	"zombiezen.com/go/sqlite"

	"leat/cmd/internal/geopackage"
	"leat/cmd/internal/register/row"
	"leat/cmd/internal/register/store"
)

// kindOf tells what a column declared so holds (table of data types of the standard). A cell may all the same be of another kind: SQLite types
// cells, not columns.
func kindOf(declared string) row.Kind {
	word, _, _ := strings.Cut(strings.ToUpper(declared), "(")
	switch strings.TrimSpace(word) {
	case "BOOLEAN", "BOOL":
		return row.Bool
	case "TINYINT", "SMALLINT", "MEDIUMINT", "INT", "INTEGER", "BIGINT":
		return row.Int
	case "FLOAT", "DOUBLE", "REAL":
		return row.Float
	case "TEXT", "DATE", "DATETIME", "VARCHAR", "CHAR":
		return row.Text
	case "BLOB":
		return row.Bytes
	}
	return row.Null
}

// columnsOf describes the columns of a table with what the file says of its geometries.
func columnsOf(f *geopackage.File, t *geopackage.Table) ([]row.Column, error) {
	out := make([]row.Column, 0, len(t.Columns))
	for _, c := range t.Columns {
		column := row.Column{Name: c.Name, Kind: kindOf(c.Type), Declared: c.Type}
		if g := t.Geometry; g != nil && strings.EqualFold(g.Name, c.Name) {
			column.Kind, column.Geometry = row.Bytes, "geopackage"
			column.Spatial = &row.Spatial{Type: g.Type, Z: int(g.Z), M: int(g.M), System: row.ReferenceSystem{ID: g.SRS}}
			s := &column.Spatial.System
			err := f.Rows("SELECT srs_name, organization, organization_coordsys_id, definition, coalesce(description, '') FROM gpkg_spatial_ref_sys WHERE srs_id = ?", func(r *sqlite.Stmt) error {
				s.Name, s.Organization, s.Code, s.Definition, s.Description = r.ColumnText(0), r.ColumnText(1), r.ColumnInt64(2), r.ColumnText(3), r.ColumnText(4)
				return nil
			}, g.SRS)
			if err != nil {
				return nil, err
			}
		}
		out = append(out, column)
	}
	return out, nil
}

// cell reads one cell of the row that a statement stands at, into the page's memory. buffer is used again; it is returned as it has grown.
func cell(s *sqlite.Stmt, at int, kind row.Kind, page *row.Page, buffer []byte) (row.Value, []byte) {
	switch s.ColumnType(at) {
	case sqlite.TypeInteger:
		switch kind {
		case row.Bool:
			return row.OfBool(s.ColumnInt64(at) != 0), buffer
		case row.Float:
			return row.OfFloat(s.ColumnFloat(at)), buffer
		}
		return row.OfInt(s.ColumnInt64(at)), buffer
	case sqlite.TypeFloat:
		return row.OfFloat(s.ColumnFloat(at)), buffer
	case sqlite.TypeText, sqlite.TypeBlob:
		n := s.ColumnLen(at)
		if cap(buffer) < n {
			buffer = make([]byte, n, 2*n)
		}
		buffer = buffer[:n]
		s.ColumnBytes(at, buffer)
		if s.ColumnType(at) == sqlite.TypeBlob {
			return page.Blob(buffer), buffer
		}
		return page.Text(buffer), buffer
	}
	return row.Value{}, buffer
}

// parametersOf are values as parameters of a statement.
func parametersOf(values []row.Value) []any {
	out := make([]any, len(values))
	for i, v := range values {
		switch v.Kind {
		case row.Int:
			out[i] = v.Int()
		case row.Float:
			out[i] = v.Float()
		case row.Bool:
			out[i] = v.Bool()
		case row.Text:
			out[i] = string(v.Bytes())
		case row.Bytes:
			out[i] = v.Bytes()
		case row.Time:
			out[i] = v.Time().Format(timeForm)
		}
	}
	return out
}

// timeForm is a DATETIME of the standard, which allows any number of digits of a second.
const timeForm = "2006-01-02T15:04:05.000000Z"

// bind gives a value to a parameter of a prepared statement, without a copy where it can.
func bind(s *sqlite.Stmt, at int, v row.Value) {
	switch v.Kind {
	case row.Null:
		s.BindNull(at)
	case row.Int:
		s.BindInt64(at, v.Int())
	case row.Float:
		s.BindFloat(at, v.Float())
	case row.Bool:
		s.BindBool(at, v.Bool())
	case row.Text:
		s.BindText(at, string(v.Bytes()))
	case row.Bytes:
		s.BindBytes(at, v.Bytes())
	case row.Time:
		s.BindText(at, v.Time().Format(timeForm))
	}
}

// misfit makes a fault of the specification out of an error; an error that is already one, and nil, come back as they are.
func misfit(field string, err error) error {
	if err == nil || errors.As(err, new(*store.Misfit)) {
		return err
	}
	text := err.Error()
	if !strings.HasSuffix(text, ".") {
		text += "."
	}
	return &store.Misfit{Field: field, Detail: strings.ToUpper(text[:1]) + text[1:]}
}
