package mapping

import (
	"fmt"
	"slices"
	"strconv"
	"strings"

	"github.com/goccy/go-yaml/ast"
	"github.com/goccy/go-yaml/parser"
	"github.com/goccy/go-yaml/token"

	"leat/api/wire"
	"leat/cmd/internal/register/row"
)

// A reader goes through a YAML document and gathers faults; what it returns beside a fault is of no use, but safe.
type reader struct {
	file   string
	faults Faults
}

// parse returns the document's top, nil with a fault where there is none.
func (r *reader) parse(data []byte) ast.Node {
	file, err := parser.ParseBytes(data, 0)
	if err != nil {
		at, detail := place{}, err.Error()
		if told, ok := err.(interface{ GetMessage() string }); ok {
			detail = told.GetMessage()
		}
		if told, ok := err.(interface{ GetToken() *token.Token }); ok && told.GetToken() != nil {
			at = placeOf(told.GetToken())
		}
		r.faultAt(at, "This is not YAML: %s.", strings.TrimSuffix(detail, "."))
		return nil
	}
	if len(file.Docs) != 1 || file.Docs[0].Body == nil {
		r.faultAt(place{}, "The file must be one YAML document with the members operation, source, target and columns.")
		return nil
	}
	return file.Docs[0].Body
}

func placeOf(t *token.Token) place { return place{t.Position.Line, t.Position.Column} }

// at returns where a node begins.
func at(n ast.Node) place {
	switch n := n.(type) {
	case *ast.MappingNode:
		if len(n.Values) > 0 && !n.IsFlowStyle {
			return placeOf(n.Values[0].Key.GetToken())
		}
	case *ast.MappingValueNode:
		return placeOf(n.Key.GetToken())
	}
	return placeOf(n.GetToken())
}

func (r *reader) faultAt(p place, format string, arguments ...any) {
	r.faults = append(r.faults, &Fault{File: r.file, Line: p.line, Column: p.column, Detail: fmt.Sprintf(format, arguments...)})
}

func (r *reader) fault(n ast.Node, format string, arguments ...any) {
	r.faultAt(at(n), format, arguments...)
}

// An entry is one member of a mapping.
type entry struct {
	name  string
	at    place
	value ast.Node
}

// entries returns the members of a mapping. what names it in the fault of a node that is none.
func (r *reader) entries(n ast.Node, what string) []entry {
	var pairs []*ast.MappingValueNode
	switch n := n.(type) {
	case *ast.MappingNode:
		pairs = n.Values
	case *ast.MappingValueNode:
		pairs = []*ast.MappingValueNode{n}
	case *ast.NullNode:
		r.fault(n, "%s is empty; it must have members, each with a colon behind its name.", what)
		return nil
	default:
		r.fault(n, "%s must have members, each with a colon behind its name; this is %s.", what, described(n))
		return nil
	}
	entries := make([]entry, 0, len(pairs))
	for _, pair := range pairs {
		key := pair.Key.GetToken()
		if pair.Key.IsMergeKey() {
			r.faultAt(placeOf(key), "Merge keys (<<) are not read here; write the members out.")
			continue
		}
		name := keyText(pair.Key)
		if slices.ContainsFunc(entries, func(e entry) bool { return e.name == name }) {
			r.faultAt(placeOf(key), "%q stands twice in %s.", name, what)
			continue
		}
		entries = append(entries, entry{name, placeOf(key), pair.Value})
	}
	return entries
}

func keyText(key ast.MapKeyNode) string {
	if text, ok := ast.Node(key).(*ast.StringNode); ok {
		return text.Value
	}
	return key.GetToken().Value
}

// members reads a mapping whose members are known ones. Each function gets the member's value.
func (r *reader) members(n ast.Node, what string, known map[string]func(e entry)) {
	for _, e := range r.entries(n, what) {
		if read := known[e.name]; read != nil {
			read(e)
			continue
		}
		names := make([]string, 0, len(known))
		for name := range known {
			if name != "password" { // known to be refused
				names = append(names, name)
			}
		}
		slices.Sort(names)
		r.faultAt(e.at, "%s has no member %q%s.", what, e.name, advice(e.name, names))
	}
}

// shortCode is the length of codes that resemble each other too often for a guess.
const shortCode = 2

// advice says which known name is meant, or which there are.
func advice(name string, known []string) string {
	if near, found := wire.Nearest(name, known); found && (len(name) > shortCode || strings.EqualFold(near, name)) {
		return fmt.Sprintf("; did you mean %q", near)
	}
	switch {
	case len(known) == 0:
		return ""
	case len(known) > 30:
		return "; there are " + strconv.Itoa(len(known)) + ", among them " + strings.Join(known[:10], ", ")
	}
	return "; there are " + strings.Join(known, ", ")
}

