package wire

import (
	"fmt"
	"reflect"
	"strings"
)

// A FlatPlan holds the flat names of one type of request: the names of its members on the way down, joined by an underscore, as
// section_bottom_width for /section/bottom_width. It is made from the same tags as the decoder's plan. It is immutable.
type FlatPlan struct {
	request reflect.Type // the struct
	nodes   []flatNode   // depth first
	byName  map[string]int
	names   []string // of all but objects, for suggestions
}

// A flatNode is a member at any depth: an object, or a leaf whose value stands in one cell.
type flatNode struct {
	name     string // flat
	field    *field
	key      string // as it stands in a request: quotes and colon
	parent   int    // -1 at the top
	end      int    // the node after the last one below
	required bool   // in its parent
}

// object reports whether the node's members have flat names of their own.
func (n *flatNode) object() bool { return n.field.shape == shapeObject }

// flatPlans holds the flat plan of every request type.
var flatPlans = func() map[reflect.Type]*FlatPlan {
	m := map[reflect.Type]*FlatPlan{}
	for t, p := range plans {
		if !reflect.PointerTo(t).Implements(reflect.TypeFor[Request]()) {
			continue
		}
		flat := &FlatPlan{request: t, byName: map[string]int{}}
		flat.add(p, "", -1)
		m[t] = flat
	}
	return m
}()

// FlatPlanOf returns the flat names of a type of request; request may be a nil pointer.
func FlatPlanOf(request Request) *FlatPlan { return flatPlans[reflect.TypeOf(request).Elem()] }

func (p *FlatPlan) add(object *plan, prefix string, parent int) {
	for i := range object.fields {
		f := &object.fields[i]
		at := len(p.nodes)
		name := prefix + f.name
		if _, taken := p.byName[name]; taken {
			panic(fmt.Sprintf("wire: %v has two members of the flat name %s", p.request, name))
		}
		p.byName[name] = at
		p.nodes = append(p.nodes, flatNode{name: name, field: f, key: `"` + f.name + `":`, parent: parent, required: object.required&(1<<i) != 0})
		if f.shape == shapeObject {
			p.add(f.sub, name+"_", at)
		} else {
			p.names = append(p.names, name)
		}
		p.nodes[at].end = len(p.nodes)
	}
}

// A FlatMember describes a member of requests by its flat name.
type FlatMember struct {
	Name     string
	Pointer  string   // RFC 6901, of the member in a request
	Quantity Quantity // of a number; of a list that of its first column
	Number   bool     // a number, whole or not
	Text     bool     // a text: an id, a name of an enumeration
	List     bool     // a list or an object of the caller's own names: JSON text in a cell
	Accepted []string // the names of an enumeration
}

// Members returns all members that have a cell of their own, in the order of a request.
func (p *FlatPlan) Members() []FlatMember {
	var out []FlatMember
	for i := range p.nodes {
		n := &p.nodes[i]
		if n.object() {
			continue
		}
		m := FlatMember{Name: n.name, Pointer: string(p.pointer(i)), Quantity: n.field.quantity[0], Accepted: n.field.enum}
		switch n.field.shape {
		case shapeNumber, shapeWhole:
			m.Number = true
		case shapeName, shapeID:
			m.Text = true
		case shapeBool:
		default:
			m.List = true
		}
		out = append(out, m)
	}
	return out
}

// pointer returns the place of a node in a request.
func (p *FlatPlan) pointer(node int) pointer {
	if node < 0 {
		return ""
	}
	n := &p.nodes[node]
	return p.pointer(n.parent).member(n.field.name)
}

// A FlatPlace is a member that a flat name leads to, in one FlatPlan.
type FlatPlace struct {
	node int
	name string // of the caller's own in an object of numbers: design of flows_design
}

// Find returns the member that a flat name leads to. An object's own name (section) leads to the object as a whole, and a name of the caller's
// below an object of numbers (flows_design) to that number.
func (p *FlatPlan) Find(name string) (FlatPlace, bool) {
	if node, found := p.byName[name]; found {
		return FlatPlace{node: node}, true
	}
	for i := range p.nodes {
		n := &p.nodes[i]
		if n.field.shape != shapeNamed {
			continue
		}
		if rest, below := strings.CutPrefix(name, n.name+"_"); below && rest != "" {
			return FlatPlace{i, rest}, true
		}
	}
	return FlatPlace{}, false
}

// Unknown returns the fault of a column or property that is no member; answers are the names that answers have, nil for none. prefix is what of the
// name, as the caller wrote it, stands before the name that was looked up.
func (p *FlatPlan) Unknown(name, prefix string, answers *FlatTable) Fault {
	f := Fault{Column: clip(name), Code: codeUnknownMember}
	rest := strings.TrimPrefix(name, prefix)
	switch {
	case name == "":
		f.Column = " "
		f.Detail = "A column has no name. Name it after a member, or leave it out."
	case answers != nil && answers.has(rest):
		f.Detail = clip(name) + " is a name of the answer, not of a request. Leave it out; with ?prefix=NAME_ answers bear a prefix of yours and replace what stood there."
	case prefix != "":
		f.Detail = "There is no member " + clip(rest) + " for " + clip(name) + " to stand for." + p.advice(rest, prefix)
	default:
		f.Detail = "There is no member " + clip(name) + " here." + p.advice(name, "") + " With ?prefix=NAME_ only names that begin so are read, and all others are handed through."
	}
	return f
}

// advice says which member an unknown flat name most likely means.
func (p *FlatPlan) advice(name, prefix string) string {
	if meant := p.meant(name); meant != "" {
		if node, found := p.byName[meant]; found && p.nodes[node].field.shape == shapeNamed {
			return " Did you mean " + prefix + meant + "_ with a name of your own behind it, such as " + prefix + meant + "_design?"
		}
		return " Did you mean " + prefix + meant + "?"
	}
	return ""
}

func (p *FlatPlan) meant(name string) string {
	plain := plainName(name)
	for _, known := range p.names {
		if plainName(known) == plain {
			return known
		}
	}
	// A member's own name, or a symbol for it, without the way down to it.
	for _, member := range append([]string{name}, symbols[plain]...) {
		member = plainName(member)
		for i := range p.nodes {
			if n := &p.nodes[i]; !n.object() && plainName(n.field.name) == member {
				return n.name
			}
		}
	}
	near, _ := nearest(name, p.names)
	return near
}
