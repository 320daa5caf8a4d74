package geopackage

import (
	"context"
	"errors"
	"strings"

	"leat/cmd/internal/geopackage"
	"leat/cmd/internal/register/row"
)

// A childReader gives the points of the assets of a page.
type childReader struct {
	file   *geopackage.File
	first  string // the statement of the first page: the last key of the page
	next   string // the statement of a later page: the key before the page, the last key of the page
	kinds  []row.Kind
	key    row.Kind
	buffer []byte
	keys   row.Page // memory for the keys of points
}

func (s *source) readPoints(ctx context.Context, columns []string) (*childReader, error) {
	f, err := geopackage.Open(ctx, s.pointsPath, geopackage.Read)
	if err != nil {
		return nil, err
	}
	c := &childReader{file: f, key: s.key.Kind}
	if err := c.prepare(s, columns); err != nil {
		return nil, errors.Join(err, f.Close())
	}
	return c, nil
}

func (c *childReader) prepare(s *source, columns []string) error {
	spec, table := s.spec.Points, geopackage.Quote(s.points.Name)
	key := "t." + geopackage.Quote(spec.Key) + " COLLATE BINARY"
	names := []string{key}
	for _, name := range columns {
		column, err := find(s.pointColumns, name, s.points.Name)
		if err != nil {
			return err
		}
		names = append(names, "t."+geopackage.Quote(column.Name))
		c.kinds = append(c.kinds, column.Kind)
	}
	from := table + " t"
	ordered, err := isOrdered(c.file, s.points, spec.Key)
	if err != nil {
		return err
	}
	if !ordered && !s.points.View {
		if err := sortKeys(c.file, s.points, spec.Key); err != nil {
			return err
		}
		from, key = "temp.keys k JOIN "+table+" t ON t.rowid = k.place", "k.key"
		names[0] = key
	}
	by := spec.Order
	if by == "" {
		by = spec.Offset
	}
	order := key + ", t." + geopackage.Quote(by)
	if !s.points.View {
		order += ", t.rowid" // points of one place in the order in which they were booked
	}
	c.first = "SELECT " + strings.Join(names, ", ") + " FROM " + from + " WHERE " + key + " <= ? ORDER BY " + order
	c.next = "SELECT " + strings.Join(names, ", ") + " FROM " + from + " WHERE " + key + " > ? AND " + key + " <= ? ORDER BY " + order
	return nil
}

// fill adds the points of the assets of a page, whose keys lie after the first and up to the second. Both tables are in the order of the key.
func (c *childReader) fill(page *row.Page, after, until row.Value) error {
	statement, bounds := c.next, []row.Value{after, until}
	if after.IsNull() {
		statement, bounds = c.first, bounds[1:]
	}
	s, err := c.file.Prepare(statement)
	if err != nil {
		return err
	}
	defer s.Reset()
	for i, v := range bounds {
		bind(s, i+1, v)
	}
	for at := 0; ; {
		more, err := s.Step()
		if err != nil || !more {
			return err
		}
		var key row.Value
		c.keys.Reset(0, 0)
		key, c.buffer = cell(s, 0, c.key, &c.keys, c.buffer)
		for at < page.Rows() && page.Row(at)[0].Compare(key) < 0 {
			at++
		}
		if at == page.Rows() {
			return nil
		}
		if page.Row(at)[0].Compare(key) != 0 {
			continue // a point of an asset that the filter leaves out, or of none
		}
		cells := page.AddChild(at)
		for i, kind := range c.kinds {
			cells[i], c.buffer = cell(s, i+1, kind, page, c.buffer)
		}
	}
}
