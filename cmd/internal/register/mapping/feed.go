package mapping

import (
	"fmt"
	"slices"
	"strings"
	"unicode/utf8"

	"github.com/go-json-experiment/json/jsontext"
	"github.com/goccy/go-yaml/ast"

	"leat/api/wire"
	"leat/cmd/internal/register/row"
)

// A feed is one way in which a member gets its value.
type feed struct {
	at       place
	column   string // empty for a constant or levels
	columnAt place
	constant []byte // JSON, in the request's units
	levels   *levelsFeed

	unit       string // empty for the request's own
	values     map[string][]byte
	valueNames []string
	missing    []row.Value // nil for those of every column
	fallback   []byte      // JSON, where the column has no value; nil for none
	kinds      []string    // of the section, or of the object's own; nil for all
	class      int         // by which it holds only for one class of asset; -1 for all
}

// A levelsFeed makes the bed slope from two levels and a length.
type levelsFeed struct {
	upstream, downstream, length feed
	inPlan                       bool
	reversed, flat               string
}

// columns reads a block of members and what feeds each. prefix stands before their names.
func (p *parsing) columns(e entry, prefix string) {
	for _, e := range p.entries(e.value, e.name) {
		p.member(e, prefix, -1)
	}
}

// member reads what feeds a member.
func (p *parsing) member(e entry, prefix string, class int) {
	about, found := p.memberNamed(prefix + e.name)
	if !found {
		var known []string
		for i := range p.members {
			if name := flatName(p.members[i].Path); p.members[i].Form != wire.FormObject && strings.HasPrefix(name, prefix) {
				known = append(known, strings.TrimPrefix(name, prefix))
			}
		}
		p.faultAt(e.at, "%s is no member of a request for %s%s.", prefix+e.name, p.Operation.Name, advice(e.name, known))
		return
	}
	switch flatName(about.Path) {
	case "id":
		p.faultAt(e.at, "id is not fed here; the key column of source stands for it.")
		return
	case "units":
		p.faultAt(e.at, "units stands at the top of the mapping file, and each column may have its own unit.")
		return
	case "depths":
		p.faultAt(e.at, "An asset has one row of results: feed depth, not depths.")
		return
	}
	if own := about.Path[len(about.Path)-1]; utf8.RuneCountInString(own) > wire.MaxNameCharacters {
		p.faultAt(e.at, "A name may have at most %d characters.", wire.MaxNameCharacters)
		return
	}
	var feeds []feed
	if list, isList := e.value.(*ast.SequenceNode); isList && alternatives(list, about.Form) {
		for _, n := range list.Values {
			feeds = append(feeds, p.feed(n, prefix+e.name, about))
		}
	} else {
		feeds = []feed{p.feed(e.value, prefix+e.name, about)}
	}
	for i := range feeds {
		feeds[i].class = class
	}
	at := slices.IndexFunc(p.feeds, func(m memberFeed) bool { return m.name == prefix+e.name })
	switch {
	case at < 0:
		p.feeds = append(p.feeds, memberFeed{e.at, prefix + e.name, *about, feeds})
	case class < 0:
		p.faultAt(e.at, "%s is fed in two places; the other is line %d.", prefix+e.name, p.feeds[at].at.line)
	default:
		p.feeds[at].feeds = append(p.feeds[at].feeds, feeds...)
	}
}

// alternatives reports whether a list says several ways to feed a member, rather than being its value.
func alternatives(list *ast.SequenceNode, form wire.Form) bool {
	if form != wire.FormList {
		return true
	}
	return len(list.Values) > 0 && !slices.ContainsFunc(list.Values, func(n ast.Node) bool {
		switch n.(type) {
		case *ast.MappingNode, *ast.MappingValueNode:
			return false
		}
		return true
	})
}

func flatName(path []string) string { return strings.Join(path, "_") }

// memberNamed finds a member by its flat name, one of the caller's own names included.
func (p *parsing) memberNamed(name string) (*wire.MemberDescription, bool) {
	for i := range p.members {
		m := &p.members[i]
		flat := flatName(m.Path)
		switch {
		case m.Form == wire.FormObject:
		case flat == name && m.Form != wire.FormNumbers:
			return m, true
		case m.Form == wire.FormNumbers:
			if own, found := strings.CutPrefix(name, flat+"_"); found && own != "" {
				return &wire.MemberDescription{Path: append(m.Path[:len(m.Path):len(m.Path)], own), Form: wire.FormNumber, Quantity: m.Quantity}, true
			}
		}
	}
	return nil, false
}

