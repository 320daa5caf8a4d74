package serve

import (
	"fmt"
	"net/url"
	"slices"
	"strings"

	"leat/api/operation"
	"leat/api/wire"
)

// A call is what the query of a request says.
type call struct {
	operation.Options
	flat   bool   // rows in bulk are flat
	prefix string // of flat names in bulk
}

// A parameter is one query parameter of the operations and what it may be.
type parameter struct {
	name   string
	values []string          // accepted; nil where judge says
	judge  func(string) bool // of a value that is not of a list
	wanted string            // what judge accepts
	apply  func(*call, string)
}

var parameters = []parameter{
	{name: "detail", values: []string{"full", "brief"}, apply: func(o *call, v string) { o.Brief = v == "brief" }},
	{name: "units", values: []string{"si", "us"}, apply: func(o *call, v string) {
		o.Units = wire.SI
		if v == "us" {
			o.Units = wire.US
		}
	}},
	{name: "fingerprint", values: []string{"true", "false"}, apply: func(o *call, v string) { o.Fingerprint = v == "true" }},
}

// bulkParameters are those of bulk: all of the others, and its own.
var bulkParameters = append(slices.Clone(parameters),
	parameter{name: "flat", values: []string{"true", "false"}, apply: func(o *call, v string) { o.flat = v == "true" }},
	parameter{name: "prefix", judge: isPrefix, wanted: "up to 60 letters, digits and underscores that begin with a letter and end with an underscore, such as leat_", apply: func(o *call, v string) { o.prefix = v }},
)

// isPrefix reports whether a text can stand before flat names.
func isPrefix(text string) bool {
	for i, c := range text {
		letter := 'a' <= c && c <= 'z' || 'A' <= c && c <= 'Z'
		if !letter && (i == 0 || c != '_' && (c < '0' || c > '9')) {
			return false
		}
	}
	return len(text) >= 2 && len(text) <= 60 && strings.HasSuffix(text, "_")
}

func (p *parameter) accepts(value string) bool {
	if p.judge != nil {
		return p.judge(value)
	}
	return slices.Contains(p.values, value)
}

func (p *parameter) accepted() string {
	if p.judge != nil {
		return p.wanted
	}
	return "one of " + strings.Join(p.values, ", ")
}

// strayAdvice says where a parameter belongs that this operation does not have.
func strayAdvice(name string) string {
	if slices.ContainsFunc(bulkParameters, func(p parameter) bool { return p.name == name }) {
		return " The operations under /v1/bulk have it, which take tables and layers."
	}
	return ""
}

// readQuery reads those of an operation's query parameters that there are into options that hold the defaults. Its problem names every fault: an unknown
// name, an unknown value, a name given twice, text that is no query.
func readQuery(raw string, parameters []parameter, options call) (call, *wire.Problem) {
	if raw == "" {
		return options, nil
	}
	var faults []wire.Fault
	fault := func(name, code, format string, values ...any) {
		if len(faults) < wire.MaxFaults {
			faults = append(faults, wire.Fault{Parameter: name, Code: code, Detail: fmt.Sprintf(format, values...)})
		}
	}
	var seen []string
	for pair := range strings.SplitSeq(raw, "&") {
		if pair == "" {
			continue
		}
		name, value, _ := strings.Cut(pair, "=")
		name, nameErr := url.QueryUnescape(name)
		value, valueErr := url.QueryUnescape(value)
		i := slices.IndexFunc(parameters, func(p parameter) bool { return p.name == name })
		switch {
		case nameErr != nil || valueErr != nil:
			fault(clip(name), "invalid_encoding", "%q cannot be read: %% must be followed by two hexadecimal digits.", clip(pair))
		case i < 0:
			fault(clip(name), "unknown_parameter", "%q is no query parameter of this operation; there are %s.%s", clip(name), parameterNames(parameters), strayAdvice(name))
		case slices.Contains(seen, name):
			fault(name, "duplicate_parameter", "%s is given more than once; give it once.", name)
		case !parameters[i].accepts(value):
			fault(name, "unknown_value", "%s cannot be %q; it is %s.", name, clip(value), parameters[i].accepted())
		default:
			parameters[i].apply(&options, value)
		}
		seen = append(seen, name)
	}
	if faults != nil {
		return options, wire.BadParameter(faults...)
	}
	return options, nil
}

func parameterNames(parameters []parameter) string {
	var names []string
	for _, p := range parameters {
		names = append(names, p.name)
	}
	return strings.Join(names, ", ")
}
