package format

import (
	"bytes"
	"strings"

	"github.com/go-json-experiment/json/jsontext"

	"leat/api/wire"
)

// This file takes well-formed JSON objects apart, without reading their values.

// eachMember calls f for each member of a well-formed JSON object: its name with quotes, its value, and where that begins and ends.
func eachMember(object []byte, f func(name, value []byte, from, to int)) {
	i := skipSpace(object, 0)
	i = skipSpace(object, i+1)
	for object[i] != '}' {
		start := i
		i = skipString(object, i)
		name := object[start:i]
		i = skipSpace(object, skipSpace(object, i)+1)
		start = i
		i = skipValue(object, i)
		f(name, object[start:i], start, i)
		if i = skipSpace(object, i); object[i] == ',' {
			i = skipSpace(object, i+1)
		}
	}
}

func skipSpace(data []byte, i int) int {
	for i < len(data) && (data[i] == ' ' || data[i] == '\t' || data[i] == '\n' || data[i] == '\r') {
		i++
	}
	return i
}

// skipString returns the place after a string that begins at i.
func skipString(data []byte, i int) int {
	for i++; i < len(data) && data[i] != '"'; i++ {
		if data[i] == '\\' {
			i++
		}
	}
	return min(i+1, len(data))
}

// skipValue returns the place after a value that begins at i; of a number, true, false or null that ends with the data, the data's end.
func skipValue(data []byte, i int) int {
	depth := 0
	for i < len(data) {
		switch data[i] {
		case '"':
			i = skipString(data, i)
		case '{', '[':
			depth++
			i++
		case '}', ']':
			depth--
			i++
		default:
			if depth == 0 {
				for i < len(data) && data[i] != ',' && data[i] != ']' && data[i] != '}' && data[i] > ' ' {
					i++
				}
				return i
			}
			i++
			continue
		}
		if depth == 0 {
			return i
		}
	}
	return i
}

// plainName returns a member's name without its quotes and escapes.
func plainName(quoted []byte) string {
	if bytes.IndexByte(quoted, '\\') < 0 {
		return string(quoted[1 : len(quoted)-1])
	}
	name, _ := jsontext.AppendUnquote(nil, quoted) // cannot fail: it is well-formed
	return string(name)
}

// readMembers reads a well-formed JSON object as a flat row.
func (r *request) readMembers(b *Bulk, object []byte) {
	r.row.Reset()
	eachMember(object, func(quoted, value []byte, _, _ int) {
		name := plainName(quoted)
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
