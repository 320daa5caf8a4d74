package wire

import (
	"bytes"
	"slices"
	"strconv"

	"github.com/go-json-experiment/json/jsontext"
)

// A canonical writes checked JSON in canonical form (RFC 8785), but without the members whose value is null. It goes through its
// input once: members are written in the order in which they come, and those of an object that are out of order are put into it when
// the object ends. It never reads beyond its input; of what the scanner would refuse it makes something of no use.
type canonical struct {
	in      []byte
	at      int
	out     []byte
	members []canonicalMember // of all objects that it is inside of, one object's after another's
	names   []byte            // of members, without their escapes
	spare   []byte            // room for an object's members in order
}

// A canonicalMember is a member that was written. It holds no pointers, so that putting members into order is cheap.
type canonicalMember struct {
	name       span // in names
	start, end int  // in out: the name, its value and the comma behind
}

// peek passes over white space and returns the next byte without taking it, 0 at the end.
func (c *canonical) peek() byte {
	for c.at < len(c.in) {
		switch b := c.in[c.at]; b {
		case ' ', '\t', '\n', '\r':
			c.at++
		default:
			return b
		}
	}
	return 0
}

// take passes over a byte that was seen.
func (c *canonical) take() {
	if c.at < len(c.in) {
		c.at++
	}
}

// value writes the next value.
func (c *canonical) value() {
	switch c.peek() {
	case '"':
		c.out = appendCanonicalText(c.out, c.text())
	case '{':
		first, start := c.begin()
		c.object(nil)
		c.end(first, start)
	case '[':
		c.array()
	default:
		if literal := c.literal(); len(literal) > 0 && (literal[0] == '-' || literal[0] <= '9') {
			c.out = appendCanonicalNumber(c.out, literal)
		} else {
			c.out = append(c.out, literal...)
		}
	}
}

// text takes a string, quotes included.
func (c *canonical) text() []byte {
	start := c.at
	c.at++
	for c.at < len(c.in) {
		switch c.in[c.at] {
		case '"':
			c.at++
			return c.in[start:c.at]
		case '\\':
			c.at++
		}
		c.at++
	}
	c.at = len(c.in)
	return c.in[start:]
}

// literal takes a number, true, false or null.
func (c *canonical) literal() []byte {
	start := c.at
	for c.at < len(c.in) {
		switch c.in[c.at] {
		case ',', ']', '}', ' ', '\t', '\n', '\r':
			return c.in[start:c.at]
		}
		c.at++
	}
	return c.in[start:]
}

func (c *canonical) array() {
	c.take()
	c.out = append(c.out, '[')
	if c.peek() == ']' {
		c.take()
		c.out = append(c.out, ']')
		return
	}
	for c.at < len(c.in) {
		before := c.at
		c.value()
		if c.peek() != ',' || c.at == before {
			break
		}
		c.take()
		c.out = append(c.out, ',')
	}
	c.take()
	c.out = append(c.out, ']')
}

// begin opens an object in the output. What it returns is for end.
func (c *canonical) begin() (first, start int) {
	c.out = append(c.out, '{')
	return len(c.members), len(c.out)
}

// object writes the members of the object that comes next, but for some.
func (c *canonical) object(without []string) {
	c.take() // the brace
	for c.peek() == '"' {
		raw := c.text()
		c.peek()
		c.take() // the colon
		name := c.name(raw)
		switch {
		case c.peek() == 'n': // null
			c.literal()
		case slices.Contains(without, string(name.in(c.names))):
			c.pass()
		default:
			start := len(c.out)
			c.out = append(appendCanonicalText(c.out, raw), ':')
			c.value()
			c.add(name, start)
		}
		if c.peek() != ',' {
			break
		}
		c.take()
	}
	c.take() // the brace
}

// add notes a member that begins at start of the output.
func (c *canonical) add(name span, start int) {
	c.out = append(c.out, ',')
	c.members = append(c.members, canonicalMember{name, start, len(c.out)})
}

