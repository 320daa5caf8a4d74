package wire

import "github.com/go-json-experiment/json/jsontext"

// Number is a number that a request may leave out. After Decode it is in SI units.
type Number struct {
	Value float64
	Given bool
}

// Or returns the value, or another where none was given.
func (n Number) Or(other float64) float64 {
	if n.Given {
		return n.Value
	}
	return other
}

// Whole is a whole number that a request may leave out.
type Whole struct {
	Value int
	Given bool
}

// Or returns the value, or another where none was given.
func (w Whole) Or(other int) int {
	if w.Given {
		return w.Value
	}
	return other
}

// ID is a caller's id as the JSON literal that stood in the request, quotes included; nil where none was given.
// It is a part of the body that was decoded and lives no longer than that.
type ID []byte

// appendPlain appends an id as text: a string without its quotes and escapes, a number as its literal.
func appendPlain(dst []byte, id ID) []byte {
	if len(id) > 0 && id[0] == '"' {
		dst, _ = jsontext.AppendUnquote(dst, id) // cannot fail: the scanner has read it
		return dst
	}
	return append(dst, id...)
}

// Text returns an id as people read it: a string without its quotes and escapes, a number as its literal.
func (id ID) Text() string { return string(appendPlain(nil, id)) }

// MaxIDCharacters is the length of the longest id that is a string.
const MaxIDCharacters = 256
