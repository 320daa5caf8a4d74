package mapping

import (
	"cmp"
	"fmt"
	"slices"
	"strconv"
	"strings"
	"unicode/utf16"

	"github.com/go-json-experiment/json"
	"github.com/go-json-experiment/json/jsontext"

	"leat/api/wire"
	"leat/cmd/internal/register/row"
)

// A Mapping is a File compiled for the columns of a table. It is safe for concurrent use.
type Mapping struct {
	// Columns are those of the source to read, the key first; Child those of its points.
	Columns []string
	Child   []string
	// Copied are the places in Columns of those that the results bear too.
	Copied []int
	// Canonical says that every request is canonical JSON, so that its bytes can be hashed as they are.
	Canonical bool

	decimal byte
	root    node
	section *node // where the section's kind stands, nil without one
	classes *classes
	points  *points
}

// A node is a member of the request: an object with nodes of its own, or a value with its sources.
type node struct {
	name    string
	key     []byte // the name as it stands in JSON, with its colon
	nodes   []node // of an object, in the order of RFC 8785
	kind    int    // of the nodes, the one that is the object's kind; -1 without
	byKind  bool   // its sources differ by the object's own kind
	flat    string
	about   wire.MemberDescription
	sources []source
	points  bool  // its value is the list of points
	needs   *node // left out where this one is: the flows of a criterion by which the row is not judged
}

// A source is a feed compiled.
type source struct {
	kinds uint32 // bits of kinds for which it holds
	class int    // -1 for all

	column   int
	name     string // of the column, for problems
	constant []byte
	levels   *levels

	measure
	values         map[string][]byte
	valueNames     []string
	missingNumbers []float64
	missingTexts   []string
	fallback       []byte
}

// levels are the sources of a bed slope made from two levels and a length.
type levels struct {
	upstream, downstream, length source
	inPlan, swap, keep, keepFlat bool
}

// classes tell which class a row is of.
type classes struct {
	column int
	name   string
	byName map[string]int
	names  []string
	other  int // class of all others; -1 where there is none
}

type points struct{ offset, level source }

const allKinds = ^uint32(0)

// Compile fits the file to the columns of its tables. The error is Faults.
func (f *File) Compile(columns, child []row.Column) (*Mapping, error) {
	c := compiling{File: f, reader: reader{file: f.Path}, columns: columns, m: &Mapping{decimal: cmp.Or(f.Source.CSV.Decimal, '.'), Canonical: true}}
	c.use(f.Source.Key, f.places["source.key"])
	for _, condition := range f.Source.Filter {
		c.known(condition.Column, f.places["filter."+condition.Column], c.columns)
	}
	c.members = wire.DescribeRequest(f.Operation.Request)
	if f.classes != nil {
		c.class()
	}
	c.m.root.kind, c.missing = -1, f.missing
	for i := range f.feeds {
		c.add(&f.feeds[i])
	}
	if f.points != nil {
		c.child(child)
	}
	c.constants()
	c.finish(&c.m.root)
	for i := range c.m.root.nodes {
		if n := &c.m.root.nodes[i]; n.name == "section" && n.kind >= 0 {
			c.m.section = n
		}
	}
	c.criterionFlows()
	c.copied()
	if err := c.faults.err(); err != nil {
		return nil, err
	}
	return c.m, nil
}

type compiling struct {
	*File
	reader
	columns []row.Column
	members []wire.MemberDescription
	missing []row.Value // in every column
	m       *Mapping
}

// known reports a column that a table does not have.
func (c *compiling) known(name string, at place, columns []row.Column) bool {
	if hasColumn(columns, name) {
		return true
	}
	names := make([]string, len(columns))
	for i := range columns {
		names[i] = columns[i].Name
	}
	c.faultAt(at, "The table has no column %q%s.", name, advice(name, names))
	return false
}

func hasColumn(columns []row.Column, name string) bool {
	return slices.ContainsFunc(columns, func(c row.Column) bool { return c.Name == name })
}

// use returns the place of a column among those to read.
func (c *compiling) use(name string, at place) int {
	if !c.known(name, at, c.columns) {
		return 0
	}
	if i := slices.Index(c.m.Columns, name); i >= 0 {
		return i
	}
	c.m.Columns = append(c.m.Columns, name)
	return len(c.m.Columns) - 1
}

func (c *compiling) class() {
	cl := &classes{column: c.use(c.File.classes.column, c.File.classes.at), name: c.File.classes.column, byName: map[string]int{}, other: -1, names: c.File.classes.names}
	for i, name := range cl.names {
		cl.byName[name] = i
	}
	if c.File.classes.other {
		cl.other = len(cl.names) - 1
		delete(cl.byName, cl.names[cl.other])
		cl.names = cl.names[:cl.other]
	}
	c.m.classes = cl
}

