package wire

import (
	"math"
	"strconv"
	"strings"
)

// A FlatType is the type of a column of flat answers.
type FlatType uint8

// The types of columns.
const (
	FlatNumber FlatType = iota
	FlatWhole
	FlatText
	FlatTruth // true or false
)

// A FlatColumn is one column of flat answers.
type FlatColumn struct {
	Name     string
	Type     FlatType
	Quantity Quantity // of a number
}

// A FlatValue is one cell: absent, or of the type of its column.
type FlatValue struct {
	Given  bool
	Number float64 // of FlatNumber, finite; of FlatWhole too
	Text   string
	Truth  bool
}

// A FlatAnswer is one row of flat answers: the answer to a request, or why there is none.
type FlatAnswer struct {
	ID      ID // nil where none was given
	Line    int64
	Units   System
	Answer  Answer   // nil with a problem
	Problem *Problem // nil with an answer
}

// Flat answers can be told as one row of scalars. Lists are left out.
type Flat interface {
	Answer
	// FlatTable returns the columns, which are those of the type: it may be called on a nil pointer.
	FlatTable() *FlatTable
	// FlatAbsent says why this very answer cannot be one row; empty where it can.
	FlatAbsent() string
}

// A FlatTable holds the columns of the flat answers of one operation, in an order that only grows at its end. It is immutable.
type FlatTable struct {
	columns  []flatColumn
	names    map[string]int
	warnings func(Answer) []Warning
}

// A flatColumn is a column with what finds its value, told in the units of the row.
type flatColumn struct {
	FlatColumn
	value func(*FlatAnswer) FlatValue
}

// FlatTableOf returns the columns of the flat answers that an operation's Form tells; nil where there are none.
func FlatTableOf(form Answer) *FlatTable {
	flat, ok := form.(Flat)
	if !ok {
		return nil
	}
	return flat.FlatTable()
}

// newFlatTable makes the table of an operation: id, line and units, its scalars, then warnings, problem and fingerprint. later are columns that
// came when those were there already.
func newFlatTable(scalars []flatColumn, warnings func(Answer) []Warning, fingerprint func(Answer) string, later ...flatColumn) *FlatTable {
	t := &FlatTable{names: map[string]int{}, warnings: warnings}
	t.add(flatColumn{FlatColumn{Name: "id", Type: FlatText}, func(r *FlatAnswer) FlatValue {
		return textValue(string(appendPlain(nil, r.ID)))
	}})
	t.add(flatColumn{FlatColumn{Name: "line", Type: FlatWhole}, func(r *FlatAnswer) FlatValue {
		return FlatValue{Given: true, Number: float64(r.Line)}
	}})
	t.add(flatColumn{FlatColumn{Name: "units", Type: FlatText}, func(r *FlatAnswer) FlatValue {
		if r.Answer == nil {
			return FlatValue{}
		}
		return textValue(r.Units.String())
	}})
	t.add(scalars...)
	t.add(flatColumn{FlatColumn{Name: "warnings", Type: FlatText}, func(r *FlatAnswer) FlatValue {
		if r.Answer == nil {
			return FlatValue{}
		}
		return textValue(warningsText(warnings(r.Answer)))
	}})
	t.add(flatColumn{FlatColumn{Name: "problem", Type: FlatText}, func(r *FlatAnswer) FlatValue {
		if r.Problem == nil {
			return FlatValue{}
		}
		return textValue(r.Problem.Sentence())
	}})
	t.add(flatColumn{FlatColumn{Name: "fingerprint", Type: FlatText}, func(r *FlatAnswer) FlatValue {
		if r.Answer == nil {
			return FlatValue{}
		}
		return textValue(fingerprint(r.Answer))
	}})
	t.add(later...)
	return t
}

func (t *FlatTable) add(columns ...flatColumn) {
	for _, c := range columns {
		if t.has(c.Name) {
			panic("wire: two flat columns are called " + c.Name)
		}
		t.names[c.Name] = len(t.columns)
		t.columns = append(t.columns, c)
	}
}

// Warnings returns the warnings of a row's answer.
func (t *FlatTable) Warnings(r *FlatAnswer) []Warning {
	if r.Answer == nil {
		return nil
	}
	return t.warnings(r.Answer)
}

func (t *FlatTable) has(name string) bool {
	_, found := t.names[name]
	return found
}

// Columns returns the columns in their order.
func (t *FlatTable) Columns() []FlatColumn {
	out := make([]FlatColumn, len(t.columns))
	for i := range t.columns {
		out[i] = t.columns[i].FlatColumn
	}
	return out
}

