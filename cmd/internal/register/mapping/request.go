package mapping

import (
	"bytes"
	"fmt"
	"math"
	"slices"
	"strconv"
	"strings"

	"github.com/go-json-experiment/json/jsontext"

	"leat/api/wire"
	"leat/cmd/internal/register/row"
)

// A Row is one row of the register, in the order of the mapping's columns.
type Row struct {
	Values   []row.Value
	Children []row.Value // of Child, one row after another
}

// A Problem is one fault of a row, before it is known which row.
type Problem struct {
	Column, Pointer, Code, Text string
}

// Codes of problems that only a mapping can find. Those of requests are in the contract.
const (
	CodeUnknownValue = "unknown_value" // not in the table of values
	CodeNotANumber   = "not_a_number"  //
	CodeOutOfRange   = "number_out_of_range"
	CodeNotTrue      = "not_true_false" //
	CodeNotAList     = "not_a_list"     //
	CodeReversed     = "reversed_slope" // the downstream level lies above the upstream one
	CodeFlat         = "flat_slope"     // the levels are equal
	CodeLength       = "impossible_length"
	CodeMissing      = "missing_value"
	CodeUnknownClass = "unknown_class"
	CodeUnreadable   = "unreadable_row"
)

// A writing makes one request. It is used again and again by one goroutine.
type writing struct {
	m        *Mapping
	row      Row
	section  int // kind of the section; -1 where unknown
	class    int
	problems []Problem
}

// A Writer makes requests of rows. It belongs to one goroutine.
type Writer struct{ w writing }

// NewWriter returns a writer of requests.
func (m *Mapping) NewWriter() *Writer { return &Writer{writing{m: m}} }

// Append appends the request of a row to dst. Where the row has problems it returns them, and dst as it was; they live until the next call.
func (w *Writer) Append(dst []byte, r Row) ([]byte, []Problem) {
	x := &w.w
	x.row, x.problems, x.section, x.class = r, x.problems[:0], -1, -1
	if x.m.classes != nil {
		x.classify()
	}
	if x.m.section != nil {
		x.section = x.kind(x.m.section)
	}
	start := len(dst)
	dst, _ = x.object(dst, &x.m.root, x.section)
	if len(x.problems) > 0 {
		return dst[:start], x.problems
	}
	return dst, nil
}

func (w *writing) problem(n *node, s *source, code, format string, arguments ...any) {
	w.problems = append(w.problems, Problem{Column: s.name, Pointer: n.pointer(), Code: code, Text: fmt.Sprintf(format, arguments...)})
}

// classify finds the class that the row is of.
func (w *writing) classify() {
	c := w.m.classes
	var room [24]byte
	text := bytes.TrimSpace(w.row.Values[c.column].Append(room[:0]))
	class, found := c.byName[string(text)]
	switch {
	case found:
		w.class = class
	case c.other >= 0:
		w.class = c.other
	default:
		detail := fmt.Sprintf("Column %s is empty; it must name the class of the asset, one of %s.", c.name, describeValues(c.names))
		if len(text) > 0 {
			detail = fmt.Sprintf("Column %s holds %q, for which there are no criteria%s.", c.name, short(string(text)), advice(string(text), c.names))
		}
		w.problems = append(w.problems, Problem{Column: c.name, Pointer: "/criteria", Code: CodeUnknownClass, Text: detail})
	}
}

// kind returns the kind of an object, as its place among the names; -1 where the row does not tell.
func (w *writing) kind(object *node) int {
	n := &object.nodes[object.kind]
	var room [64]byte
	known := len(w.problems)
	name, given := w.value(room[:0], n, w.section)
	w.problems = w.problems[:known] // told when the member itself is written
	if !given || len(name) < 2 {
		return -1
	}
	name = name[1 : len(name)-1]
	for i := range n.about.Names {
		if n.about.Names[i] == string(name) {
			return i
		}
	}
	return -1
}

