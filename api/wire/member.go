package wire

import "github.com/go-json-experiment/json/jsontext"

// A member is a number in answers: its name and what it measures. The table of units lists the same.
type member struct {
	name     string
	quantity Quantity
	key      string // the name as it stands in an answer, with quotes, colon and the comma before it
}

// answerMembers are all members made by answerMember.
var answerMembers []member

func answerMember(name string, q Quantity) member {
	m := member{name: name, quantity: q, key: `,"` + name + `":`}
	answerMembers = append(answerMembers, m)
	return m
}

// appendMember appends the member with a value in SI, null where it is not finite.
func (m *member) append(dst []byte, system System, value float64) []byte {
	return appendNumber(append(dst, m.key...), system.FromSI(m.quantity, value))
}

// appendName appends a member whose value is one of our own names; null where it is empty.
func appendName(dst []byte, key, name string) []byte {
	dst = append(dst, key...)
	if name == "" {
		return append(dst, "null"...)
	}
	dst = append(dst, '"')
	dst = append(dst, name...)
	return append(dst, '"')
}

// appendText appends a JSON string.
func appendText(dst []byte, text string) []byte {
	dst, _ = jsontext.AppendQuote(dst, text) // bad UTF-8 becomes U+FFFD
	return dst
}

// appendHead appends the beginning of an answer: brace, id, units and fingerprint.
func appendHead(dst []byte, system System, id ID, fingerprint string) []byte {
	dst = append(dst, '{')
	if id != nil {
		dst = append(dst, `"id":`...)
		dst = append(dst, id...)
		dst = append(dst, ',')
	}
	dst = append(dst, `"units":"`...)
	dst = append(dst, system.String()...)
	dst = append(dst, '"')
	if fingerprint != "" {
		dst = appendName(dst, `,"fingerprint":`, fingerprint)
	}
	return dst
}