func (c *compiling) child(columns []row.Column) {
	s := c.Source.Points
	for name, column := range map[string]string{"key": s.Key, "order": s.Order, "offset": s.Offset, "level": s.Level} {
		if column != "" {
			c.known(column, c.places["source.points."+name], columns)
		}
	}
	c.m.Child = []string{s.Offset, s.Level}
	length := wire.MemberDescription{Path: []string{"section", "points"}, Form: wire.FormNumber, Quantity: wire.QuantityLength}
	c.missing = nil // what is missing in the columns of the assets need not be in those of points
	c.m.points = &points{c.compile(&c.File.points.offset, &length, 0), c.compile(&c.File.points.level, &length, 1)}
	i := slices.IndexFunc(c.feeds, func(f memberFeed) bool { return f.name == "section_points" })
	if i >= 0 {
		c.faultAt(c.feeds[i].at, "section_points is fed by the points of source already.")
		return
	}
	for _, about := range c.members {
		if flatName(about.Path) == "section_points" {
			n := c.place(about.Path)
			n.about, n.flat, n.points, n.byKind = about, "section_points", true, true
			n.sources = []source{{kinds: c.bits(&about, nil), class: -1, name: s.Offset + ", " + s.Level}}
		}
	}
}

// constants adds the units, which every canonical request names.
func (c *compiling) constants() {
	n := c.place([]string{"units"})
	n.flat, n.sources = "units", []source{{kinds: allKinds, class: -1, constant: strconv.AppendQuote(nil, c.System.String())}}
}

// place returns the node of a path, made where there is none. What it returned before is not valid any more.
func (c *compiling) place(path []string) *node {
	n := &c.m.root
	for _, name := range path {
		i := slices.IndexFunc(n.nodes, func(o node) bool { return o.name == name })
		if i < 0 {
			i = len(n.nodes)
			key, _ := jsontext.AppendQuote(nil, name) // bad UTF-8 becomes U+FFFD
			n.nodes = append(n.nodes, node{name: name, key: append(key, ':'), kind: -1})
		}
		n = &n.nodes[i]
	}
	return n
}

func (c *compiling) add(f *memberFeed) {
	n := c.place(f.about.Path)
	n.about, n.flat = f.about, f.name
	n.byKind = len(f.about.Path) > 1 && kindOwner(c.members, f.about.Path) == f.about.Path[0]
	for i := range f.feeds {
		from := &f.feeds[i]
		column := -1
		switch {
		case from.column == "":
		case slices.Contains(f.about.Names, from.column) && !hasColumn(c.columns, from.column):
			c.faultAt(from.columnAt, "The table has no column %q; if all assets are of that kind, write {constant: %s}.", from.column, from.column)
		default:
			column = c.use(from.column, from.columnAt)
		}
		n.sources = append(n.sources, c.compile(from, &f.about, column))
	}
	if f.about.Form == wire.FormList || f.about.Form == wire.FormAny {
		for i := range n.sources {
			if n.sources[i].column >= 0 && n.sources[i].constant == nil && n.sources[i].values == nil {
				c.m.Canonical = false // a list as text in a cell
			}
		}
	}
}

// compile compiles a feed whose column is already placed.
func (c *compiling) compile(f *feed, about *wire.MemberDescription, column int) source {
	s := source{
		kinds: c.bits(about, f.kinds), class: f.class, column: column, name: f.column, constant: f.constant,
		values: f.values, valueNames: f.valueNames, fallback: f.fallback, measure: measure{unit: f.unit},
	}
	if f.unit != "" {
		s.convert, _ = converter(about.Quantity, slopeOfMember(about.Path), f.unit, c.System)
	}
	missing := f.missing
	if missing == nil {
		missing = c.missing
	}
	for _, v := range missing {
		switch v.Kind {
		case row.Int:
			s.missingNumbers = append(s.missingNumbers, float64(v.Int()))
		case row.Float:
			s.missingNumbers = append(s.missingNumbers, v.Float())
		default:
			s.missingTexts = append(s.missingTexts, v.String())
			if number, isNumber := parseNumber(v.Bytes(), '.'); isNumber && v.Kind == row.Text { // "-999", in quotes
				s.missingNumbers = append(s.missingNumbers, number)
			}
		}
	}
	if l := f.levels; l != nil {
		level := wire.MemberDescription{Path: []string{"level"}, Form: wire.FormNumber, Quantity: wire.QuantityLength}
		part := func(f *feed) source {
			column := -1
			if f.column != "" {
				column = c.use(f.column, f.columnAt)
			}
			return c.compile(f, &level, column)
		}
		s.levels = &levels{
			upstream: part(&l.upstream), downstream: part(&l.downstream), length: part(&l.length),
			inPlan: l.inPlan, swap: l.reversed == "swap", keep: l.reversed == "keep", keepFlat: l.flat == "keep",
		}
		s.name = strings.Join([]string{s.levels.upstream.label(), s.levels.downstream.label(), s.levels.length.label()}, ", ")
	}
	return s
}

// label names a source in problems.
func (s *source) label() string {
	if s.name == "" {
		return "a constant"
	}
	return s.name
}

