package mapping

import (
	"crypto/sha256"
	"encoding/hex"
	"os"
	"path/filepath"
	"slices"
	"strings"

	"github.com/goccy/go-yaml/ast"

	"leat/api/operation"
	"leat/api/wire"
	"leat/cmd/internal/register/row"
	"leat/cmd/internal/register/store"
)

// A File is a mapping file that was read and found sound by itself; whether it fits the tables that it names, Compile tells.
type File struct {
	Path   string
	Hash   string // of the file's bytes, for the record of runs
	Source store.SourceSpec
	Target TargetChoice
	// Operation judges the assets.
	Operation *operation.Operation
	// System is that of the requests and of the results.
	System wire.System

	missing []row.Value // in every column
	feeds   []memberFeed
	classes *classFeed
	points  *pointsFeed
	places  map[string]place // of members of source and target: "source.table"
}

// A TargetChoice is where the results go, and which.
type TargetChoice struct {
	store.TargetSpec
	Columns []string // of the flat answer; nil for all
	Prefix  string   // before every name that is ours
	Copy    []string // columns of the source
	CopyAll bool
}

// A memberFeed says what feeds one member of the request: the first of the feeds that applies and is given.
type memberFeed struct {
	at    place
	name  string // flat
	about wire.MemberDescription
	feeds []feed
}

// A classFeed is the column by which criteria differ.
type classFeed struct {
	column string
	at     place
	names  []string // of the classes
	other  bool     // rows of another class, or of none, are judged by the class "otherwise"
}

// A pointsFeed says where the points of surveyed sections come from.
type pointsFeed struct {
	at            place
	offset, level feed
}

// Load reads a mapping file. The error is Faults where the file could be read.
func Load(path string) (*File, error) {
	data, err := os.ReadFile(path)
	if err != nil {
		return nil, err
	}
	return Parse(path, data)
}

// Parse reads a mapping file's bytes. The error is Faults, all that were found.
func Parse(path string, data []byte) (*File, error) {
	hash := sha256.Sum256(data)
	p := parsing{
		reader: reader{file: path},
		File:   &File{Path: path, Hash: hex.EncodeToString(hash[:]), places: map[string]place{}},
	}
	if top := p.parse(data); top != nil {
		p.top(top)
	}
	if err := p.faults.err(); err != nil {
		return nil, err
	}
	return p.File, nil
}

// A parsing fills a File.
type parsing struct {
	reader
	*File
	members []wire.MemberDescription // of the operation's request
}

// operations are those that answer an asset with one flat row.
var operations = slices.DeleteFunc(operation.All(), func(o *operation.Operation) bool { return wire.FlatTableOf(o.Form) == nil })

func (p *parsing) top(n ast.Node) {
	known := []string{"operation", "units", "source", "target", "missing", "columns", "flows", "criteria", "criterion_flows"}
	found := map[string]entry{}
	for _, e := range p.entries(n, "The mapping file") {
		if !slices.Contains(known, e.name) {
			p.faultAt(e.at, "The mapping file has no member %q%s.", e.name, advice(e.name, known))
			continue
		}
		found[e.name] = e
	}
	for _, name := range []string{"operation", "source", "target", "columns"} {
		if _, given := found[name]; !given {
			p.faultAt(at(n), "%s is missing from the mapping file; it must have operation, source, target and columns.", name)
		}
	}
	take := func(name string, read func(entry)) {
		if e, given := found[name]; given {
			read(e)
		}
	}
	take("operation", p.operation)
	take("units", func(e entry) { p.System, _ = wire.SystemNamed(p.choice(e, "si", "us")) })
	take("source", p.source)
	take("target", p.target)
	take("missing", func(e entry) { p.missing = p.missingValues(e) })
	if p.members == nil {
		return // without an operation no member is known
	}
	take("columns", func(e entry) { p.columns(e, "") })
	take("flows", func(e entry) { p.columns(e, "flows_") })
	take("criteria", p.criteria)
	take("criterion_flows", func(e entry) { p.columns(e, "criterion_flows_") })
	if e, given := found["columns"]; given {
		p.required(e)
	}
}

func (p *parsing) operation(e entry) {
	names := make([]string, len(operations))
	for i := range operations {
		names[i] = operations[i].Name
	}
	name := p.choice(e, names...)
	for _, o := range operations {
		if o.Name == name {
			p.Operation, p.members = o, wire.DescribeRequest(o.Request)
		}
	}
}

// note keeps where a member of source or target stands.
func (p *parsing) note(part string, e entry) string {
	p.places[part+"."+e.name] = placeOf(e.value.GetToken())
	return p.text(e)
}

// Place returns the fault of something that only the source or target could tell, with the line of the member at fault.
func (f *File) Place(part string, misfit *store.Misfit) error {
	where, found := f.places[part+"."+misfit.Field]
	if !found {
		where = f.places[part]
	}
	return Faults{{File: f.Path, Line: where.line, Column: where.column, Detail: misfit.Detail}}
}

