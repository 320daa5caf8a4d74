package row

// A Page is a number of rows, with the rows of their child table, if there is one. It owns the bytes of its values, and
// all its memory is used again after Reset. The zero Page is ready for Reset.
type Page struct {
	width, childWidth int

	values   []Value // rows one after another
	lines    []int64
	children []Value // rows one after another, those of the first row first
	ends     []int   // by row: the number of child rows up to and with this row's

	memory Memory
}

// Reset empties the page and sets the number of values in a row and in a row of the child table (0 without one).
func (p *Page) Reset(width, childWidth int) {
	p.width, p.childWidth = width, childWidth
	p.values, p.lines, p.children, p.ends = p.values[:0], p.lines[:0], p.children[:0], p.ends[:0]
	p.memory.Reset()
}

// Rows is the number of rows.
func (p *Page) Rows() int { return len(p.lines) }

// Add adds a row of nulls and returns it, to be filled before the next call. line is where it stands in its file, from 1; 0 where it stands in a table.
func (p *Page) Add(line int64) []Value {
	p.lines = append(p.lines, line)
	p.values = extend(p.values, p.width)
	return p.Row(len(p.lines) - 1)
}

// AddChild adds a row of nulls to the child rows of a row and returns it. Rows must get their children in order: none can be added to a row before the last that got one.
func (p *Page) AddChild(row int) []Value {
	before := p.childRows()
	for len(p.ends) <= row {
		p.ends = append(p.ends, before)
	}
	p.ends[row]++
	p.children = extend(p.children, p.childWidth)
	return p.children[len(p.children)-p.childWidth:]
}

// DropChildren removes all child rows, so that they can be added anew.
func (p *Page) DropChildren() { p.children, p.ends = p.children[:0], p.ends[:0] }

func (p *Page) childRows() int {
	if len(p.ends) == 0 {
		return 0
	}
	return p.ends[len(p.ends)-1]
}

func extend(values []Value, by int) []Value {
	for range by {
		values = append(values, Value{})
	}
	return values
}

// Row returns a row.
func (p *Page) Row(i int) []Value { return p.values[i*p.width : (i+1)*p.width : (i+1)*p.width] }

// Line returns where a row stands in its file, from 1; 0 where it stands in a table.
func (p *Page) Line(i int) int64 { return p.lines[i] }

// Children returns the child rows of a row, one after another.
func (p *Page) Children(i int) []Value {
	if i >= len(p.ends) {
		return nil
	}
	first := 0
	if i > 0 {
		first = p.ends[i-1]
	}
	return p.children[first*p.childWidth : p.ends[i]*p.childWidth]
}

// Text returns a text with a copy of the bytes in the page's memory.
func (p *Page) Text(b []byte) Value { return OfText(p.memory.Copy(b)) }

// String returns a text with a copy of a string in the page's memory.
func (p *Page) String(s string) Value { return p.memory.Text(s) }

// Blob returns bytes copied into the page's memory.
func (p *Page) Blob(b []byte) Value { return OfBytes(p.memory.Copy(b)) }

// Keep copies a value's bytes, if it has any, into the page's memory.
func (p *Page) Keep(v Value) Value {
	if v.bytes != nil {
		v.bytes = p.memory.Copy(v.bytes)
	}
	return v
}