// text reads a text that is not empty.
func (r *reader) text(e entry) string {
	switch n := e.value.(type) {
	case *ast.StringNode:
		if n.Value != "" {
			return n.Value
		}
	case *ast.LiteralNode:
		if n.Value.Value != "" {
			return n.Value.Value
		}
	case *ast.IntegerNode, *ast.FloatNode:
		return n.GetToken().Value
	}
	r.fault(e.value, "%s must be a text; this is %s.", e.name, described(e.value))
	return ""
}

// choice reads one of a few names.
func (r *reader) choice(e entry, names ...string) string {
	switch n := e.value.(type) {
	case *ast.StringNode:
		if slices.Contains(names, n.Value) {
			return n.Value
		}
		near, found := wire.Nearest(n.Value, names)
		if found {
			r.fault(n, "%s cannot be %q; did you mean %q? It is one of %s.", e.name, n.Value, near, strings.Join(names, ", "))
		} else {
			r.fault(n, "%s cannot be %q; it is one of %s.", e.name, n.Value, strings.Join(names, ", "))
		}
	default:
		r.fault(n, "%s must be one of %s; this is %s.", e.name, strings.Join(names, ", "), described(n))
	}
	return ""
}

// truth reads true or false.
func (r *reader) truth(e entry) bool {
	if n, ok := e.value.(*ast.BoolNode); ok {
		return n.Value
	}
	r.fault(e.value, "%s must be true or false; this is %s.", e.name, described(e.value))
	return false
}

// texts reads a list of texts, or one text as a list of one.
func (r *reader) texts(e entry) []string {
	list, ok := e.value.(*ast.SequenceNode)
	if !ok {
		if text := r.text(e); text != "" {
			return []string{text}
		}
		return nil
	}
	var out []string
	for _, item := range list.Values {
		if text := r.text(entry{e.name, e.at, item}); text != "" {
			out = append(out, text)
		}
	}
	return out
}

// scalar reads a number, a text, true or false, or null. The text of a number is kept beside it.
func (r *reader) scalar(n ast.Node, what string) (row.Value, bool) {
	switch n := n.(type) {
	case *ast.NullNode:
		return row.Value{}, true
	case *ast.BoolNode:
		return row.OfBool(n.Value), true
	case *ast.LiteralNode:
		return row.OfString(n.Value.Value), true
	case *ast.NanNode:
		return row.OfString("NaN"), true
	case *ast.StringNode:
		if v, isNumber := plainNumber(n); isNumber {
			return row.OfFloat(v), true
		}
		return row.OfString(n.Value), true
	case *ast.IntegerNode:
		switch v := n.Value.(type) {
		case int64:
			return row.OfInt(v), true
		case uint64:
			if v <= 1<<63-1 {
				return row.OfInt(int64(v)), true
			}
		}
	case *ast.FloatNode:
		return row.OfFloat(n.Value), true
	}
	r.fault(n, "%s must be a number, a text, true, false or null; this is %s.", what, described(n))
	return row.Value{}, false
}

// plainNumber reads a number that the parser takes for text: one with an exponent but no point.
func plainNumber(n *ast.StringNode) (float64, bool) {
	if n.Token.Type == token.SingleQuoteType || n.Token.Type == token.DoubleQuoteType || !strings.ContainsAny(n.Value, "eE") {
		return 0, false
	}
	return parseNumber([]byte(n.Value), '.')
}

// described says what a node is, in words that a person who is no programmer knows.
func described(n ast.Node) string {
	switch n := n.(type) {
	case *ast.NullNode:
		return "empty"
	case *ast.MappingNode, *ast.MappingValueNode:
		return "a block of members"
	case *ast.SequenceNode:
		return "a list"
	case *ast.BoolNode:
		return strconv.FormatBool(n.Value)
	case *ast.IntegerNode, *ast.FloatNode:
		return "the number " + n.GetToken().Value
	case *ast.StringNode:
		if n.Value == "" {
			return "an empty text"
		}
		return "the text " + strconv.Quote(short(n.Value))
	case *ast.AnchorNode, *ast.AliasNode:
		return "an anchor or alias, which is not read here"
	case *ast.TagNode:
		return "a tag, which is not read here"
	}
	return "something else"
}

// longestShown is how many bytes of a value a text repeats.
const longestShown = 60

func short(text string) string {
	if len(text) <= longestShown {
		return text
	}
	return strings.ToValidUTF8(text[:longestShown], "") + "…"
}
