package format

import (
	"strings"

	"leat/api/wellformed"
	"leat/api/wire"
)

// readMembers reads a well-formed JSON object as a flat row.
func (r *request) readMembers(b *Bulk, object []byte) {
	r.row.Reset()
	wellformed.Each(object, func(quoted, value []byte, _, _ int) {
		name := wellformed.Name(quoted)
		m := member{name: quoted, value: value, found: b.columns.find(name)}
		rest, read := strings.CutPrefix(name, b.choice.Prefix)
		if read {
			at, known := b.plan.Find(rest)
			switch {
			case known:
				m.asked = true
				r.row.SetJSON(at, value)
			case b.choice.Prefix != "" && b.table != nil && b.isAnswer(rest):
			default:
				r.row.Fault(b.plan.Unknown(name, b.choice.Prefix, b.table))
			}
		}
		if m.asked && rest == "id" {
			r.id = idLiteral(value)
		}
		r.members = append(r.members, m)
	})
}

func (b *Bulk) isAnswer(name string) bool {
	_, found := b.table.Find(name)
	return found
}

// idLiteral returns a JSON value where it can be an id, else nil.
func idLiteral(value []byte) []byte {
	if len(value) == 0 || len(value) > longestID {
		return nil
	}
	switch c := value[0]; {
	case c == '"', c == '-', '0' <= c && c <= '9':
		return value
	}
	return nil
}

// malformed is the problem of a record that is not well-formed JSON, with where and why.
func malformed(record []byte, b *Bulk) *wire.Problem {
	if _, problem := wire.Scan(record, b.options.Units, b.limits()); problem != nil {
		return problem
	}
	return wire.MalformedJSON(wire.Fault{Code: "syntax_error", Detail: "The record cannot be read as JSON."})
}
