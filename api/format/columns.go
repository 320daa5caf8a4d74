package format

import (
	"leat/api/wire"
)

// columns are the columns of flat answers under the names that a caller sees.
type columns struct {
	table *wire.FlatTable
	names []string
	keys  [][]byte // as they stand in a JSON object: quotes and colon
	index map[string]int

	prefixed bool
}

func newColumns(table *wire.FlatTable, prefix string) columns {
	c := columns{table: table, index: map[string]int{}, prefixed: prefix != ""}
	for i, column := range table.Columns() {
		name := prefix + column.Name
		c.names = append(c.names, name)
		c.keys = append(c.keys, []byte(`"`+name+`":`))
		c.index[name] = i
	}
	return c
}

// find returns the column of a name, or -1.
func (c *columns) find(name string) int {
	if i, found := c.index[name]; found {
		return i
	}
	return -1
}

// row is an answer as the table takes it.
func (a *answer) row() wire.FlatAnswer {
	row := wire.FlatAnswer{ID: a.id, Line: a.line, Problem: a.problem}
	if a.problem == nil {
		row.Units, row.Answer = a.solved.Units, a.solved.Answer
	}
	return row
}

// appendRow appends a flat answer as a JSON object. With pass, what the record had comes first, in its order, save where the answer has
// a member of that name; skipID leaves out an id that is no such member.
func (c *columns) appendRow(dst []byte, r *request, a *answer, pass, skipID bool) []byte {
	row := a.row()
	dst = append(dst, '{')
	start := len(dst)
	comma := func() {
		if len(dst) > start {
			dst = append(dst, ',')
		}
	}
	if cap(r.replaced) < len(c.names) {
		r.replaced = make([]bool, len(c.names))
	}
	r.replaced = r.replaced[:len(c.names)]
	clear(r.replaced)
	if pass {
		for i := range r.members {
			m := &r.members[i]
			comma()
			dst = append(append(dst, m.name...), ':')
			dst = c.appendReplaced(dst, r, m, &row)
		}
	}
	for i := range c.names {
		if r.replaced[i] || skipID && i == 0 {
			continue
		}
		comma()
		dst = append(dst, c.keys[i]...)
		dst = c.table.AppendJSON(dst, &row, i)
	}
	return append(dst, '}')
}

// appendReplaced appends the value of a member that is handed through, or what the answer has in its place. Where the answer has nothing, what the
// request said stays, and so does all that came without a prefix; what bears the prefix is of an earlier run and goes.
func (c *columns) appendReplaced(dst []byte, r *request, m *member, row *wire.FlatAnswer) []byte {
	if m.found < 0 || r.replaced[m.found] {
		return append(dst, m.value...)
	}
	r.replaced[m.found] = true
	if m.asked && m.found == 0 { // the id
		return append(dst, m.value...)
	}
	before := len(dst)
	dst = c.table.AppendJSON(dst, row, m.found)
	if (m.asked || !c.prefixed) && string(dst[before:]) == "null" {
		return append(dst[:before], m.value...)
	}
	return dst
}