// Find returns the place of a column among them.
func (t *FlatTable) Find(name string) (column int, found bool) {
	column, found = t.names[name]
	return column, found
}

// Value returns one cell of a row, in the row's units.
func (t *FlatTable) Value(row *FlatAnswer, column int) FlatValue { return t.columns[column].value(row) }

// AppendText appends a cell as plain text: nothing where it is absent.
func (t *FlatTable) AppendText(dst []byte, row *FlatAnswer, column int) []byte {
	c := &t.columns[column]
	v := c.value(row)
	if !v.Given {
		return dst
	}
	switch c.Type {
	case FlatNumber, FlatWhole:
		return appendNumber(dst, v.Number)
	case FlatTruth:
		return strconv.AppendBool(dst, v.Truth)
	}
	return append(dst, v.Text...)
}

// AppendJSON appends a cell as a JSON value: null where it is absent. An id is the literal that the request had.
func (t *FlatTable) AppendJSON(dst []byte, row *FlatAnswer, column int) []byte {
	c := &t.columns[column]
	if column == 0 && row.ID != nil {
		return append(dst, row.ID...)
	}
	v := c.value(row)
	switch {
	case !v.Given:
		return append(dst, "null"...)
	case c.Type == FlatText:
		return appendText(dst, v.Text)
	case c.Type == FlatTruth:
		return strconv.AppendBool(dst, v.Truth)
	}
	return appendNumber(dst, v.Number)
}

// Sentence tells a problem in one text that names the place of the first fault.
func (p *Problem) Sentence() string {
	if len(p.Errors) == 0 || p.Detail == summary(p.Errors) {
		return p.Detail
	}
	return p.Errors[0].Where() + p.Detail
}

// warningsText tells warnings in one text.
func warningsText(warnings []Warning) string {
	if len(warnings) == 0 {
		return ""
	}
	parts := make([]string, len(warnings))
	for i := range warnings {
		parts[i] = warnings[i].Code + ": " + warnings[i].Detail
	}
	return strings.Join(parts, " ")
}

// textValue is a text; absent where it is empty.
func textValue(text string) FlatValue { return FlatValue{Given: text != "", Text: text} }

// numberValue is a number in the units of a row; absent where it is not finite.
func numberValue(value float64) FlatValue {
	if !(math.Abs(value) <= math.MaxFloat64) {
		return FlatValue{}
	}
	return FlatValue{Given: true, Number: value}
}

// flatNumber is a column of numbers; value returns them in SI, NaN where there is none.
func flatNumber[A Answer](name string, m *member, value func(A) float64) flatColumn {
	return flatColumn{FlatColumn{name, FlatNumber, m.quantity}, func(r *FlatAnswer) FlatValue {
		a, ok := r.Answer.(A)
		if !ok {
			return FlatValue{}
		}
		return numberValue(r.Units.FromSI(m.quantity, value(a)))
	}}
}

// flatText is a column of texts; an empty one is absent.
func flatText[A Answer](name string, value func(A) string) flatColumn {
	return flatColumn{FlatColumn{Name: name, Type: FlatText}, func(r *FlatAnswer) FlatValue {
		a, ok := r.Answer.(A)
		if !ok {
			return FlatValue{}
		}
		return textValue(value(a))
	}}
}

// flatTruth is a column of true and false.
func flatTruth[A Answer](name string, value func(A) (truth, given bool)) flatColumn {
	return flatColumn{FlatColumn{Name: name, Type: FlatTruth}, func(r *FlatAnswer) FlatValue {
		a, ok := r.Answer.(A)
		if !ok {
			return FlatValue{}
		}
		truth, given := value(a)
		return FlatValue{Given: given, Truth: truth}
	}}
}

// flatStates returns the columns of a state, each name with a prefix. state returns nil where there is none.
func flatStates[A Answer](prefix string, state func(A) *State) []flatColumn {
	var out []flatColumn
	for i := range stateColumns {
		c := &stateColumns[i]
		if c.group == WithDischarge {
			continue // of ratings and profiles only
		}
		if c.text != nil {
			out = append(out, flatText(prefix+c.name, func(a A) string {
				if s := state(a); s != nil && s.Members&c.group == c.group {
					return c.text(s)
				}
				return ""
			}))
			continue
		}
		out = append(out, flatNumber(prefix+c.name, c.member, func(a A) float64 {
			if s := state(a); s != nil && s.Members&c.group == c.group {
				return c.number(s)
			}
			return math.NaN()
		}))
	}
	return out
}
