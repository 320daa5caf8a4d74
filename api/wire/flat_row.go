package wire

import (
	"bytes"
	"reflect"
	"strings"

	"github.com/go-json-experiment/json/jsontext"
)

// A FlatRow gathers the cells of one row and makes the nested request of them. It is used again and again, by one goroutine at a time.
type FlatRow struct {
	plan   *FlatPlan
	prefix string // before every name as the caller knows it

	room   []byte // the values as JSON
	values []span // by node, into room; empty where absent
	below  []int  // by node: how many values are given below it
	given  []int  // nodes that have a value or something below
	named  []namedCell
	faults []Fault
	broken []pointer // places whose cells cannot be read
}

// A namedCell is a number under a name of the caller's.
type namedCell struct {
	node  int
	name  string
	value span
}

// NewRow returns a row of a plan. prefix is what stands before every name as the caller writes it; faults name columns so.
func (p *FlatPlan) NewRow(prefix string) *FlatRow {
	return &FlatRow{plan: p, prefix: prefix, values: make([]span, len(p.nodes)), below: make([]int, len(p.nodes))}
}

// Reset empties the row.
func (r *FlatRow) Reset() {
	for _, node := range r.given {
		r.values[node], r.below[node] = span{}, 0
	}
	r.given, r.named, r.faults, r.broken, r.room = r.given[:0], r.named[:0], nil, nil, r.room[:0]
}

// Column is the name of a place as the caller writes it.
func (r *FlatRow) Column(at FlatPlace) string {
	name := r.prefix + r.plan.nodes[at.node].name
	if at.name != "" {
		name += "_" + at.name
	}
	return name
}

// Fault notes a fault of the row that its cells do not show by themselves.
func (r *FlatRow) Fault(f Fault) {
	if len(r.faults) < MaxFaults {
		r.faults = append(r.faults, f)
	}
}

// SetText gives a member a cell of text, as CSV and databases have it: empty is absent. Numbers, true and false are read from it, lists and
// objects as JSON text; an id and names are the text itself.
func (r *FlatRow) SetText(at FlatPlace, cell []byte) {
	if len(cell) == 0 {
		return
	}
	f := r.plan.nodes[at.node].field
	start := len(r.room)
	shape := f.shape
	if at.name != "" {
		shape = shapeNumber
	}
	switch shape {
	case shapeNumber, shapeWhole:
		if !isBareNumber(cell) {
			r.Unreadable(at, numberCellText(string(cell), shape == shapeWhole))
			return
		}
		r.room = append(r.room, cell...)
	case shapeBool:
		if string(cell) != "true" && string(cell) != "false" {
			r.Unreadable(at, truthCellText(string(cell)))
			return
		}
		r.room = append(r.room, cell...)
	case shapeName, shapeID:
		room, err := jsontext.AppendQuote(r.room, cell)
		if err != nil {
			r.Unreadable(at, "The text is not valid UTF-8. Save the data as UTF-8.")
			return
		}
		r.room = room
	default:
		if !jsontext.Value(cell).IsValid() {
			r.Unreadable(at, listCellText(f, cell))
			return
		}
		r.room = append(r.room, cell...)
	}
	r.set(at, span{start, len(r.room)})
}

// SetJSON gives a member a JSON value, which must be well-formed: null is absent. A list or an object may also be a string that holds it as
// JSON text.
func (r *FlatRow) SetJSON(at FlatPlace, value []byte) {
	if len(value) == 0 || value[0] == 'n' {
		return
	}
	if value[0] == '"' && at.name == "" {
		switch r.plan.nodes[at.node].field.shape {
		case shapeNumber, shapeWhole, shapeBool, shapeName, shapeID:
		default:
			if text, err := jsontext.AppendUnquote(nil, value); err == nil {
				r.SetText(at, text)
				return
			}
		}
	}
	start := len(r.room)
	r.room = append(r.room, value...)
	r.set(at, span{start, len(r.room)})
}