// passwordDetail is the answer to a password in the file.
const passwordDetail = "A mapping file holds no passwords: set PGPASSWORD or PGPASSFILE in the environment, or name a file that only you can read with password_file."

var formats = []string{"csv", "geojson", "geopackage", "postgres"}

func (p *parsing) source(e entry) {
	s := &p.Source
	p.places["source"] = e.at
	text := func(into *string) func(entry) { return func(e entry) { *into = p.note("source", e) } }
	known := map[string]func(entry){
		"format": func(e entry) { s.Format = p.choice(e, formats...) },
		"path":   func(e entry) { s.Path = p.path(p.note("source", e)) },
		"table":  text(&s.Table),
		"schema": text(&s.Schema),
		"key":    text(&s.Key),
		"filter": func(e entry) { s.Filter = p.filter(e) },
		"points": p.pointsTable,
	}
	p.csv(known, &s.CSV)
	p.database(known, "source", &s.Database)
	p.reader.members(e.value, "source", known)
	p.form(e, "source", s.Format, s.Path, s.Table)
	if s.Key == "" {
		p.faultAt(e.at, "source has no key: name the column that tells each asset from all others.")
	}
}

// form makes sure that a source or target has what its format needs.
func (p *parsing) form(e entry, part, format, path, table string) {
	switch format {
	case "":
		if _, isChoice := p.formatOf(e.value); !isChoice {
			p.faultAt(e.at, "%s has no format: it is one of %s.", part, strings.Join(formats, ", "))
		}
	case "csv", "geojson":
		if path == "" {
			p.faultAt(e.at, "%s has no path: name the %s file.", part, format)
		}
		if table != "" {
			p.faultAt(p.places[part+".table"], "A %s file has no tables; leave table out.", format)
		}
	case "geopackage":
		if path == "" {
			p.faultAt(e.at, "%s has no path: name the GeoPackage file.", part)
		}
		fallthrough
	case "postgres":
		if table == "" {
			p.faultAt(e.at, "%s has no table: name the table, view or layer.", part)
		}
	}
}

// formatOf reports whether a format is written, be it a wrong one, which was told already.
func (p *parsing) formatOf(n ast.Node) (string, bool) {
	quiet := reader{}
	for _, e := range quiet.entries(n, "") {
		if e.name == "format" {
			return e.name, true
		}
	}
	return "", false
}

func (p *parsing) target(e entry) {
	t := &p.Target
	p.places["target"] = e.at
	text := func(into *string) func(entry) { return func(e entry) { *into = p.note("target", e) } }
	known := map[string]func(entry){
		"format":    func(e entry) { t.Format = p.choice(e, formats...) },
		"path":      func(e entry) { t.Path = p.path(p.note("target", e)) },
		"table":     text(&t.Table),
		"schema":    text(&t.Schema),
		"problems":  func(e entry) { t.Problems = p.note("target", e) },
		"overwrite": func(e entry) { t.Overwrite = p.truth(e) },
		"prefix":    text(&t.Prefix),
		"columns": func(e entry) {
			p.places["target.columns"] = e.at
			t.Columns = p.texts(e)
		},
		"copy": func(e entry) {
			p.places["target.copy"] = e.at
			if n, ok := e.value.(*ast.StringNode); ok && n.Value == "all" {
				t.CopyAll = true
				return
			}
			t.Copy = p.texts(e)
		},
	}
	p.csv(known, &t.CSV)
	p.database(known, "target", &t.Database)
	p.reader.members(e.value, "target", known)
	p.form(e, "target", t.Format, t.Path, t.Table)
	if t.Format == "csv" || t.Format == "geojson" {
		if t.Problems == "" && t.Path != "" {
			t.Problems = strings.TrimSuffix(t.Path, filepath.Ext(t.Path)) + "_problems.csv"
		} else if t.Problems != "" {
			t.Problems = p.path(t.Problems)
		}
	}
}

// path makes a path absolute by the folder of the mapping file.
func (p *parsing) path(path string) string {
	if path == "" || filepath.IsAbs(path) {
		return path
	}
	return filepath.Join(filepath.Dir(p.Path), path)
}

func (p *parsing) csv(known map[string]func(entry), into *store.CSVSpec) {
	known["delimiter"] = func(e entry) {
		names := map[string]byte{",": ',', ";": ';', "\t": '\t', "tab": '\t', "|": '|'}
		text := p.text(e)
		if c, found := names[text]; found {
			into.Delimiter = c
		} else if text != "" {
			p.fault(e.value, `delimiter must be one of ",", ";", "|" and tab.`)
		}
	}
	known["decimal"] = func(e entry) {
		switch text := p.text(e); text {
		case ".", ",":
			into.Decimal = text[0]
		case "":
		default:
			p.fault(e.value, `decimal must be "." or ",".`)
		}
	}
}

