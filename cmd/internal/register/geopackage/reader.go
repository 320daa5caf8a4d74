package geopackage

import (
	"context"
	"errors"
	"io"
	"strings"

	"leat/cmd/internal/geopackage"
	"leat/cmd/internal/register/row"
	"leat/cmd/internal/register/store"
)

// A reader gives the rows of a query page by page, each page in a transaction of its own that ends before anything is computed.
type reader struct {
	source *source
	query  *store.Query
	file   *geopackage.File
	first  string // the statement of the first page: the filter's parameters, then the limit
	next   string // the statement of a later page: the filter's parameters, then the key that it comes after, then the limit
	filter []row.Value
	kinds  []row.Kind
	after  row.Value // null before the first page
	ended  bool
	buffer []byte
	child  *childReader // nil without
}

func (s *source) Read(ctx context.Context, query *store.Query) (store.Reader, error) {
	f, err := geopackage.Open(ctx, s.spec.Path, geopackage.Read)
	if err != nil {
		return nil, err
	}
	r := &reader{source: s, query: query, file: f, after: query.After.Clone()}
	if err := r.prepare(ctx); err != nil {
		return nil, errors.Join(err, r.Close())
	}
	return r, nil
}

func (r *reader) prepare(ctx context.Context) error {
	s := r.source
	names := make([]string, len(r.query.Columns))
	for i, name := range r.query.Columns {
		c, err := find(s.columns, name, s.table.Name)
		if err != nil {
			return err
		}
		r.kinds = append(r.kinds, c.Kind)
		names[i] = "t." + geopackage.Quote(c.Name)
	}
	table := geopackage.Quote(s.table.Name)
	var where string
	where, r.filter = conditions(r.query.Filter)
	if !r.query.Until.IsNull() {
		where += " AND t." + geopackage.Quote(s.key.Name) + " COLLATE BINARY <= ?"
		r.filter = append(r.filter, r.query.Until)
	}
	from, order := table+" t", "t."+geopackage.Quote(s.key.Name)+" COLLATE BINARY"
	ordered, err := isOrdered(r.file, s.table, s.key.Name)
	if err != nil {
		return err
	}
	if !ordered && !s.table.View {
		// Without an index every page would sort the table anew. The order is made once instead, in a table of the connection's own.
		if err := sortKeys(r.file, s.table, s.key.Name); err != nil {
			return err
		}
		from, order = "temp.keys k JOIN "+table+" t ON t.rowid = k.place", "k.key"
	}
	r.first = "SELECT " + strings.Join(names, ", ") + " FROM " + from + " WHERE " + where + " ORDER BY " + order + " LIMIT ?"
	r.next = "SELECT " + strings.Join(names, ", ") + " FROM " + from + " WHERE " + where + " AND " + order + " > ? ORDER BY " + order + " LIMIT ?"
	if len(r.query.Child) > 0 && s.points != nil {
		r.child, err = s.readPoints(ctx, r.query.Child)
	}
	return err
}

// isOrdered reports whether rows can be had in the order of a column without sorting: it is the row's number, or the first of an index that
// compares bytes.
func isOrdered(f *geopackage.File, t *geopackage.Table, column string) (bool, error) {
	if strings.EqualFold(t.Key, column) {
		return true, nil
	}
	n, err := f.Integer(`SELECT count(*) FROM pragma_index_list(?1) l, pragma_index_xinfo(l.name) i WHERE i.seqno = 0 AND lower(i.name) = lower(?2) AND i."desc" = 0 AND i.coll = 'BINARY' AND l.partial = 0`,
		t.Name, column)
	return n > 0, err
}

// sortKeys makes the temporary table keys (key, place): the column's values in order, with the rows' numbers.
func sortKeys(f *geopackage.File, t *geopackage.Table, column string) error {
	if err := f.Run("CREATE TEMP TABLE keys (key, place INTEGER, PRIMARY KEY (key, place)) WITHOUT ROWID"); err != nil {
		return err
	}
	c := geopackage.Quote(column)
	return f.Run("INSERT INTO temp.keys SELECT " + c + ", rowid FROM " + geopackage.Quote(t.Name) + " WHERE " + c + " IS NOT NULL ORDER BY 1, 2")
}

func (r *reader) Next(ctx context.Context, page *row.Page, limit int) error {
	width := 0
	if r.child != nil {
		width = len(r.query.Child)
	}
	page.Reset(len(r.query.Columns), width)
	if r.ended {
		return io.EOF
	}
	if err := ctx.Err(); err != nil {
		return err
	}
	from := r.after
	if err := r.fill(page, limit); err != nil {
		return geopackage.Explain(r.file.Path, err)
	}
	if page.Rows() < limit {
		r.ended = true
	}
	if page.Rows() == 0 {
		return io.EOF
	}
	r.after = page.Row(page.Rows() - 1)[0].Clone()
	if r.child != nil {
		return geopackage.Explain(r.child.file.Path, r.child.fill(page, from, r.after))
	}
	return nil
}

func (r *reader) fill(page *row.Page, limit int) error {
	statement := r.next
	if r.after.IsNull() {
		statement = r.first
	}
	s, err := r.file.Prepare(statement)
	if err != nil {
		return err
	}
	defer s.Reset()
	at := 0
	for _, v := range r.filter {
		at++
		bind(s, at, v)
	}
	if !r.after.IsNull() {
		at++
		bind(s, at, r.after)
	}
	s.BindInt64(at+1, int64(limit))
	for {
		more, err := s.Step()
		if err != nil || !more {
			return err
		}
		cells := page.Add(0)
		for i, kind := range r.kinds {
			cells[i], r.buffer = cell(s, i, kind, page, r.buffer)
		}
	}
}

func (r *reader) Faults() []store.RowFault { return nil }

func (r *reader) Close() error {
	err := r.file.Close()
	if r.child != nil {
		err = errors.Join(err, r.child.file.Close())
	}
	return err
}