// object appends an object, and reports whether it has any member; if not it returns dst as it was.
func (w *writing) object(dst []byte, object *node, kind int) ([]byte, bool) {
	start := len(dst)
	dst = append(dst, '{')
	for i := range object.nodes {
		n := &object.nodes[i]
		mark := len(dst)
		dst = append(dst, n.key...)
		var given bool
		switch {
		case n.nodes != nil:
			own := w.section
			if n != w.m.section && n.kind >= 0 {
				own = w.kind(n)
			}
			dst, given = w.object(dst, n, own)
		case n.byKind:
			dst, given = w.value(dst, n, kind)
		default:
			dst, given = w.value(dst, n, w.section)
		}
		if given {
			dst = append(dst, ',')
		} else {
			dst = dst[:mark]
		}
	}
	if len(dst) == start+1 {
		return dst[:start], false
	}
	dst[len(dst)-1] = '}' // in place of the last comma
	return dst, true
}

// value appends a member's value from the first source that applies and is given.
func (w *writing) value(dst []byte, n *node, kind int) ([]byte, bool) {
	if n.needs != nil {
		mark, known := len(dst), len(w.problems)
		written, given := w.value(dst, n.needs, kind)
		w.problems = w.problems[:known] // told in its own place
		if dst = written[:mark]; !given {
			return dst, false
		}
	}
	for i := range n.sources {
		s := &n.sources[i]
		if s.class >= 0 && s.class != w.class {
			continue
		}
		if s.kinds != allKinds && (kind < 0 || s.kinds&(1<<kind) == 0) {
			continue
		}
		var given bool
		if n.points {
			dst, given = w.points(dst, n, s)
		} else {
			dst, given = w.source(dst, n, s)
		}
		if given {
			return dst, true
		}
	}
	return dst, false
}

// source appends what one source gives. Where it gives a problem, it counts as given.
func (w *writing) source(dst []byte, n *node, s *source) ([]byte, bool) {
	switch {
	case s.constant != nil:
		return append(dst, s.constant...), true
	case s.levels != nil:
		return w.levels(dst, n, s)
	}
	v := w.row.Values[s.column]
	if s.isMissing(&v, w.m.decimal) {
		if s.fallback != nil {
			return append(dst, s.fallback...), true
		}
		return dst, false
	}
	if s.values != nil {
		return w.tabled(dst, n, s, v)
	}
	switch n.about.Form {
	case wire.FormNumber:
		if number, ok := w.number(n, s, v); ok {
			dst = w.append(dst, n, s, number)
		}
		return dst, true
	case wire.FormWhole:
		number, ok := w.number(n, s, v)
		if ok && number != math.Trunc(number) {
			w.problem(n, s, CodeNotANumber, "Column %s holds %s, which is not a whole number.", s.name, shown(v))
			return dst, true
		}
		return w.append(dst, n, s, number), true
	case wire.FormBool:
		return w.truth(dst, n, s, v), true
	case wire.FormName:
		return w.name(dst, n, s, v), true
	}
	return w.list(dst, n, s, v), true
}

// The contract's bounds on the size of a number that is not 0.
const (
	leastSize    = 1e-100
	greatestSize = 1e100
)

// append appends a number in the member's units.
func (w *writing) append(dst []byte, n *node, s *source, number float64) []byte {
	if size := math.Abs(number); size != 0 && !(size >= leastSize && size <= greatestSize) {
		w.problem(n, s, CodeOutOfRange, "Column %s gives %s the value %g; numbers are 0 or between 1e-100 and 1e100 in size.", s.name, n.flat, number)
	}
	return wire.AppendNumber(dst, number)
}

// isMissing reports whether a value means that nothing is known. A text loses the white space around it.
func (s *source) isMissing(v *row.Value, mark byte) bool {
	var number float64
	switch v.Kind {
	case row.Null:
		return true
	case row.Int:
		number = float64(v.Int())
	case row.Float:
		number = v.Float()
		if number != number {
			return slices.Contains(s.missingTexts, "NaN")
		}
	case row.Text:
		text := bytes.TrimSpace(v.Bytes())
		*v = row.OfText(text)
		if len(text) == 0 {
			return true
		}
		for _, missing := range s.missingTexts {
			if missing == string(text) {
				return true
			}
		}
		if len(s.missingNumbers) == 0 {
			return false
		}
		var isNumber bool
		if number, isNumber = parseNumber(text, mark); !isNumber {
			return false
		}
	default:
		return false
	}
	for _, missing := range s.missingNumbers {
		if number == missing {
			return true
		}
	}
	return false
}

