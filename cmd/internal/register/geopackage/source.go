package geopackage

import (
	"context"
	"errors"
	"fmt"
	"slices"
	"strings"

	"zombiezen.com/go/sqlite"

	"leat/cmd/internal/geopackage"
	"leat/cmd/internal/register/row"
	"leat/cmd/internal/register/store"
)

// A source is a table, layer or view of a GeoPackage that is read, with the table of points of its surveyed sections, if there is one. Its methods
// open connections of their own, so that they can be called at the same time.
type source struct {
	spec         *store.SourceSpec
	table        *geopackage.Table
	columns      []row.Column
	key          row.Column
	points       *geopackage.Table // nil without
	pointsPath   string
	pointColumns []row.Column
}

// OpenSource opens the table that a specification names. Faults of the specification are *store.Misfit.
func OpenSource(ctx context.Context, spec *store.SourceSpec) (store.Source, error) {
	f, err := geopackage.Open(ctx, spec.Path, geopackage.Read)
	if err != nil {
		return nil, misfit("path", err)
	}
	defer f.Close()
	s := &source{spec: spec}
	if s.table, err = f.Table(spec.Table); err != nil {
		return nil, misfit("table", err)
	}
	if s.columns, err = columnsOf(f, s.table); err != nil {
		return nil, err
	}
	if s.key, err = keyColumn(s.columns, spec.Key, s.table.Name, "key"); err != nil {
		return nil, err
	}
	if spec.Points != nil {
		if err := s.openPoints(ctx); err != nil {
			return nil, err
		}
	}
	return s, nil
}

func (s *source) openPoints(ctx context.Context) error {
	points := s.spec.Points
	s.pointsPath = points.Path
	if s.pointsPath == "" {
		s.pointsPath = s.spec.Path
	}
	f, err := geopackage.Open(ctx, s.pointsPath, geopackage.Read)
	if err != nil {
		return misfit("points.path", err)
	}
	defer f.Close()
	if s.points, err = f.Table(points.Table); err != nil {
		return misfit("points.table", err)
	}
	if s.pointColumns, err = columnsOf(f, s.points); err != nil {
		return err
	}
	key, err := keyColumn(s.pointColumns, points.Key, s.points.Name, "points.key")
	if err != nil {
		return err
	}
	if key.Kind != s.key.Kind {
		return &store.Misfit{Field: "points.key", Detail: fmt.Sprintf("The key of the points, %s of %s, is declared as %s, and the key of the assets, %s of %s, as %s; they must be of one kind to be compared.",
			key.Name, s.points.Name, key.Declared, s.key.Name, s.table.Name, s.key.Declared)}
	}
	for _, c := range []struct{ field, name string }{{"points.offset", points.Offset}, {"points.level", points.Level}, {"points.order", points.Order}} {
		if c.name == "" && c.field == "points.order" {
			continue
		}
		if _, err := find(s.pointColumns, c.name, s.points.Name); err != nil {
			return misfit(c.field, err)
		}
	}
	return nil
}

// keyColumn finds a key and makes sure that its values can be put in order.
func keyColumn(columns []row.Column, name, table, field string) (row.Column, error) {
	c, err := find(columns, name, table)
	if err != nil {
		return c, misfit(field, err)
	}
	if c.Kind != row.Int && c.Kind != row.Text {
		return c, &store.Misfit{Field: field, Detail: fmt.Sprintf("The column %s of %s is declared as %q; a key is a column of whole numbers or of texts.", c.Name, table, c.Declared)}
	}
	return c, nil
}

func find(columns []row.Column, name, table string) (row.Column, error) {
	at := slices.IndexFunc(columns, func(c row.Column) bool { return strings.EqualFold(c.Name, name) })
	if at >= 0 {
		return columns[at], nil
	}
	names := make([]string, len(columns))
	for i, c := range columns {
		names[i] = c.Name
	}
	return row.Column{}, fmt.Errorf("%s has no column %q; it has %s", table, name, strings.Join(names, ", "))
}

func (s *source) Columns() []row.Column      { return s.columns }
func (s *source) ChildColumns() []row.Column { return s.pointColumns }

// Ordered is true: SQLite compares texts by their bytes unless told otherwise, and it is told so here.
func (s *source) Ordered() bool { return true }

func (s *source) Close() error { return nil }