// SetNumber gives a member a number; one that is not finite is a fault.
func (r *FlatRow) SetNumber(at FlatPlace, value float64) {
	start := len(r.room)
	if r.room = appendNumber(r.room, value); r.room[start] == 'n' {
		r.room = r.room[:start]
		r.Unreadable(at, "This is no finite number. Leave it empty where it is unknown.")
		return
	}
	r.set(at, span{start, len(r.room)})
}

func (r *FlatRow) set(at FlatPlace, value span) {
	if at.name != "" {
		r.named = append(r.named, namedCell{at.node, at.name, value})
	} else {
		if r.values[at.node] != (span{}) {
			r.Fault(Fault{Column: r.Column(at), Code: codeDuplicateMember, Detail: r.Column(at) + " is given twice; give it once."})
			return
		}
		r.values[at.node] = value
	}
	r.mark(at)
}

// mark notes that a node has something, and those above it.
func (r *FlatRow) mark(at FlatPlace) {
	node := at.node
	r.given = append(r.given, node)
	if at.name != "" {
		r.below[node]++
	}
	for node = r.plan.nodes[node].parent; node >= 0; node = r.plan.nodes[node].parent {
		r.given = append(r.given, node)
		r.below[node]++
	}
}

// Unreadable notes a cell that is not what its member wants. The member does not count as missing too.
func (r *FlatRow) Unreadable(at FlatPlace, detail string) {
	r.Fault(Fault{Column: r.Column(at), Code: codeWrongType, Detail: detail})
	place := r.plan.pointer(at.node)
	if at.name != "" {
		place = place.member(at.name)
	}
	r.broken = append(r.broken, place)
}

// AppendRequest appends the request object that the cells make.
func (r *FlatRow) AppendRequest(dst []byte) []byte { return r.appendObject(dst, 0, len(r.plan.nodes)) }

func (r *FlatRow) appendObject(dst []byte, from, to int) []byte {
	dst = append(dst, '{')
	start := len(dst)
	for i := from; i < to; i = r.plan.nodes[i].end {
		n := &r.plan.nodes[i]
		whole := r.values[i] != span{}
		// An object that must be there is, if without members, so that its faults name these.
		if !whole && r.below[i] == 0 && !(n.required && n.object()) {
			continue
		}
		if len(dst) > start {
			dst = append(dst, ',')
		}
		dst = append(dst, n.key...)
		switch {
		case whole:
			dst = append(dst, r.values[i].in(r.room)...)
			if r.below[i] > 0 {
				r.conflicts(i)
			}
		case n.object():
			dst = r.appendObject(dst, i+1, n.end)
		default:
			dst = r.appendNamed(dst, i)
		}
	}
	return append(dst, '}')
}

// appendNamed appends an object of numbers under the caller's names.
func (r *FlatRow) appendNamed(dst []byte, node int) []byte {
	dst = append(dst, '{')
	start := len(dst)
	for i := range r.named {
		c := &r.named[i]
		if c.node != node {
			continue
		}
		if len(dst) > start {
			dst = append(dst, ',')
		}
		dst = append(appendText(dst, c.name), ':')
		dst = append(dst, c.value.in(r.room)...)
	}
	return append(dst, '}')
}

// conflicts notes what is given below a node that is given as a whole.
func (r *FlatRow) conflicts(node int) {
	whole := r.prefix + r.plan.nodes[node].name
	fault := func(column string) {
		r.Fault(Fault{Column: column, Code: codeConflictingMember, Detail: column + " is given both flat and inside " + whole + "; give it once."})
	}
	for i := node + 1; i < r.plan.nodes[node].end; i++ {
		if r.values[i] != (span{}) {
			fault(r.Column(FlatPlace{node: i}))
		}
	}
	for i := range r.named {
		if at := r.named[i].node; node <= at && at < r.plan.nodes[node].end {
			fault(r.Column(FlatPlace{at, r.named[i].name}))
		}
	}
}

