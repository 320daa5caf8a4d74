package csvfile

import (
	"cmp"
	"context"
	"errors"
	"fmt"
	"io"
	"slices"
	"strconv"
	"strings"

	"leat/cmd/internal/register/row"
	"leat/cmd/internal/register/store"
)

// points are the rows of a file of points, in memory.
type points struct {
	header []string
	rows   map[string][][]string // by the asset's key, in order
}

// readPoints reads a file of points and puts those of each asset into order.
func readPoints(ctx context.Context, spec *store.PointsSpec, form *store.CSVSpec) (*points, error) {
	t, err := open(spec.Path, form)
	if err != nil {
		return nil, err
	}
	defer t.Close()
	p := &points{header: t.header, rows: map[string][][]string{}}
	key := slices.Index(t.header, spec.Key)
	order := slices.Index(t.header, cmp.Or(spec.Order, spec.Offset))
	if key < 0 || order < 0 {
		return p, nil // told with its line when the mapping is compiled
	}
	for {
		record, line, fault, err := t.next()
		switch {
		case errors.Is(err, io.EOF):
			for _, rows := range p.rows {
				sort(rows, order, cmp.Or(form.Decimal, '.'))
			}
			return p, nil
		case err != nil:
			return nil, err
		case fault != "":
			return nil, &store.Misfit{Detail: fmt.Sprintf("%s, line %d: %s", spec.Path, line, fault)}
		case ctx.Err() != nil:
			return nil, context.Cause(ctx)
		}
		p.rows[record[key]] = append(p.rows[record[key]], slices.Clone(record))
	}
}

// sort orders rows by a column: as numbers, and what is none by its text behind them.
func sort(rows [][]string, column int, decimal byte) {
	slices.SortStableFunc(rows, func(a, b []string) int {
		x, first := number(a[column], decimal)
		y, second := number(b[column], decimal)
		switch {
		case first && second:
			return cmp.Compare(x, y)
		case first != second:
			if first {
				return -1
			}
			return 1
		}
		return strings.Compare(a[column], b[column])
	})
}

func number(text string, decimal byte) (float64, bool) {
	if decimal != '.' {
		text = strings.Replace(text, string(rune(decimal)), ".", 1)
	}
	v, err := strconv.ParseFloat(strings.TrimSpace(text), 64)
	return v, err == nil
}

// columns are the places of columns in the header.
func (p *points) columns(names []string) []int {
	out := make([]int, len(names))
	for i, name := range names {
		out[i] = slices.Index(p.header, name)
	}
	return out
}

// add puts the points of an asset into a page.
func (p *points) add(page *row.Page, at int, key string, columns []int) {
	for _, record := range p.rows[key] {
		values := page.AddChild(at)
		for i, c := range columns {
			values[i] = text(page, record[c])
		}
	}
}
