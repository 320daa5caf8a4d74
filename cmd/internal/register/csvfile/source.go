// Package csvfile reads registers from CSV files (RFC 4180) and writes results to them.
package csvfile

import (
	"bufio"
	"bytes"
	"cmp"
	"context"
	"encoding/csv"
	"errors"
	"fmt"
	"io"
	"os"
	"slices"
	"strings"
	"unicode/utf8"

	"leat/cmd/internal/register/row"
	"leat/cmd/internal/register/store"
)

// A source is a CSV file with a header. Every column is text; what the texts mean is for the mapping to say.
type source struct {
	spec   *store.SourceSpec
	header []string
	points *points
}

// OpenSource opens a CSV file as a register. Its points, if it has any, are another CSV file, which is kept in memory.
func OpenSource(ctx context.Context, spec *store.SourceSpec) (store.Source, error) {
	s := &source{spec: spec}
	t, err := open(spec.Path, &spec.CSV)
	if err != nil {
		return nil, misfit("path", err)
	}
	s.header = t.header
	if err := t.Close(); err != nil {
		return nil, err
	}
	if spec.Points != nil {
		if spec.Points.Path == "" {
			return nil, &store.Misfit{Field: "points", Detail: "The points of a CSV register stand in a CSV file of their own; name it with path."}
		}
		if s.points, err = readPoints(ctx, spec.Points, &spec.CSV); err != nil {
			return nil, misfit("points.path", err)
		}
	}
	return s, nil
}

// misfit gives an error of a file its place in the mapping file.
func misfit(field string, err error) error {
	var told *store.Misfit
	if errors.As(err, &told) {
		return &store.Misfit{Field: field, Detail: told.Detail}
	}
	return &store.Misfit{Field: field, Detail: "The file cannot be read: " + err.Error() + "."}
}

// A table is an open file behind its header.
type table struct {
	*csv.Reader
	file   *os.File
	header []string
}

// bufferBytes is read at a time.
const bufferBytes = 256 << 10

// open opens a file and reads its header.
func open(path string, spec *store.CSVSpec) (*table, error) {
	file, err := os.Open(path)
	if err != nil {
		return nil, err
	}
	buffered := bufio.NewReaderSize(file, bufferBytes)
	if mark, _ := buffered.Peek(3); bytes.Equal(mark, []byte("\xef\xbb\xbf")) {
		buffered.Discard(3)
	}
	t := &table{csv.NewReader(buffered), file, nil}
	t.Comma = rune(cmp.Or(spec.Delimiter, ','))
	t.ReuseRecord = true
	header, err := t.Read()
	if err == nil {
		err = t.name(header)
	} else if errors.Is(err, io.EOF) {
		err = &store.Misfit{Detail: path + " is empty; a CSV file begins with a line of column names."}
	}
	if err != nil {
		file.Close()
		return nil, err
	}
	return t, nil
}

// name takes over the header.
func (t *table) name(header []string) error {
	t.header = slices.Clone(header)
	if len(header) == 1 {
		for _, other := range []string{";", ",", "\t", "|"} {
			if strings.Contains(header[0], other) && other != string(t.Comma) {
				return &store.Misfit{Detail: fmt.Sprintf("The header is one column, %q; set delimiter to %q.", header[0], other)}
			}
		}
	}
	for i, name := range header {
		switch {
		case name == "":
			return &store.Misfit{Detail: fmt.Sprintf("Column %d of the header has no name.", i+1)}
		case !utf8.ValidString(name):
			return &store.Misfit{Detail: fmt.Sprintf("The header's column %d is not UTF-8; save the file as UTF-8.", i+1)}
		case slices.Contains(header[:i], name):
			return &store.Misfit{Detail: fmt.Sprintf("The header has two columns %q.", name)}
		}
	}
	return nil
}

// Close closes the file.
func (t *table) Close() error { return t.file.Close() }