// bits are the kinds for which a feed of a member holds: those chosen, or those that have the member, or all.
func (c *compiling) bits(about *wire.MemberDescription, chosen []string) uint32 {
	p := parsing{members: c.members}
	known := p.kindsOf(about)
	if chosen == nil && len(about.Variants) > 0 && kindOwner(c.members, about.Path) == about.Path[0] {
		chosen = about.Variants
	}
	if chosen == nil {
		return allKinds
	}
	var bits uint32
	for _, kind := range chosen {
		if i := slices.Index(known, kind); i >= 0 {
			bits |= 1 << i
		}
	}
	return bits
}

// compareNames orders names as RFC 8785 does: by their UTF-16 code units.
func compareNames(a, b string) int {
	return slices.Compare(utf16.Encode([]rune(a)), utf16.Encode([]rune(b)))
}

// finish puts nodes into the order of RFC 8785 and finds each object's kind.
func (c *compiling) finish(n *node) {
	slices.SortFunc(n.nodes, func(a, b node) int { return compareNames(a.name, b.name) })
	for i := range n.nodes {
		c.finish(&n.nodes[i])
		if n.nodes[i].name == "kind" && n.nodes[i].about.Form == wire.FormName {
			n.kind = i
		}
	}
}

// criterionFlows ties the flows of each criterion to the criterion, which some classes of assets may not have.
func (c *compiling) criterionFlows() {
	find := func(n *node, name string) *node {
		if n != nil {
			if i := slices.IndexFunc(n.nodes, func(o node) bool { return o.name == name }); i >= 0 {
				return &n.nodes[i]
			}
		}
		return nil
	}
	flows := find(&c.m.root, "criterion_flows")
	if flows == nil {
		return
	}
	var names []string // of all flows, where they are fed one by one
	if all := find(&c.m.root, "flows"); all != nil {
		for i := range all.nodes {
			names = append(names, all.nodes[i].name)
		}
	}
	for i := range flows.nodes {
		n := &flows.nodes[i]
		c.flowsOf(n, names)
		if n.needs = find(find(&c.m.root, "criteria"), n.name); n.needs == nil {
			at := slices.IndexFunc(c.feeds, func(f memberFeed) bool { return f.name == n.flat })
			c.faultAt(c.feeds[at].at, "criteria has no %s whose flows could be chosen.", n.name)
		}
	}
}

// flowsOf looks for flows that a criterion names and that there are not.
func (c *compiling) flowsOf(n *node, names []string) {
	for _, source := range n.sources {
		var chosen []string
		if names == nil || source.constant == nil || json.Unmarshal(source.constant, &chosen) != nil {
			continue // the request tells
		}
		for _, name := range chosen {
			if !slices.Contains(names, name) {
				at := slices.IndexFunc(c.feeds, func(f memberFeed) bool { return f.name == n.flat })
				c.faultAt(c.feeds[at].at, "%s names %q, which is none of flows%s.", n.flat, short(name), advice(name, names))
			}
		}
	}
}

// copied chooses the columns that the results bear too.
func (c *compiling) copied() {
	names := c.Target.Copy
	if c.Target.CopyAll {
		for _, column := range c.columns {
			if column.Name != c.Source.Key {
				names = append(names, column.Name)
			}
		}
	}
	for _, name := range names {
		if !c.known(name, c.places["target.copy"], c.columns) {
			continue
		}
		if name == c.Source.Key {
			c.faultAt(c.places["target.copy"], "The key column %q stands in the results already, as asset.", name)
			continue
		}
		at := c.use(name, c.places["target.copy"])
		if !slices.Contains(c.m.Copied, at) {
			c.m.Copied = append(c.m.Copied, at)
		}
	}
}

// Feeds reports whether anything feeds a member at the top of the request.
func (m *Mapping) Feeds(name string) bool {
	return slices.ContainsFunc(m.root.nodes, func(n node) bool { return n.name == name })
}

// pointerText takes the escapes out of a part of a JSON Pointer (RFC 6901).
var pointerText = strings.NewReplacer("~1", "/", "~0", "~")

// pointer returns the JSON Pointer of a member.
func (n *node) pointer() (pointer string) {
	for _, name := range n.about.Path {
		pointer = wire.MemberPointer(pointer, name)
	}
	return pointer
}

// ColumnsAt names the source's columns that feed what a JSON Pointer points to, joined with a comma; empty where none does.
func (m *Mapping) ColumnsAt(pointer string) string {
	n := &m.root
	for _, part := range strings.Split(strings.TrimPrefix(pointer, "/"), "/") {
		part = pointerText.Replace(part)
		i := slices.IndexFunc(n.nodes, func(o node) bool { return o.name == part })
		if i < 0 {
			break
		}
		n = &n.nodes[i]
	}
	if n == &m.root {
		return ""
	}
	var names []string
	n.gather(&names)
	return strings.Join(names, ", ")
}

func (n *node) gather(names *[]string) {
	for i := range n.sources {
		if name := n.sources[i].name; name != "" && !slices.Contains(*names, name) {
			*names = append(*names, name)
		}
	}
	for i := range n.nodes {
		n.nodes[i].gather(names)
	}
}

// describeValues says which values a table knows.
func describeValues(names []string) string {
	if len(names) > 12 {
		return fmt.Sprintf("%s and %d more", strings.Join(names[:12], ", "), len(names)-12)
	}
	return strings.Join(names, ", ")
}
