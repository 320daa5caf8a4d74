package serve

import (
	"fmt"
	"net/url"
	"slices"
	"strings"

	"leat/api/operation"
	"leat/api/wire"
)

// A parameter is one query parameter of the operations and what it may be.
type parameter struct {
	name   string
	values []string
	apply  func(*operation.Options, string)
}

var parameters = []parameter{
	{"detail", []string{"full", "brief"}, func(o *operation.Options, v string) { o.Brief = v == "brief" }},
	{"units", []string{"si", "us"}, func(o *operation.Options, v string) {
		o.Units = wire.SI
		if v == "us" {
			o.Units = wire.US
		}
	}},
	{"fingerprint", []string{"true", "false"}, func(o *operation.Options, v string) { o.Fingerprint = v == "true" }},
}

// readQuery reads an operation's query parameters into options that hold the defaults. Its problem names every fault: an unknown
// name, an unknown value, a name given twice, text that is no query.
func readQuery(raw string, options operation.Options) (operation.Options, *wire.Problem) {
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
			fault(clip(name), "unknown_parameter", "%q is no query parameter of this operation; there are %s.", clip(name), parameterNames())
		case slices.Contains(seen, name):
			fault(name, "duplicate_parameter", "%s is given more than once; give it once.", name)
		case !slices.Contains(parameters[i].values, value):
			fault(name, "unknown_value", "%s cannot be %q; it is one of %s.", name, clip(value), strings.Join(parameters[i].values, ", "))
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

func parameterNames() string {
	var names []string
	for _, p := range parameters {
		names = append(names, p.name)
	}
	return strings.Join(names, ", ")
}