// next reads the next record. A fault costs the record only.
func (t *table) next() (record []string, line int64, fault string, err error) {
	record, err = t.Read()
	var bad *csv.ParseError
	switch {
	case err == nil:
		at, _ := t.FieldPos(0)
		return record, int64(at), "", nil
	case errors.Is(err, csv.ErrFieldCount):
		at, _ := t.FieldPos(0)
		return record, int64(at), fmt.Sprintf("The line has %d cells, the header %d.", len(record), len(t.header)), nil
	case errors.As(err, &bad):
		return nil, int64(bad.StartLine), "The line is not CSV: " + bad.Err.Error() + ".", nil
	}
	return nil, 0, "", err
}

// Columns are those of the header.
func (s *source) Columns() []row.Column { return columnsOf(s.header) }

// ChildColumns are those of the file of points.
func (s *source) ChildColumns() []row.Column {
	if s.points == nil {
		return nil
	}
	return columnsOf(s.points.header)
}

func columnsOf(header []string) []row.Column {
	columns := make([]row.Column, len(header))
	for i, name := range header {
		columns[i] = row.Column{Name: name}
	}
	return columns
}

// Ordered is false: lines come as they stand.
func (s *source) Ordered() bool { return false }

// CheckKey reads the file once, and again where it must.
func (s *source) CheckKey(ctx context.Context, filter []store.Condition) error {
	return store.CheckKeys(func(found func(row.Value)) error {
		r, err := s.read(ctx, &store.Query{Columns: []string{s.spec.Key}, Filter: filter})
		if err != nil {
			return err
		}
		defer r.Close()
		for {
			key, _, err := r.step(ctx)
			switch {
			case errors.Is(err, io.EOF):
				return nil
			case err != nil:
				return err
			case key != nil: // else the line cannot be read, which is told in its turn
				found(*key)
			}
		}
	})
}

// Count counts lines, which is exact unless a cell has several; with a filter nobody knows.
func (s *source) Count(ctx context.Context, q *store.Query) (int64, error) {
	if len(q.Filter) > 0 || !q.After.IsNull() {
		return -1, nil
	}
	file, err := os.Open(s.spec.Path)
	if err != nil {
		return 0, err
	}
	defer file.Close()
	lines, last := int64(-1), byte('\n')
	for buffer := make([]byte, bufferBytes); ; {
		n, err := file.Read(buffer)
		if n > 0 {
			lines += int64(bytes.Count(buffer[:n], []byte{'\n'}))
			last = buffer[n-1]
		}
		switch {
		case errors.Is(err, io.EOF):
			if last != '\n' {
				lines++
			}
			return max(lines, 0), nil
		case err != nil:
			return 0, err
		case ctx.Err() != nil:
			return 0, context.Cause(ctx)
		}
	}
}

// Read begins to read. Where After or Until are given, the file is gone through once to find them.
func (s *source) Read(ctx context.Context, q *store.Query) (store.Reader, error) {
	first, last := int64(0), int64(-1)
	if !q.After.IsNull() || !q.Until.IsNull() {
		var err error
		if first, last, err = s.bounds(ctx, q); err != nil {
			return nil, err
		}
	}
	r, err := s.read(ctx, q)
	if err != nil {
		return nil, err
	}
	r.first, r.last = first, last
	return r, nil
}

// bounds returns the lines after which, and up to which, a query reads. A key that is not there any more bounds nothing.
func (s *source) bounds(ctx context.Context, q *store.Query) (first, last int64, err error) {
	r, err := s.read(ctx, &store.Query{Columns: q.Columns[:1]})
	if err != nil {
		return 0, 0, err
	}
	defer r.Close()
	last = -1
	for {
		key, line, err := r.step(ctx)
		switch {
		case errors.Is(err, io.EOF):
			return first, last, nil
		case err != nil:
			return 0, 0, err
		case key == nil:
			continue
		}
		if bytes.Equal(key.Bytes(), q.After.Bytes()) && !q.After.IsNull() {
			first = line
		}
		if bytes.Equal(key.Bytes(), q.Until.Bytes()) && !q.Until.IsNull() {
			last = line
		}
	}
}