func (p *parsing) database(known map[string]func(entry), part string, into *store.DatabaseSpec) {
	text := func(into *string) func(entry) {
		return func(e entry) {
			*into = p.note(part, e)
			if strings.Contains(*into, "://") || strings.Contains(strings.ToLower(*into), "password") {
				p.faultAt(e.at, "%s is a plain name, not an address with several parts. %s", e.name, passwordDetail)
			}
		}
	}
	known["host"] = text(&into.Host)
	known["port"] = text(&into.Port)
	known["database"] = text(&into.Name)
	known["user"] = text(&into.User)
	known["password_file"] = func(e entry) { into.PasswordFile = p.path(p.note(part, e)) }
	known["password"] = func(e entry) { p.faultAt(e.at, passwordDetail) }
}

func (p *parsing) pointsTable(e entry) {
	s := &store.PointsSpec{}
	p.Source.Points = s
	p.points = &pointsFeed{at: e.at}
	p.places["source.points"] = e.at
	text := func(into *string) func(entry) {
		return func(e entry) {
			e.name = "points." + e.name
			*into = p.note("source", e)
		}
	}
	length := wire.MemberDescription{Path: []string{"section", "points"}, Form: wire.FormNumber, Quantity: wire.QuantityLength}
	measured := func(into *string, f *feed) func(entry) {
		return func(e entry) {
			*f = p.feed(e.value, e.name, &length)
			*into = f.column
			p.places["source.points."+e.name] = f.columnAt
			if f.column == "" {
				p.fault(e.value, "%s of points must come from a column.", e.name)
			}
		}
	}
	p.reader.members(e.value, "points", map[string]func(entry){
		"path":   func(e entry) { text(&s.Path)(e); s.Path = p.path(s.Path) },
		"table":  text(&s.Table),
		"schema": text(&s.Schema),
		"key":    text(&s.Key),
		"order":  text(&s.Order),
		"offset": measured(&s.Offset, &p.points.offset),
		"level":  measured(&s.Level, &p.points.level),
	})
	for name, given := range map[string]string{"key": s.Key, "offset": s.Offset, "level": s.Level} {
		if given == "" {
			p.faultAt(e.at, "points has no %s: name the column.", name)
		}
	}
}

// comparisons are the members of a condition on a column.
var comparisons = []struct {
	name string
	op   store.Op
}{{"above", store.Above}, {"at_least", store.AtLeast}, {"below", store.Below}, {"at_most", store.AtMost}}

func (p *parsing) filter(e entry) []store.Condition {
	var out []store.Condition
	for _, e := range p.entries(e.value, "filter") {
		p.places["filter."+e.name] = e.at
		out = append(out, p.conditions(e)...)
	}
	return out
}

func (p *parsing) conditions(e entry) []store.Condition {
	values := func(n ast.Node) []row.Value {
		list, isList := n.(*ast.SequenceNode)
		if !isList {
			v, ok := p.scalar(n, e.name)
			if !ok || v.IsNull() {
				return nil
			}
			return []row.Value{v}
		}
		var out []row.Value
		for _, item := range list.Values {
			v, ok := p.scalar(item, e.name)
			switch {
			case ok && v.IsNull():
				p.fault(item, "A list of values cannot hold null; give %s: null alone for rows without a value.", e.name)
			case ok:
				out = append(out, v)
			}
		}
		return out
	}
	switch n := e.value.(type) {
	case *ast.NullNode:
		return []store.Condition{{Column: e.name, Op: store.IsNull}}
	case *ast.MappingNode, *ast.MappingValueNode:
		var out []store.Condition
		known := map[string]func(entry){
			"not": func(e2 entry) {
				if _, isNull := e2.value.(*ast.NullNode); isNull {
					out = append(out, store.Condition{Column: e.name, Op: store.NotNull})
				} else {
					out = append(out, store.Condition{Column: e.name, Op: store.NoneOf, Values: values(e2.value)})
				}
			},
		}
		for _, c := range comparisons {
			known[c.name] = func(e2 entry) {
				v := values(e2.value)
				if len(v) != 1 {
					p.fault(e2.value, "%s must be one value.", c.name)
					return
				}
				out = append(out, store.Condition{Column: e.name, Op: c.op, Values: v})
			}
		}
		p.reader.members(n, "The condition on "+e.name, known)
		return out
	}
	return []store.Condition{{Column: e.name, Op: store.AnyOf, Values: values(e.value)}}
}

// missingValues reads the values that mean that nothing is known.
func (p *parsing) missingValues(e entry) []row.Value {
	nodes := []ast.Node{e.value}
	if list, isList := e.value.(*ast.SequenceNode); isList {
		nodes = list.Values
	}
	out := []row.Value{}
	for _, n := range nodes {
		if v, ok := p.scalar(n, "missing"); ok && !v.IsNull() {
			out = append(out, v)
		}
	}
	return out
}