// pass goes over a value without writing it.
func (c *canonical) pass() {
	kept := len(c.out)
	c.value()
	c.out = c.out[:kept]
}

// name keeps the name that a string, quotes included, stands for.
func (c *canonical) name(raw []byte) span {
	start := len(c.names)
	if bytes.IndexByte(raw, '\\') < 0 {
		c.names = append(c.names, raw[1:max(1, len(raw)-1)]...)
	} else {
		c.names, _ = jsontext.AppendUnquote(c.names, raw) // cannot fail: the scanner has read it
	}
	return span{start, len(c.names)}
}

// end puts the members written since begin into order and closes the object.
func (c *canonical) end(first, start int) {
	members := c.members[first:]
	order := func(a, b canonicalMember) int { return compareNames(a.name.in(c.names), b.name.in(c.names)) }
	if !slices.IsSortedFunc(members, order) {
		slices.SortFunc(members, order)
		c.spare = c.spare[:0]
		for _, m := range members {
			c.spare = append(c.spare, c.out[m.start:m.end]...)
		}
		copy(c.out[start:], c.spare)
	}
	if len(members) > 0 {
		c.out[len(c.out)-1] = '}' // in place of the last comma
	} else {
		c.out = append(c.out, '}')
	}
	c.members = c.members[:first]
}

// compareNames orders names by their UTF-16 code units. UTF-8 has the same order but for U+E000 to U+FFFF, which come after the
// surrogates that characters beyond U+FFFF consist of.
func compareNames(a, b []byte) int {
	for i := range min(len(a), len(b)) {
		if a[i] == b[i] {
			continue
		}
		const (
			lastOfThree = 0xEE // leads U+E000 to U+FFFF, with 0xEF
			firstOfFour = 0xF0 // leads what is beyond
		)
		if a[i] >= lastOfThree && b[i] >= lastOfThree && (a[i] >= firstOfFour) != (b[i] >= firstOfFour) {
			return int(b[i]) - int(a[i])
		}
		return int(a[i]) - int(b[i])
	}
	return len(a) - len(b)
}

// appendCanonicalText appends a checked string, quotes included, with those escapes only that RFC 8785 asks for.
func appendCanonicalText(dst, raw []byte) []byte {
	if bytes.IndexByte(raw, '\\') < 0 { // the scanner lets no control character through
		return append(dst, raw...)
	}
	plain, _ := jsontext.AppendUnquote(nil, raw)
	dst, _ = jsontext.AppendQuote(dst, plain)
	return dst
}

// exactDigits is how many significant digits of a decimal number float64 always keeps.
const exactDigits = 15

// appendCanonicalNumber appends the number that a literal is as a float64 in the form of ECMAScript. A literal of at most 15 digits
// without an exponent or a superfluous zero has that form already, since no shorter one is read as the same float64.
func appendCanonicalNumber(dst, literal []byte) []byte {
	if isCanonicalNumber(literal) {
		return append(dst, literal...)
	}
	v, err := strconv.ParseFloat(string(literal), 64)
	if err != nil { // cannot be: the scanner has bounded it
		return append(dst, literal...)
	}
	return appendNumber(dst, v)
}

// isCanonicalNumber reports whether a literal is seen at once to be in canonical form. It may be so when the answer is no.
func isCanonicalNumber(literal []byte) bool {
	digits := literal
	if len(digits) > 0 && digits[0] == '-' {
		digits = digits[1:]
	}
	if len(digits) == 0 || len(digits) > exactDigits {
		return false
	}
	point := -1
	for i, b := range digits {
		switch {
		case b == '.':
			point = i
		case b < '0' || b > '9': // an exponent
			return false
		}
	}
	if point < 0 {
		return digits[0] != '0' || len(literal) == 1 // -0 is 0
	}
	// Below 1e-6 the form has an exponent.
	return digits[len(digits)-1] != '0' && !bytes.HasPrefix(digits, []byte("0.00000"))
}
