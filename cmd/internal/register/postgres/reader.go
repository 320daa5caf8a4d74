package postgres

import (
	"context"
	"encoding/json"
	"fmt"
	"io"
	"strings"

	"github.com/jackc/pgx/v5"

	"leat/cmd/internal/register/row"
	"leat/cmd/internal/register/store"
)

// reader reads pages in the order of the key. Where an index gives that order, each page is a query of its own, which begins after the last key and holds nothing
// in between; else the rows are sorted once, and one query stays open.
type reader struct {
	source  *source
	query   *store.Query
	columns []*column
	child   []*column

	sorted bool // one query for all
	open   pgx.Rows
	cancel context.CancelFunc // of the open query
	after  row.Value          // the last key given
	ended  bool
}

func (s *source) Read(ctx context.Context, query *store.Query) (store.Reader, error) {
	r := &reader{source: s, query: query, after: query.After.Clone()}
	if len(query.Columns) == 0 || query.Columns[0] != s.key.Name {
		return nil, fmt.Errorf("a query of %s must begin with its key", s.table)
	}
	for _, name := range query.Columns {
		c, found := s.byName[name]
		if !found {
			return nil, noColumn("table", s.table, name)
		}
		r.columns = append(r.columns, c)
	}
	if query.Child != nil && s.points == nil {
		return nil, fmt.Errorf("a query of %s asks for points, and there is no table of them", s.table)
	}
	for _, name := range query.Child {
		c, found := s.points.byName[name]
		if !found {
			return nil, noColumn("points.table", s.points.table, name)
		}
		r.child = append(r.child, c)
	}
	var err error
	if r.sorted, err = r.mustSort(ctx); err != nil {
		return nil, err
	}
	s.mutex.Lock()
	defer s.mutex.Unlock()
	s.readers[r] = true
	return r, nil
}

// statement spells the query from the last key on, for at most so many rows, or all with 0.
func (r *reader) statement(limit int) (string, []any, error) {
	var c clause
	key := r.source.key
	c.between(key.order, key.parameter, r.after, r.query.Until)
	if !key.notNull { // CheckKey tells of them; here they would have no place in the order
		c.conditions = append(c.conditions, quote(key.Name)+" is not null")
	}
	if err := c.filter(r.source.byName, r.query.Filter); err != nil {
		return "", nil, err
	}
	expressions := make([]string, len(r.columns))
	for i, column := range r.columns {
		expressions[i] = column.expression
	}
	text := "select " + strings.Join(expressions, ", ") + " from " + r.source.table.quoted() + c.where() + " order by " + key.order
	if limit > 0 {
		text += " limit " + c.parameter("$%d::bigint", int64(limit))
	}
	return text, c.parameters, nil
}

// pageTried is the size of the page for which the server is asked how it would find it.
const pageTried = 1000

// mustSort reports whether the server would sort rows to find a page.
func (r *reader) mustSort(ctx context.Context) (bool, error) {
	text, parameters, err := r.statement(pageTried)
	if err != nil {
		return false, err
	}
	var plan []byte
	err = again(ctx, func() error {
		return r.source.pool.QueryRow(ctx, "explain (format json) "+text, parameters...).Scan(&plan)
	})
	if err != nil {
		return false, fmt.Errorf("reading %s: %w", r.source.table, err)
	}
	var plans []struct{ Plan planNode }
	if err := json.Unmarshal(plan, &plans); err != nil {
		return false, fmt.Errorf("reading the plan of a page of %s: %w", r.source.table, err)
	}
	for _, p := range plans {
		if p.Plan.sorts() {
			return true, nil
		}
	}
	return false, nil
}

type planNode struct {
	Type  string     `json:"Node Type"`
	Plans []planNode `json:"Plans"`
}

func (n *planNode) sorts() bool {
	if n.Type == "Sort" {
		return true
	}
	for i := range n.Plans {
		if n.Plans[i].sorts() {
			return true
		}
	}
	return false
}