// feed reads one way of feeding a member: a column's name, a constant, or a block that says more.
func (p *parsing) feed(n ast.Node, name string, about *wire.MemberDescription) feed {
	f := feed{at: at(n), class: -1}
	switch n := n.(type) {
	case *ast.MappingNode, *ast.MappingValueNode:
		p.block(n, name, about, &f)
		return f
	case *ast.StringNode:
		if _, isNumber := plainNumber(n); !isNumber && n.Value != "" {
			f.column, f.columnAt = n.Value, placeOf(n.GetToken())
			return f
		}
	}
	f.constant = p.value(n, name, about, measure{})
	return f
}

// block reads a feed that says more than a name.
func (p *parsing) block(n ast.Node, name string, about *wire.MemberDescription, f *feed) {
	var constant, values, fallback ast.Node
	var unitAt ast.Node
	known := map[string]func(entry){
		"column": func(e entry) {
			f.column, f.columnAt = p.text(e), placeOf(e.value.GetToken())
		},
		"constant": func(e entry) { constant = e.value },
		"unit": func(e entry) {
			f.unit, unitAt = plainUnit(p.text(e)), e.value
		},
		"values":  func(e entry) { values = e.value },
		"missing": func(e entry) { f.missing = p.missingValues(e) },
		"default": func(e entry) { fallback = e.value },
		"for":     func(e entry) { f.kinds = p.kinds(e, about) },
	}
	isLevels := false
	if slopeOfMember(about.Path) == sineSlope {
		l := &levelsFeed{reversed: "report", flat: "report"}
		length := wire.MemberDescription{Path: []string{"length"}, Form: wire.FormNumber, Quantity: wire.QuantityLength}
		part := func(into *feed) func(entry) {
			return func(e entry) {
				isLevels, f.levels = true, l
				*into = p.feed(e.value, e.name, &length)
			}
		}
		along := ""
		known["upstream_level"], known["downstream_level"], known["length"] = part(&l.upstream), part(&l.downstream), part(&l.length)
		known["length_along"] = func(e entry) { isLevels, f.levels, along = true, l, p.choice(e, "plan", "bed") }
		known["reversed"] = func(e entry) { l.reversed = p.choice(e, "report", "swap", "keep") }
		known["flat"] = func(e entry) { l.flat = p.choice(e, "report", "keep") }
		defer func() {
			if !isLevels {
				return
			}
			l.inPlan = along == "plan"
			for name, part := range map[string]*feed{"upstream_level": &l.upstream, "downstream_level": &l.downstream, "length": &l.length} {
				if part.column == "" && part.constant == nil && len(part.values) == 0 {
					p.fault(n, "bed_slope is made from upstream_level, downstream_level, length and length_along; %s is missing.", name)
				}
			}
			if along == "" {
				p.fault(n, "length_along is missing: say whether the length is measured in plan (plan) or along the bed (bed).")
			}
			if values != nil || f.missing != nil || f.unit != "" {
				p.fault(n, "values, missing and unit belong to upstream_level, downstream_level and length, each for itself.")
			}
			if f.column != "" || constant != nil {
				p.fault(n, "bed_slope comes either from a column or from levels, not from both.")
			}
		}()
	}
	p.reader.members(n, name, known)

	m := measure{unit: f.unit}
	if f.unit != "" {
		if about.Form != wire.FormNumber {
			p.fault(unitAt, "%s has no unit: it is not a number.", name)
		} else {
			var found bool
			if m.convert, found = converter(about.Quantity, slopeOfMember(about.Path), f.unit, p.System); !found {
				names := unitNames(about.Quantity, slopeOfMember(about.Path))
				p.fault(unitAt, "%s cannot be in %q; it may be in %s.", name, f.unit, strings.Join(names, ", "))
			}
		}
	}
	if constant != nil {
		f.constant = p.value(constant, name, about, m)
	}
	if fallback != nil {
		f.fallback = p.value(fallback, name, about, m)
	}
	if values != nil {
		f.values = map[string][]byte{}
		for _, e := range p.entries(values, "values") {
			f.valueNames = append(f.valueNames, e.name)
			if _, isNull := e.value.(*ast.NullNode); isNull {
				f.values[e.name] = nil
				continue
			}
			f.values[e.name] = p.value(e.value, name, about, m)
		}
	}
	switch {
	case isLevels:
	case f.column == "" && constant == nil:
		p.fault(n, "%s needs a column or a constant.", name)
	case f.column != "" && constant != nil:
		p.fault(n, "%s comes either from a column or from a constant, not from both; default gives the value for rows without one.", name)
	case f.column == "" && (values != nil || fallback != nil || f.missing != nil):
		p.fault(n, "%s is a constant: values, missing and default belong to columns.", name)
	}
}