func (s *source) CheckKey(ctx context.Context, filter []store.Condition) error {
	f, err := geopackage.Open(ctx, s.spec.Path, geopackage.Read)
	if err != nil {
		return err
	}
	defer f.Close()
	key := "t." + geopackage.Quote(s.key.Name)
	where, values := conditions(filter)
	parameters := parametersOf(values)
	from := " FROM " + geopackage.Quote(s.table.Name) + " t WHERE " + where
	nulls, err := f.Integer("SELECT count(*)"+from+" AND "+key+" IS NULL", parameters...)
	if err != nil {
		return err
	}
	if nulls > 0 {
		return &store.KeyFault{Nulls: nulls}
	}
	kind := "integer"
	if s.key.Kind == row.Text {
		kind = "text"
	}
	other := ""
	err = f.Rows("SELECT typeof("+key+"), "+key+from+" AND typeof("+key+") <> '"+kind+"' LIMIT 1", func(r *sqlite.Stmt) error {
		other = fmt.Sprintf("The key column %s is declared as %s and holds %q, which is stored as %s; keys must be of one kind throughout.", s.key.Name, s.key.Declared, r.ColumnText(1), r.ColumnText(0))
		return nil
	}, parameters...)
	if err != nil {
		return err
	}
	if other != "" {
		return &store.Misfit{Field: "key", Detail: other}
	}
	if unique, err := isUnique(f, s.table, s.key.Name); err != nil || unique {
		return err
	}
	fault := &store.KeyFault{}
	err = f.Rows("SELECT "+key+" COLLATE BINARY"+from+" GROUP BY 1 HAVING count(*) > 1 ORDER BY 1 LIMIT 5", func(r *sqlite.Stmt) error {
		fault.Twice = append(fault.Twice, r.ColumnText(0))
		return nil
	}, parameters...)
	if err != nil {
		return err
	}
	if len(fault.Twice) > 0 {
		return fault
	}
	return nil
}

// isUnique reports whether SQLite itself keeps a column's values apart: it is the row's number, or has a unique index of its own that compares bytes.
func isUnique(f *geopackage.File, t *geopackage.Table, column string) (bool, error) {
	if strings.EqualFold(t.Key, column) {
		return true, nil
	}
	n, err := f.Integer(`SELECT count(*) FROM pragma_index_list(?1) l WHERE l."unique" = 1 AND l.partial = 0
  AND (SELECT count(*) FROM pragma_index_xinfo(l.name) i WHERE i.key = 1) = 1
  AND (SELECT count(*) FROM pragma_index_xinfo(l.name) i WHERE i.key = 1 AND lower(i.name) = lower(?2) AND i.coll = 'BINARY') = 1`, t.Name, column)
	return n > 0, err
}

func (s *source) Count(ctx context.Context, query *store.Query) (int64, error) {
	f, err := geopackage.Open(ctx, s.spec.Path, geopackage.Read)
	if err != nil {
		return 0, err
	}
	where, values := conditions(query.Filter)
	key := "t." + geopackage.Quote(s.key.Name) + " COLLATE BINARY"
	if !query.After.IsNull() {
		where += " AND " + key + " > ?"
		values = append(values, query.After)
	}
	if !query.Until.IsNull() {
		where += " AND " + key + " <= ?"
		values = append(values, query.Until)
	}
	n, err := f.Integer("SELECT count(*) FROM "+geopackage.Quote(s.table.Name)+" t WHERE "+where, parametersOf(values)...)
	return n, errors.Join(err, f.Close())
}

// conditions writes a filter on the table t as SQL in which every value is a parameter.
func conditions(filter []store.Condition) (where string, parameters []row.Value) {
	parts := []string{"1"}
	for _, c := range filter {
		column := "t." + geopackage.Quote(c.Column) + " COLLATE BINARY"
		parameters = append(parameters, c.Values...)
		marks := strings.TrimSuffix(strings.Repeat("?, ", len(c.Values)), ", ")
		switch c.Op {
		case store.AnyOf:
			parts = append(parts, column+" IN ("+marks+")")
		case store.NoneOf:
			parts = append(parts, column+" IS NOT NULL AND "+column+" NOT IN ("+marks+")")
		case store.Above:
			parts = append(parts, column+" > ?")
		case store.AtLeast:
			parts = append(parts, column+" >= ?")
		case store.Below:
			parts = append(parts, column+" < ?")
		case store.AtMost:
			parts = append(parts, column+" <= ?")
		case store.IsNull:
			parts = append(parts, column+" IS NULL")
		case store.NotNull:
			parts = append(parts, column+" IS NOT NULL")
		}
	}
	return strings.Join(parts, " AND "), parameters
}