// Problem returns the problem that the row's own faults make, together with those of the request that AppendRequest made of it; nil where the
// row has none of its own, whatever the request has.
func (r *FlatRow) Problem(request []byte, units System, limits *Limits) *Problem {
	if len(r.faults) == 0 {
		return nil
	}
	faults := r.faults
	into := reflect.New(r.plan.request).Interface().(Request)
	if further := Decode(request, units, limits, into); further != nil {
		if further.Status != invalidRequest.Status {
			faults = append(faults, r.Translate(further).Errors...)
			return InvalidRequest(faults...)
		}
		for _, f := range further.Errors {
			if !r.isBroken(f.Pointer) {
				faults = append(faults, r.translate(f))
			}
		}
	}
	return InvalidRequest(faults...)
}

// isBroken reports whether a place is one whose cell cannot be read, or above or below one: what is said of it there says nothing new.
func (r *FlatRow) isBroken(place string) bool {
	for _, b := range r.broken {
		broken := string(b)
		if place == broken || strings.HasPrefix(broken, place+"/") || strings.HasPrefix(place, broken+"/") {
			return true
		}
	}
	return false
}

// Translate returns a problem of the request that the row made with columns in place of pointers, wherever a member was given flat or not at all.
func (r *FlatRow) Translate(p *Problem) *Problem {
	if len(p.Errors) == 0 {
		return p
	}
	told := *p
	told.Errors = make([]Fault, len(p.Errors))
	for i := range p.Errors {
		told.Errors[i] = r.translate(p.Errors[i])
	}
	if p.Detail == summary(p.Errors) {
		told.Detail = summary(told.Errors)
	}
	return &told
}

func (r *FlatRow) translate(f Fault) Fault {
	if f.Pointer == "" || f.Parameter != "" || f.Column != "" {
		return f
	}
	node, from, to := -1, 0, len(r.plan.nodes)
	rest := f.Pointer
	for rest != "" {
		segment, after, _ := strings.Cut(rest[1:], "/")
		if after != "" {
			after = "/" + after
		}
		child := r.plan.child(from, to, segment)
		if child < 0 {
			break
		}
		node, rest = child, after
		from, to = child+1, r.plan.nodes[child].end
		if r.values[child] != (span{}) && r.plan.nodes[child].object() {
			if rest == "" { // the cell itself, whatever stands in it
				f.Column, f.Pointer = r.Column(FlatPlace{node: child}), ""
				if f.Code == codeNotAnObject {
					f.Detail += " Or give its members flat, such as " + r.Column(FlatPlace{node: child + 1}) + "."
				}
				return f
			}
			f.Pointer = "/" + pointerEscapes.Replace(r.prefix) + f.Pointer[1:] // given nested
			return f
		}
	}
	if node < 0 {
		return f
	}
	n := &r.plan.nodes[node]
	if n.object() { // nothing of it was given: name its first column
		node++
		for node < n.end-1 && r.plan.nodes[node].object() {
			node++
		}
	}
	f.Column, f.Pointer = r.Column(FlatPlace{node: node}), ""
	if n.field.shape == shapeNamed && rest != "" && r.values[node] == (span{}) {
		f.Column += "_" + unescapePointer(rest[1:])
	} else if rest != "" && !n.object() {
		f.Detail = "At " + rest + " in the cell: " + f.Detail
	}
	return f
}

// child returns the node of a member of the object whose nodes lie from from to to, or -1.
func (p *FlatPlan) child(from, to int, member string) int {
	for i := from; i < to; i = p.nodes[i].end {
		if p.nodes[i].field.name == member {
			return i
		}
	}
	return -1
}

func unescapePointer(segment string) string {
	return strings.ReplaceAll(strings.ReplaceAll(segment, "~1", "/"), "~0", "~")
}

// isBareNumber reports whether a cell is a JSON number and nothing else.
func isBareNumber(cell []byte) bool {
	return cell[0] > ' ' && cell[len(cell)-1] > ' ' && isNumber(string(cell))
}

// isBlankCell reports whether a cell holds white space only.
func isBlankCell(cell string) bool { return len(bytes.TrimSpace([]byte(cell))) == 0 }