// kinds reads the kinds for which a member holds.
func (p *parsing) kinds(e entry, about *wire.MemberDescription) []string {
	known := p.kindsOf(about)
	var out []string
	nodes := []ast.Node{e.value}
	if list, isList := e.value.(*ast.SequenceNode); isList {
		nodes = list.Values
	}
	for _, n := range nodes {
		kind := p.text(entry{"for", e.at, n})
		switch {
		case kind == "":
		case !slices.Contains(known, kind):
			p.fault(n, "There is no kind %q%s.", kind, advice(kind, known))
		case len(about.Variants) > 0 && about.Path[0] != "roughness" && !slices.Contains(about.Variants, kind):
			p.fault(n, "%s is no member of the kind %s; it belongs to %s.", flatName(about.Path), kind, strings.Join(about.Variants, ", "))
		default:
			out = append(out, kind)
		}
	}
	return out
}

// kindsOf returns the kinds that a member's own object has, or else those of the section.
func (p *parsing) kindsOf(about *wire.MemberDescription) []string {
	owner := kindOwner(p.members, about.Path)
	for i := range p.members {
		if m := &p.members[i]; len(m.Path) == 2 && m.Path[0] == owner && m.Path[1] == "kind" {
			return m.Names
		}
	}
	return nil
}

// kindOwner returns the object by whose kind a member may differ: its own where that has one, else the section.
func kindOwner(members []wire.MemberDescription, path []string) string {
	if len(path) > 1 && slices.ContainsFunc(members, func(m wire.MemberDescription) bool {
		return len(m.Path) == 2 && m.Path[0] == path[0] && m.Path[1] == "kind"
	}) {
		return path[0]
	}
	return "section"
}

// criteria reads the limits to judge by: the same for all assets, or by class.
func (p *parsing) criteria(e entry) {
	entries := p.entries(e.value, "criteria")
	if !slices.ContainsFunc(entries, func(e entry) bool { return e.name == "by" || e.name == "classes" }) {
		for _, e := range entries {
			p.member(e, "criteria_", -1)
		}
		return
	}
	c := &classFeed{at: e.at}
	var classes, otherwise *entry
	p.reader.members(e.value, "criteria", map[string]func(entry){
		"by":        func(e entry) { c.column, c.at = p.text(e), placeOf(e.value.GetToken()) },
		"classes":   func(e entry) { classes = &e },
		"otherwise": func(e entry) { otherwise = &e },
	})
	if c.column == "" || classes == nil {
		p.faultAt(e.at, "criteria by class need by, the column of the class, and classes, the limits of each.")
		return
	}
	read := func(e entry) {
		for _, limit := range p.entries(e.value, e.name) {
			p.member(limit, "criteria_", len(c.names))
		}
		c.names = append(c.names, e.name)
	}
	for _, class := range p.entries(classes.value, "classes") {
		read(class)
	}
	if otherwise != nil {
		c.other = true
		read(*otherwise)
	}
	p.classes = c
}

// required reports members that every request must have and that nothing feeds: those of which all objects above are required too. Of an
// object that has such a member itself, the member is told.
func (p *parsing) required(e entry) {
	for i := range p.members {
		m := &p.members[i]
		if !p.always(m.Path) || slices.ContainsFunc(p.members, func(below wire.MemberDescription) bool {
			return len(below.Path) == len(m.Path)+1 && below.Required && slices.Equal(below.Path[:len(m.Path)], m.Path)
		}) {
			continue
		}
		name := flatName(m.Path)
		if !slices.ContainsFunc(p.feeds, func(f memberFeed) bool { return f.name == name || strings.HasPrefix(f.name, name+"_") }) {
			p.faultAt(e.at, "Nothing feeds %s, which every request for %s must have.", name, p.Operation.Name)
		}
	}
}

