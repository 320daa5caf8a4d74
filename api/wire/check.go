package wire

import (
	"reflect"
	"strconv"
	"strings"

	"github.com/go-playground/validator/v10"
)

// checker applies the validate tags of the types.
var checker = newChecker()

// What the validator takes for absent.
var (
	noNumber *float64
	noWhole  *int
	noPair   *[2]float64
)

func newChecker() *validator.Validate {
	v := validator.New(validator.WithRequiredStructEnabled())
	v.RegisterTagNameFunc(func(f reflect.StructField) string { return f.Tag.Get("json") })
	v.RegisterCustomTypeFunc(func(field reflect.Value) any {
		n := field.Interface().(Number)
		if !n.Given {
			return noNumber
		}
		return &n.Value
	}, Number{})
	v.RegisterCustomTypeFunc(func(field reflect.Value) any {
		n := field.Interface().(Whole)
		if !n.Given {
			return noWhole
		}
		return &n.Value
	}, Whole{})
	v.RegisterCustomTypeFunc(func(field reflect.Value) any {
		p := field.Interface().(Pair)
		if !p.Given {
			return noPair
		}
		return &p.Values
	}, Pair{})
	must(v.RegisterValidation("named", func(field validator.FieldLevel) bool {
		b := columnBounds(field.Param())[0]
		return b.holds(field.Field().FieldByName("Value").Float())
	}))
	must(v.RegisterValidation("ordinates", func(field validator.FieldLevel) bool {
		b := columnBounds(field.Param())[0]
		for i := range mostOrdinates { // those not given are 0
			if !b.holds(field.Field().Field(0).Index(i).Float()) {
				return false
			}
		}
		return true
	}))
	must(v.RegisterValidation("floor", func(field validator.FieldLevel) bool {
		least, err := strconv.ParseFloat(field.Param(), 64)
		value := field.Field().Float()
		return err == nil && (value == 0 || value >= least || value <= -least)
	}))
	must(v.RegisterValidation("columns", func(field validator.FieldLevel) bool {
		columns := columnBounds(field.Param())
		row := field.Field()
		for i := range columns {
			if value := row.Index(i).Float(); !(value >= columns[i].least && value <= columns[i].greatest) {
				return false
			}
		}
		return true
	}))
	return v
}

// must stops the program at its start where it was put together wrongly.
func must(err error) {
	if err != nil {
		panic(err)
	}
}

// Check judges the values of a request in SI by the validate tags of its type and returns every fault, with sentences
// in the request's units. Decode has done so already; Check is for requests that were put together otherwise, too.
func Check(r Request) []Fault {
	err := checker.Struct(r)
	if err == nil {
		return nil
	}
	found, ok := err.(validator.ValidationErrors)
	if !ok { // r is no struct: a fault of the program
		return []Fault{{Code: codeNotAnObject, Detail: "This must be an object."}}
	}
	p := plans[reflect.TypeOf(r).Elem()]
	system := r.common().System
	var faults []Fault
	for _, e := range found {
		faults = p.translate(faults, e, system)
	}
	return faults
}

// translate appends the faults that one of the validator's errors stands for.
func (p *plan) translate(faults []Fault, e validator.FieldError, system System) []Fault {
	segments := namespace(e.Namespace())
	var at pointer
	for _, s := range segments {
		at = at.member(s)
	}
	f, column := p.find(segments)
	if f == nil {
		return append(faults, Fault{Pointer: string(at), Code: codeOutOfRange, Detail: "This value is not accepted."})
	}
	switch e.Tag() {
	case "required":
		return append(faults, Fault{Pointer: string(at), Code: codeMissingMember, Detail: missingText(f, "")})
	case "oneof":
		given, _ := e.Value().(string)
		return append(faults, Fault{Pointer: string(at), Code: codeUnknownValue, Detail: unknownValueText(f, given)})
	case "min":
		return append(faults, Fault{Pointer: string(at), Code: codeTooFewItems, Detail: tooFewText(f)})
	case "named":
		n, _ := e.Value().(NamedNumber)
		last := segments[len(segments)-1]
		at = at[:len(at)-len("/")-len(last)].member(n.Name)
		return append(faults, f.outOfRange(at, 0, n.Value, system))
	case "ordinates":
		p, _ := e.Value().(Position)
		for i, value := range p.Ordinates {
			if !f.bounds[0].holds(value) {
				faults = append(faults, f.outOfRange(at.index(i), 0, value, system))
			}
		}
		return faults
	case "columns":
		row := reflect.ValueOf(e.Value())
		for i := range f.bounds {
			if value := row.Index(i).Float(); !f.bounds[i].holds(value) {
				faults = append(faults, f.outOfRange(at.index(i), i, value, system))
			}
		}
		return faults
	}
	value := reflect.ValueOf(e.Value())
	if value.CanInt() {
		return append(faults, f.outOfRange(at, column, float64(value.Int()), system))
	}
	return append(faults, f.outOfRange(at, column, value.Float(), system))
}

// namespace takes the validator's name of a place apart: "Type.Embedded.section.points[3]" is section, points, 3.
func namespace(name string) []string {
	var out []string
	for i, part := range strings.Split(name, ".") {
		if i == 0 || part == "" || 'A' <= part[0] && part[0] <= 'Z' { // a Go type's name
			continue
		}
		part, rest, _ := strings.Cut(part, "[")
		out = append(out, part)
		for rest != "" {
			var index string
			index, rest, _ = strings.Cut(rest, "]")
			rest = strings.TrimPrefix(rest, "[")
			out = append(out, index)
		}
	}
	return out
}

// find returns the field that the segments of a pointer lead to, and the column where they end in one.
func (p *plan) find(segments []string) (*field, int) {
	var f *field
	for _, s := range segments {
		if _, err := strconv.Atoi(s); err == nil && f != nil {
			continue
		}
		if p == nil {
			return nil, 0
		}
		i, known := find(p.index, s)
		if !known {
			return nil, 0
		}
		f = &p.fields[i]
		p = f.sub
	}
	return f, 0
}