func (r *reader) Next(ctx context.Context, page *row.Page, limit int) error {
	page.Reset(len(r.columns), len(r.child))
	if r.ended {
		return io.EOF
	}
	before := r.after
	if err := again(ctx, func() error { return r.rows(ctx, page, limit) }); err != nil {
		return fmt.Errorf("reading %s: %w", r.source.table, err)
	}
	if page.Rows() == 0 {
		r.ended = true
		return io.EOF
	}
	last := page.Row(page.Rows() - 1)[0].Clone()
	if len(r.child) > 0 {
		if err := again(ctx, func() error { return r.children(ctx, page, before, last) }); err != nil {
			return fmt.Errorf("reading %s: %w", r.source.points.table, err)
		}
	}
	r.after = last
	return nil
}

// rows fills the page. It may be called again after a lost connection.
func (r *reader) rows(ctx context.Context, page *row.Page, limit int) error {
	page.Reset(len(r.columns), len(r.child))
	if r.open == nil {
		size := limit
		if r.sorted {
			size = 0
		}
		text, parameters, err := r.statement(size)
		if err != nil {
			return err
		}
		// The query may outlive this call.
		var lasting context.Context
		lasting, r.cancel = context.WithCancel(context.WithoutCancel(ctx))
		if r.open, err = r.source.pool.Query(lasting, text, inBinary(parameters)...); err != nil {
			r.cancel()
			r.open = nil
			return err
		}
	}
	stop := context.AfterFunc(ctx, r.cancel)
	defer stop()
	for page.Rows() < limit && r.open.Next() {
		if err := fill(page, page.Add(0), r.columns, r.open.RawValues()); err != nil {
			r.close()
			return err
		}
	}
	if page.Rows() == limit && r.sorted {
		return nil // the query stays open for the next page
	}
	r.open.Close()
	err := r.open.Err()
	r.close()
	if err == nil && page.Rows() < limit {
		r.ended = page.Rows() == 0 || r.sorted
	}
	return err
}

// inBinary asks for all columns in their binary form, those of types too that the driver does not know.
func inBinary(parameters []any) []any {
	return append([]any{pgx.QueryResultFormats{pgx.BinaryFormatCode}}, parameters...)
}

// fill decodes the values of a row.
func fill(page *row.Page, values []row.Value, columns []*column, raw [][]byte) error {
	for i, c := range columns {
		if raw[i] == nil {
			continue
		}
		value, err := c.decode(page, raw[i])
		if err != nil {
			return fmt.Errorf("column %s: %w", quote(c.Name), err)
		}
		values[i] = value
	}
	return nil
}

// children adds the points of the page's rows: those of the range of its keys in one query, in the same order.
func (r *reader) children(ctx context.Context, page *row.Page, after, until row.Value) error {
	points := r.source.points
	page.DropChildren()
	var c clause
	c.between(points.key.order, points.key.parameter, after, until)
	expressions := []string{points.key.expression}
	for _, column := range r.child {
		expressions = append(expressions, column.expression)
	}
	rows, err := r.source.pool.Query(ctx, "select "+strings.Join(expressions, ", ")+" from "+points.table.quoted()+c.where()+" order by "+points.key.order+", "+points.order, inBinary(c.parameters)...)
	if err != nil {
		return err
	}
	defer rows.Close()
	current := 0
	for rows.Next() {
		raw := rows.RawValues()
		key, err := points.key.decode(page, raw[0])
		if err != nil {
			return err
		}
		for current < page.Rows() && page.Row(current)[0].Compare(key) < 0 {
			current++
		}
		if current == page.Rows() || page.Row(current)[0].Compare(key) != 0 {
			continue // points of an asset that is not read
		}
		if err := fill(page, page.AddChild(current), r.child, raw[1:]); err != nil {
			return err
		}
	}
	return rows.Err()
}

// Faults are none: a table has no row that cannot be read.
func (r *reader) Faults() []store.RowFault { return nil }

func (r *reader) close() {
	if r.open != nil {
		r.cancel() // else the rest of the rows would be read
		r.open.Close()
		r.open = nil
	}
}

func (r *reader) Close() error {
	r.close()
	r.source.mutex.Lock()
	defer r.source.mutex.Unlock()
	delete(r.source.readers, r)
	return nil
}