// always reports whether every request has the member of a path.
func (p *parsing) always(path []string) bool {
	return len(path) == 0 || p.always(path[:len(path)-1]) && slices.ContainsFunc(p.members, func(m wire.MemberDescription) bool {
		return m.Required && slices.Equal(m.Path, path)
	})
}

// value reads a constant of a member as JSON in the request's units; nil after a fault.
func (p *parsing) value(n ast.Node, name string, about *wire.MemberDescription, m measure) []byte {
	if about.Form == wire.FormList || about.Form == wire.FormAny {
		return p.json(n, name, nil)
	}
	v, ok := p.scalar(n, name)
	if !ok {
		return nil
	}
	out, detail := constantJSON(v, name, about, m)
	if number, is := parseNumber(out, '.'); detail == "" && is {
		detail = about.Beyond(number, p.System)
	}
	if detail != "" {
		p.fault(n, "%s", detail)
	}
	return out
}

// constantJSON turns a value from the file into JSON for a member, or says why it is none.
func constantJSON(v row.Value, name string, about *wire.MemberDescription, m measure) (json []byte, detail string) {
	switch about.Form {
	case wire.FormNumber:
		var number float64
		switch v.Kind {
		case row.Int:
			number = float64(v.Int())
		case row.Float:
			number = v.Float()
		case row.Text:
			var isRatio bool
			if number, isRatio = ratio(v.Bytes(), m.unit, '.'); !isRatio {
				return nil, fmt.Sprintf("%s must be a number; this is the text %q.", name, short(v.String()))
			}
		default:
			return nil, name + " must be a number."
		}
		if m.convert != nil {
			converted, ok := m.convert(number)
			if !ok {
				return nil, fmt.Sprintf("%s cannot be converted: there is no such slope.", name)
			}
			number = converted
		}
		return wire.AppendNumber(nil, number), ""
	case wire.FormWhole:
		if v.Kind == row.Int {
			return v.Append(nil), ""
		}
		return nil, name + " must be a whole number."
	case wire.FormBool:
		if v.Kind == row.Bool {
			return v.Append(nil), ""
		}
		return nil, name + " must be true or false."
	case wire.FormName:
		text := v.String()
		if slices.Contains(about.Names, text) {
			return append(append([]byte{'"'}, text...), '"'), ""
		}
		return nil, fmt.Sprintf("%s cannot be %q%s.", name, short(text), advice(text, about.Names))
	}
	return nil, name + " cannot be fed here."
}

// json writes a value of the file as canonical JSON, as far as lists and scalars go.
func (p *parsing) json(n ast.Node, name string, dst []byte) []byte {
	switch n := n.(type) {
	case *ast.SequenceNode:
		dst = append(dst, '[')
		for i, item := range n.Values {
			if i > 0 {
				dst = append(dst, ',')
			}
			dst = p.json(item, name, dst)
		}
		return append(dst, ']')
	case *ast.MappingNode, *ast.MappingValueNode:
		entries := p.entries(n, name)
		slices.SortFunc(entries, func(a, b entry) int { return compareNames(a.name, b.name) })
		dst = append(dst, '{')
		for i, e := range entries {
			if i > 0 {
				dst = append(dst, ',')
			}
			dst, _ = jsontext.AppendQuote(dst, e.name)
			dst = p.json(e.value, name, append(dst, ':'))
		}
		return append(dst, '}')
	}
	v, ok := p.scalar(n, name)
	if !ok {
		return dst
	}
	switch v.Kind {
	case row.Text:
		dst, _ = jsontext.AppendQuote(dst, v.String())
		return dst
	case row.Int:
		return wire.AppendNumber(dst, float64(v.Int()))
	case row.Float:
		return wire.AppendNumber(dst, v.Float())
	case row.Bool:
		return v.Append(dst)
	}
	return append(dst, "null"...)
}