// tabled appends what the table of values says.
func (w *writing) tabled(dst []byte, n *node, s *source, v row.Value) ([]byte, bool) {
	var room [32]byte
	text := v.Bytes()
	if v.Kind != row.Text {
		text = v.Append(room[:0])
	}
	value, found := s.values[string(text)]
	if !found {
		w.problem(n, s, CodeUnknownValue, "Column %s holds %q, which the table of values for %s does not know%s.", s.name, short(string(text)), n.flat, advice(string(text), s.valueNames))
		return dst, true
	}
	return append(dst, value...), value != nil
}

// number returns a value as the member's number.
func (w *writing) number(n *node, s *source, v row.Value) (float64, bool) {
	var number float64
	switch v.Kind {
	case row.Int:
		number = float64(v.Int())
	case row.Float:
		number = v.Float()
		if math.IsNaN(number) || math.IsInf(number, 0) {
			w.problem(n, s, CodeNotANumber, "Column %s holds %s, which is not a number; if it stands for a missing value, say so with missing.", s.name, shown(v))
			return 0, false
		}
	case row.Text:
		var isNumber bool
		if number, isNumber = parseNumber(v.Bytes(), w.m.decimal); !isNumber {
			if number, isNumber = ratio(v.Bytes(), s.unit, w.m.decimal); !isNumber {
				w.problem(n, s, CodeNotANumber, "Column %s holds %s, which is not a number%s.", s.name, shown(v), numberAdvice(v.Bytes(), w.m.decimal, s))
				return 0, false
			}
		}
	default:
		w.problem(n, s, CodeNotANumber, "Column %s holds %s, not a number.", s.name, v.Kind)
		return 0, false
	}
	if s.convert != nil {
		converted, ok := s.convert(number)
		if !ok {
			w.problem(n, s, CodeNotANumber, "Column %s holds %s, and there is no slope of %s in the unit %s.", s.name, shown(v), shown(v), s.unit)
			return 0, false
		}
		number = converted
	}
	return number, true
}

// numberAdvice says what is likely wrong with a text that is no number.
func numberAdvice(text []byte, mark byte, s *source) string {
	switch {
	case mark == '.' && bytes.IndexByte(text, ',') >= 0 && bytes.IndexByte(text, '.') < 0:
		if _, isNumber := parseNumber(text, ','); isNumber {
			return "; if the comma is a decimal mark, set decimal to \",\" in source"
		}
	case bytes.IndexByte(text, ':') > 0 && s.unit != ratioUnit && s.unit != runUnit:
		return "; a slope written so needs the unit 1:x"
	case strings.EqualFold(string(text), "nan"):
		return "; if it stands for a missing value, say so with missing"
	}
	return ""
}

func shown(v row.Value) string {
	if v.Kind == row.Text {
		return strconv.Quote(short(v.String()))
	}
	return v.String()
}

var truths = map[string]bool{
	"true": true, "t": true, "yes": true, "y": true, "1": true,
	"false": false, "f": false, "no": false, "n": false, "0": false,
}

func (w *writing) truth(dst []byte, n *node, s *source, v row.Value) []byte {
	if v.Kind == row.Bool {
		return strconv.AppendBool(dst, v.Bool())
	}
	if truth, known := truths[strings.ToLower(v.String())]; known {
		return strconv.AppendBool(dst, truth)
	}
	w.problem(n, s, CodeNotTrue, "Column %s holds %s, which is neither true nor false.", s.name, shown(v))
	return dst
}

func (w *writing) name(dst []byte, n *node, s *source, v row.Value) []byte {
	if v.Kind == row.Text {
		for _, known := range n.about.Names {
			if known == string(v.Bytes()) {
				dst = append(append(dst, '"'), known...)
				return append(dst, '"')
			}
		}
	}
	w.problem(n, s, CodeUnknownValue, "Column %s holds %s, which is no %s%s.", s.name, shown(v), n.flat, advice(v.String(), n.about.Names))
	return dst
}

