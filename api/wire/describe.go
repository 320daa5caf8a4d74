package wire

import "reflect"

// A Form is what JSON a member's value is.
type Form uint8

// The forms.
const (
	FormNumber Form = iota
	FormWhole       // a whole number
	FormBool
	FormName    // one of a few names
	FormID      // a string or a number
	FormList    // an array of numbers, of tuples or of objects
	FormNumbers // an object of numbers under names of the caller's
	FormAny     // any value
	FormObject  // an object of the contract's, whose members are described too
)

// A MemberDescription says of a member of a request what a program that writes requests needs to know.
type MemberDescription struct {
	Path     []string // names, from the top of the request
	Form     Form
	Quantity Quantity // of a number, or of those of a FormNumbers
	Names    []string // that a FormName may have
	Variants []string // kinds or laws it belongs to; none for all of them
	Required bool     // the object that it is a member of must have it, whatever its kind or law

	field *field
}

// Beyond says in a sentence why a number in the units of a system cannot be the member's value; nothing where it can, or where the member is no number.
func (d *MemberDescription) Beyond(value float64, system System) string {
	if d.field == nil || d.field.shape != shapeNumber && d.field.shape != shapeWhole {
		return ""
	}
	if si := system.ToSI(d.Quantity, value); !d.field.bounds[0].holds(si) {
		return d.field.outOfRange("", 0, si, system).Detail
	}
	return ""
}

// DescribeRequest lists the members of a request in the order of the contract, those of an object behind it; lists are not gone into.
func DescribeRequest(request Request) []MemberDescription {
	return plans[reflect.TypeOf(request).Elem()].describe(nil, nil)
}

func (p *plan) describe(above []string, out []MemberDescription) []MemberDescription {
	for i := range p.fields {
		f := &p.fields[i]
		path := append(above[:len(above):len(above)], f.name)
		out = append(out, MemberDescription{
			Path: path, Form: f.shape.form(), Quantity: f.quantity[0], Names: f.enum, Variants: f.variants, Required: p.required&(1<<i) != 0, field: f,
		})
		if f.shape == shapeObject {
			out = f.sub.describe(path, out)
		}
	}
	return out
}

func (s shape) form() Form {
	switch s {
	case shapeNumber:
		return FormNumber
	case shapeWhole:
		return FormWhole
	case shapeBool:
		return FormBool
	case shapeName:
		return FormName
	case shapeID:
		return FormID
	case shapeNamed:
		return FormNumbers
	case shapeRaw:
		return FormAny
	case shapeObject:
		return FormObject
	}
	return FormList
}

// Nearest returns the known name that a misspelt one most likely stands for, if there is one.
func Nearest(name string, known []string) (string, bool) { return nearest(name, known) }
