package postgres

import (
	"context"
	"errors"
	"fmt"
	"sync"
	"time"

	"github.com/jackc/pgx/v5/pgxpool"

	"leat/cmd/internal/register/row"
	"leat/cmd/internal/register/store"
)

// source is a table or view, with the table of its points.
type source struct {
	pool    *pgxpool.Pool
	table   table
	oid     uint32
	columns []column
	byName  map[string]*column
	key     *column

	points *points

	mutex   sync.Mutex
	readers map[*reader]bool // not closed yet
}

// points is the table that holds the points of surveyed sections.
type points struct {
	table   table
	columns []column
	byName  map[string]*column
	key     *column
	order   string // quoted
}

// OpenSource opens a table or view for reading. A fault of the specification is a *store.Misfit.
func OpenSource(ctx context.Context, spec *store.SourceSpec) (store.Source, error) {
	pool, err := connect(ctx, &spec.Database)
	if err != nil {
		return nil, err
	}
	s := &source{pool: pool, readers: map[*reader]bool{}}
	if err := s.open(ctx, spec); err != nil {
		pool.Close()
		return nil, err
	}
	return s, nil
}

func (s *source) open(ctx context.Context, spec *store.SourceSpec) error {
	var err error
	if s.table, s.oid, err = findTable(ctx, s.pool, spec.Schema, spec.Table, "table"); err != nil {
		return err
	}
	if s.columns, err = readColumns(ctx, s.pool, s.table, s.oid); err != nil {
		return err
	}
	s.byName = index(s.columns)
	if s.key, err = findKey(s.byName, s.table, spec.Key, "key"); err != nil {
		return err
	}
	if spec.Points == nil {
		return nil
	}
	p := &points{}
	var oid uint32
	schema := spec.Points.Schema
	if schema == "" {
		schema = spec.Schema
	}
	if p.table, oid, err = findTable(ctx, s.pool, schema, spec.Points.Table, "points.table"); err != nil {
		return err
	}
	if p.columns, err = readColumns(ctx, s.pool, p.table, oid); err != nil {
		return err
	}
	p.byName = index(p.columns)
	if p.key, err = findKey(p.byName, p.table, spec.Points.Key, "points.key"); err != nil {
		return err
	}
	if p.key.Kind != s.key.Kind {
		return &store.Misfit{Field: "points.key", Detail: fmt.Sprintf("The key of the points, %q, is of the type %s, that of the assets, %q, of the type %s: they cannot be the same values.",
			p.key.Name, p.key.Declared, s.key.Name, s.key.Declared)}
	}
	field, order := "points.order", spec.Points.Order
	if order == "" {
		field, order = "points.offset", spec.Points.Offset
	}
	if p.byName[order] == nil {
		return noColumn(field, p.table, order)
	}
	p.order = quote(order)
	s.points = p
	return nil
}

func index(columns []column) map[string]*column {
	byName := make(map[string]*column, len(columns))
	for i := range columns {
		byName[columns[i].Name] = &columns[i]
	}
	return byName
}

func noColumn(field string, t table, name string) error {
	return &store.Misfit{Field: field, Detail: fmt.Sprintf("The table %s has no column %q. Names are taken as they are written, capitals included.", t, name)}
}

func findKey(columns map[string]*column, t table, name, field string) (*column, error) {
	key, found := columns[name]
	switch {
	case !found:
		return nil, noColumn(field, t, name)
	case key.order == "":
		return nil, &store.Misfit{Field: field, Detail: fmt.Sprintf("The column %q is of the type %s, by which rows cannot be told apart for certain; a key is a whole number, a text or a uuid. "+
			"A view can turn it into one.", name, key.Declared)}
	}
	return key, nil
}

func (s *source) Columns() []row.Column { return public(s.columns) }

func (s *source) ChildColumns() []row.Column {
	if s.points == nil {
		return nil
	}
	return public(s.points.columns)
}

func public(columns []column) []row.Column {
	out := make([]row.Column, len(columns))
	for i := range columns {
		out[i] = columns[i].Column
	}
	return out
}

func (s *source) Ordered() bool { return true }

func (s *source) Close() error {
	s.mutex.Lock()
	for r := range s.readers {
		r.close() // the pool waits for their connections
	}
	clear(s.readers)
	s.mutex.Unlock()
	s.pool.Close()
	return nil
}

// countPatience is how long counting may take: it only serves to foretell the end.
const countPatience = 5 * time.Second

func (s *source) Count(ctx context.Context, query *store.Query) (int64, error) {
	var c clause
	c.between(s.key.order, s.key.parameter, query.After, query.Until)
	if err := c.filter(s.byName, query.Filter); err != nil {
		return 0, err
	}
	limited, cancel := context.WithTimeout(ctx, countPatience)
	defer cancel()
	var count int64
	err := s.pool.QueryRow(limited, "select count(*) from "+s.table.quoted()+c.where(), c.parameters...).Scan(&count)
	if err != nil && ctx.Err() == nil && errors.Is(limited.Err(), context.DeadlineExceeded) {
		return -1, nil
	}
	if err != nil {
		return 0, fmt.Errorf("counting the rows of %s: %w", s.table, err)
	}
	return count, nil
}

// twiceShown is how many values of a key that is not unique are named.
const twiceShown = 5

func (s *source) CheckKey(ctx context.Context, filter []store.Condition) error {
	var guaranteed bool
	err := again(ctx, func() error {
		return s.pool.QueryRow(ctx, `
select exists (select from pg_index i join pg_attribute a on a.attrelid = i.indrelid and a.attnum = i.indkey[0]
  where i.indrelid = $1 and i.indisunique and i.indisvalid and i.indnkeyatts = 1 and i.indpred is null and i.indexprs is null and a.attname = $2 and a.attnotnull)`, s.oid, s.key.Name).Scan(&guaranteed)
	})
	if err != nil || guaranteed {
		return err
	}
	var c clause
	if err := c.filter(s.byName, filter); err != nil {
		return err
	}
	from := " from " + s.table.quoted() + c.where()
	fault := &store.KeyFault{}
	err = again(ctx, func() error {
		return s.pool.QueryRow(ctx, "select count(*) - count("+quote(s.key.Name)+")"+from, c.parameters...).Scan(&fault.Nulls)
	})
	if err != nil {
		return fmt.Errorf("checking the key of %s: %w", s.table, err)
	}
	err = again(ctx, func() error {
		fault.Twice = fault.Twice[:0]
		// Nulls are counted above.
		rows, err := s.pool.Query(ctx, fmt.Sprintf("select k from (select %s::text as k%s) as keys where k is not null group by k having count(*) > 1 order by k limit %d", quote(s.key.Name), from, twiceShown), c.parameters...)
		if err != nil {
			return err
		}
		defer rows.Close()
		for rows.Next() {
			var value string
			if err := rows.Scan(&value); err != nil {
				return err
			}
			fault.Twice = append(fault.Twice, value)
		}
		return rows.Err()
	})
	if err != nil {
		return fmt.Errorf("checking the key of %s: %w", s.table, err)
	}
	if fault.Nulls > 0 || len(fault.Twice) > 0 {
		return fault
	}
	return nil
}