// list appends a list that stands as JSON in a cell.
func (w *writing) list(dst []byte, n *node, s *source, v row.Value) []byte {
	if v.Kind == row.Text || v.Kind == row.Bytes {
		if value := jsontext.Value(v.Bytes()); value.Kind() == '[' && value.IsValid() {
			return append(dst, value...)
		}
	}
	w.problem(n, s, CodeNotAList, "Column %s holds %s, which is not a list as JSON writes it, as in [[0, 1.2], [2.5, 0]].", s.name, shown(v))
	return dst
}

// points appends the points of a surveyed section.
func (w *writing) points(dst []byte, n *node, s *source) ([]byte, bool) {
	const width = 2
	if len(w.row.Children) == 0 {
		w.problem(n, s, CodeMissing, "The asset has no points in the table of points (columns %s), which its surveyed section needs.", s.name)
		return dst, true
	}
	dst = append(dst, '[')
	for i := 0; i < len(w.row.Children); i += width {
		dst = append(dst, '[')
		for j, part := range [width]*source{&w.m.points.offset, &w.m.points.level} {
			v := w.row.Children[i+j]
			if part.isMissing(&v, w.m.decimal) {
				w.problem(n, part, CodeMissing, "Point %d of the asset has no value in column %s.", i/width+1, part.name)
				return dst, true
			}
			number, ok := w.number(n, part, v)
			if !ok {
				return dst, true
			}
			dst = append(w.append(dst, n, part, number), ',')
		}
		dst[len(dst)-1] = ']'
		dst = append(dst, ',')
	}
	dst[len(dst)-1] = ']'
	return dst, true
}

// levels appends the slope between two levels.
func (w *writing) levels(dst []byte, n *node, s *source) ([]byte, bool) {
	var numbers [3]float64
	parts := [3]*source{&s.levels.upstream, &s.levels.downstream, &s.levels.length}
	var absent [3]bool
	missing := 0
	for i, part := range parts {
		var ok, given bool
		if numbers[i], given, ok = w.part(n, part); !ok {
			return dst, true
		}
		if absent[i] = !given; absent[i] {
			missing++
		}
	}
	switch {
	case missing == 0:
	case s.fallback != nil:
		return append(dst, s.fallback...), true
	case missing == len(parts) || s != &n.sources[len(n.sources)-1]:
		return dst, false // another source may know the slope; if none does, the request says whether it is missing
	default:
		for i, part := range parts {
			if absent[i] {
				w.problem(n, part, CodeMissing, "Column %s is empty, so that the slope between the two levels is not known.", part.name)
			}
		}
		return dst, true
	}
	drop, length := numbers[0]-numbers[1], numbers[2]
	switch {
	case !(length > 0):
		w.problem(n, &s.levels.length, CodeLength, "The length %s is not greater than 0, so that there is no slope.", strconv.FormatFloat(length, 'g', -1, 64))
		return dst, true
	case drop == 0 && !s.levels.keepFlat:
		w.problem(n, s, CodeFlat, "The levels at both ends are equal, so that the bed is flat; correct them, or accept it with flat: keep.")
		return dst, true
	case drop < 0 && s.levels.swap:
		drop = -drop
	case drop < 0 && !s.levels.keep:
		w.problem(n, s, CodeReversed, "The downstream level lies above the upstream one; correct them, swap them with reversed: swap, or accept an adverse slope with reversed: keep.")
		return dst, true
	}
	slope := drop / length
	if s.levels.inPlan {
		slope = drop / math.Sqrt(drop*drop+length*length)
	} else if !(math.Abs(slope) < 1) {
		w.problem(n, &s.levels.length, CodeLength, "The levels differ by more than the length along the bed; either is wrong.")
		return dst, true
	}
	return w.append(dst, n, s, slope), true
}

// part returns the number of a source that is a part of another's value.
func (w *writing) part(n *node, s *source) (number float64, given, ok bool) {
	if s.constant != nil {
		number, _ = parseNumber(s.constant, '.')
		return number, true, true
	}
	v := w.row.Values[s.column]
	if s.isMissing(&v, w.m.decimal) {
		if s.fallback == nil {
			return 0, false, true
		}
		number, _ = parseNumber(s.fallback, '.')
		return number, true, true
	}
	if s.values != nil {
		value, found := w.tabled(nil, n, s, v)
		number, isNumber := parseNumber(value, '.')
		return number, found, isNumber || !found
	}
	number, ok = w.number(n, s, v)
	return number, true, ok
}