func (s *source) read(_ context.Context, q *store.Query) (*reader, error) {
	t, err := open(s.spec.Path, &s.spec.CSV)
	if err != nil {
		return nil, err
	}
	if !slices.Equal(t.header, s.header) {
		t.Close()
		return nil, fmt.Errorf("the header of %s has changed while it was read", s.spec.Path)
	}
	r := &reader{source: s, table: t, query: q, last: -1}
	for _, name := range q.Columns {
		r.columns = append(r.columns, slices.Index(t.header, name))
	}
	for _, c := range q.Filter {
		r.filter = append(r.filter, slices.Index(t.header, c.Column))
	}
	if q.Child != nil && s.points != nil {
		r.child = s.points.columns(q.Child)
	}
	return r, nil
}

// A reader reads records that its query lets through.
type reader struct {
	*source
	table   *table
	query   *store.Query
	columns []int // of the header
	filter  []int
	child   []int
	first   int64 // lines up to this one are passed over
	last    int64 // the last line to read; -1 for all
	ended   bool
	faults  []store.RowFault
	page    row.Page // of step
}

// step reads one row and returns its key, nil where the line cannot be read.
func (r *reader) step(ctx context.Context) (key *row.Value, line int64, err error) {
	if err := r.Next(ctx, &r.page, 1); err != nil {
		return nil, 0, err
	}
	if len(r.faults) > 0 {
		return nil, 0, nil
	}
	return &r.page.Row(0)[0], r.page.Line(0), nil
}

// Next reads the next rows.
func (r *reader) Next(ctx context.Context, page *row.Page, limit int) error {
	page.Reset(len(r.columns), len(r.child))
	r.faults = r.faults[:0]
	for page.Rows() < limit && !r.ended {
		if page.Rows()%1024 == 0 && ctx.Err() != nil {
			return context.Cause(ctx)
		}
		record, line, fault, err := r.table.next()
		if errors.Is(err, io.EOF) {
			r.ended = true
			break
		}
		if err != nil {
			return fmt.Errorf("%s: %w", r.spec.Path, err)
		}
		if line <= r.first {
			continue
		}
		if r.last >= 0 && line > r.last {
			r.ended = true
			break
		}
		r.add(page, record, line, fault)
	}
	if page.Rows() == 0 {
		return io.EOF
	}
	return nil
}

// add puts a record into the page, if the filter lets it through.
func (r *reader) add(page *row.Page, record []string, line int64, fault string) {
	if fault == "" {
		for i := range r.query.Filter {
			if !r.query.Filter[i].Matches(row.OfString(record[r.filter[i]]), cmp.Or(r.spec.CSV.Decimal, '.')) {
				return
			}
		}
	}
	at := page.Rows()
	values := page.Add(line)
	if fault != "" {
		if c := r.columns[0]; c < len(record) {
			values[0] = text(page, record[c])
		}
		r.faults = append(r.faults, store.RowFault{Row: at, Detail: fault})
		return
	}
	for i, c := range r.columns {
		if !utf8.ValidString(record[c]) {
			r.faults = append(r.faults, store.RowFault{Row: at, Column: r.query.Columns[i], Detail: "The cell is not UTF-8; save the file as UTF-8."})
			return
		}
		values[i] = text(page, record[c])
	}
	if r.child != nil {
		r.points.add(page, at, record[r.columns[0]], r.child)
	}
}

// text is a cell; null where it is empty.
func text(page *row.Page, cell string) row.Value {
	if cell == "" {
		return row.Value{}
	}
	return page.String(cell)
}

// Faults are those of the last page.
func (r *reader) Faults() []store.RowFault { return r.faults }

// Close closes the file.
func (r *reader) Close() error { return r.table.Close() }

// Close has nothing to close: each reader has the file open for itself.
func (s *source) Close() error { return nil }
