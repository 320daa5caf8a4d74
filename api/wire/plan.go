package wire

import (
	"fmt"
	"reflect"
	"strings"
)

// A plan is the description of a struct type, compiled from its tags once: what the decoder, the checks, the sentences and
// the table of units go by. The tags are the one place where a member is described:
//
//   - json: its name
//   - quantity: what it measures, one for each column of a list of tuples; left out for a plain number
//   - validate: the rules of value, in SI
//   - in: the variants (kinds, laws) that it belongs to, with a question mark where it may be left out
//   - limit: the limit of the service that bounds a whole number, or the number of members of an object with names of the caller's
type plan struct {
	fields   []field
	index    nameIndex // of fields by name
	required uint64    // fields that must be present
	given    []int     // index of the struct's field Given, if it has one
	variants []variant
	variant  nameIndex // of variants by name
	ruled    bool      // the struct has rules of its own
	names    []string  // of all fields, for suggestions
}

// A variant says, in bits of fields, what one kind or law may and must have.
type variant struct{ allowed, required uint64 }

// A field is one member.
type field struct {
	name     string
	at       []int // in the struct, through embedded ones
	shape    shape
	quantity []Quantity // one, or one for each column
	bounds   []bounds   // one, or one for each column
	least    int        // items of a list
	enum     []string   // accepted names
	sub      *plan      // of a struct or of the items of a list of them
	limit    string
	variants []string // that it belongs to; empty for all
}

// A shape is the form of a member's value.
type shape uint8

const (
	shapeNumber shape = iota
	shapeWhole
	shapeBool
	shapeName // one of an enumeration
	shapeID
	shapeNumbers   // a list
	shapePairs     // a list of [2]float64
	shapeRows      // a list of [4]float64
	shapePair      // a list of exactly two numbers
	shapePositions // a list of places of a geometry
	shapeNamed     // an object of numbers under names of the caller's
	shapeTexts     // a list of strings
	shapeRaw       // any value
	shapeObject
	shapeObjects // a list
)

// plans holds the plan of every request type. A new operation adds its type here.
var plans = compilePlans(
	SectionRequest{},
	DepthsRequest{},
	RatingRequest{},
	ProfileRequest{},
	AppraisalRequest{},
)

func compilePlans(requests ...any) map[reflect.Type]*plan {
	m := map[reflect.Type]*plan{}
	for _, r := range requests {
		compilePlan(reflect.TypeOf(r), m)
	}
	return m
}

// compilePlan compiles a struct type and those inside it. It panics on a tag that it does not understand: a fault of the program, seen at its start.
func compilePlan(t reflect.Type, known map[reflect.Type]*plan) *plan {
	if p, ok := known[t]; ok {
		return p
	}
	p := &plan{}
	known[t] = p
	for _, sf := range reflect.VisibleFields(t) {
		name := sf.Tag.Get("json")
		switch {
		case name == "-" && sf.Name == "Given":
			p.given = sf.Index
		case name == "-", sf.Anonymous:
		case name == "":
			panic(fmt.Sprintf("wire: %v.%s has no json tag", t, sf.Name))
		default:
			p.add(t, sf, name, known)
		}
	}
	for i := range p.fields {
		if p.fields[i].variants != nil {
			continue
		}
		for v := range p.variants {
			p.variants[v].allowed |= 1 << i
		}
	}
	p.ruled = reflect.PointerTo(t).Implements(reflect.TypeFor[ruled]())
	if len(p.fields) > 64 {
		panic(fmt.Sprintf("wire: %v has more than 64 members", t))
	}
	if p.variants != nil && !reflect.PointerTo(t).Implements(reflect.TypeFor[varied]()) {
		panic(fmt.Sprintf("wire: %v has members of variants, but does not tell its variant", t))
	}
	return p
}

func (p *plan) add(t reflect.Type, sf reflect.StructField, name string, known map[reflect.Type]*plan) {
	f := field{name: name, at: sf.Index, limit: sf.Tag.Get("limit")}
	f.shape = shapeOf(sf.Type)
	for _, q := range strings.Fields(sf.Tag.Get("quantity")) {
		quantity, ok := quantityNamed(q)
		if !ok {
			panic(fmt.Sprintf("wire: %v.%s: unknown quantity %q", t, sf.Name, q))
		}
		f.quantity = append(f.quantity, quantity)
	}
	if f.quantity == nil {
		f.quantity = []Quantity{Dimensionless}
	}
	switch f.shape {
	case shapeObject:
		f.sub = compilePlan(sf.Type, known)
	case shapeObjects:
		f.sub = compilePlan(sf.Type.Elem(), known)
	}
	if f.rules(sf.Tag.Get("validate")) {
		p.required |= 1 << len(p.fields)
	}
	for _, v := range strings.Fields(sf.Tag.Get("in")) {
		v, optional := strings.CutSuffix(v, "?")
		at, known := find(p.variant, v)
		if !known {
			at = len(p.variants)
			p.variant.add(v, at)
			p.variants = append(p.variants, variant{})
		}
		p.variants[at].allowed |= 1 << len(p.fields)
		if !optional {
			p.variants[at].required |= 1 << len(p.fields)
		}
		f.variants = append(f.variants, v)
	}
	p.index.add(name, len(p.fields))
	p.names = append(p.names, name)
	p.fields = append(p.fields, f)
}

func shapeOf(t reflect.Type) shape {
	switch t {
	case reflect.TypeFor[Number]():
		return shapeNumber
	case reflect.TypeFor[Whole]():
		return shapeWhole
	case reflect.TypeFor[ID]():
		return shapeID
	case reflect.TypeFor[Pair]():
		return shapePair
	case reflect.TypeFor[[]Position]():
		return shapePositions
	case reflect.TypeFor[[]NamedNumber]():
		return shapeNamed
	case reflect.TypeFor[[]string]():
		return shapeTexts
	case reflect.TypeFor[Raw]():
		return shapeRaw
	case reflect.TypeFor[[]float64]():
		return shapeNumbers
	case reflect.TypeFor[[][2]float64]():
		return shapePairs
	case reflect.TypeFor[[][4]float64]():
		return shapeRows
	}
	switch t.Kind() {
	case reflect.Bool:
		return shapeBool
	case reflect.String:
		return shapeName
	case reflect.Struct:
		return shapeObject
	case reflect.Slice:
		if t.Elem().Kind() == reflect.Struct {
			return shapeObjects
		}
	}
	panic(fmt.Sprintf("wire: no JSON form for %v", t))
}

// columns is the number of columns that have a quantity and bounds of their own: more than one in tuples only.
func (f *field) columns() int {
	switch f.shape {
	case shapePairs, shapePair:
		return 2
	case shapeRows:
		return 4
	}
	return 1
}
