package wire

import (
	"bytes"
	"strconv"
	"strings"
	"unicode/utf8"
)

// A scanFault is what a scanner refused.
type scanFault struct {
	offset  int // in bytes, from 0
	pointer string
	code    string
	detail  string
	size    bool // a limit was exceeded (413), rather than the rules of JSON broken (400)
}

// fail notes a fault at an offset of the data and returns false.
func (s *scanner) fail(offset int, code, detail string) bool {
	s.fault = &scanFault{offset: offset, pointer: s.pointer(), code: code, detail: detail}
	return false
}

// tooMany notes that the array that begins at an offset exceeds a limit.
func (s *scanner) tooMany(offset, limit int, name string) bool {
	s.fail(offset, codeTooManyItems, "a list has more than "+strconv.Itoa(limit)+" items, the limit `"+name+"` of this service (GET /v1/limits)")
	s.fault.size = true
	return false
}

// pointer returns the JSON Pointer of the value being read, as far as it is known.
func (s *scanner) pointer() string {
	var p pointer
	for i := range s.frames[:s.depth] {
		switch f := &s.frames[i]; {
		case f.array:
			p = p.index(f.index)
		case f.name != nil && len(f.name) <= longestShownName:
			p = p.member(string(f.name))
		default:
			return string(p)
		}
	}
	return string(p)
}

// problem returns the problem that a scanner's fault makes, with its place in the text.
func (f *scanFault) problem(data []byte) *Problem {
	before := data[:f.offset]
	line := 1 + bytes.Count(before, []byte("\n"))
	column := 1 + utf8.RuneCount(before[bytes.LastIndexByte(before, '\n')+1:])
	var b strings.Builder
	if line > 1 || bytes.IndexByte(bytes.TrimRight(data, " \t\r\n"), '\n') >= 0 {
		b.WriteString("Line ")
		b.WriteString(strconv.Itoa(line))
		b.WriteString(", column ")
	} else { // A body of one line is often itself a line of a bulk request, which has another number there.
		b.WriteString("Column ")
	}
	b.WriteString(strconv.Itoa(column))
	b.WriteString(" (byte ")
	b.WriteString(strconv.Itoa(f.offset))
	b.WriteString("): ")
	b.WriteString(strings.ToUpper(f.detail[:1]))
	b.WriteString(f.detail[1:])
	b.WriteString(".")
	fault := Fault{Pointer: f.pointer, Code: f.code, Detail: b.String()}
	if f.size {
		return TooLarge(fault)
	}
	return MalformedJSON(fault)
}

// trailing notes that something stands after the value.
func (s *scanner) trailing() bool {
	switch s.data[s.at] {
	case '{', '[':
		return s.fail(s.at, codeTrailingData, "another JSON value follows the first; exactly one is accepted, and in bulk one a line (curl drops the ends of lines unless told --data-binary)")
	case ':':
		return s.fail(s.at, codeTrailingData, "there is something after the end of the JSON value; exactly one is accepted, and in bulk each whole on one line")
	}
	return s.fail(s.at, codeTrailingData, "there is something after the end of the JSON value; exactly one is accepted")
}

// unexpected notes that what stands at the present place is not what was expected there.
func (s *scanner) unexpected(expected string) bool {
	detail := expected + ", not " + s.shown(s.at)
	switch rest := s.data[s.at:]; {
	case rest[0] == '/' && len(rest) > 1 && (rest[1] == '/' || rest[1] == '*') || rest[0] == '#':
		detail += "; JSON has no comments"
	case s.at > 0 && '0' <= s.data[s.at-1] && s.data[s.at-1] <= '9' && (rest[0] == ',' || rest[0] == '.' || rest[0] == 'x'):
		detail += "; write numbers in decimal digits, with a point"
	}
	return s.fail(s.at, codeSyntaxError, detail)
}

// shown returns the character at an offset as text can hold it.
func (s *scanner) shown(at int) string {
	r, n := utf8.DecodeRune(s.data[at:])
	if r == utf8.RuneError && n <= 1 {
		return "the byte 0x" + strconv.FormatUint(uint64(s.data[at]), 16)
	}
	return "the character " + strconv.QuoteRune(r)
}

// badName notes that an object goes on with something that is no member's name.
func (s *scanner) badName(afterComma bool) bool {
	switch c := s.data[s.at]; {
	case c == '}' && afterComma:
		return s.fail(s.at, codeSyntaxError, "there is a comma before the closing brace; leave it out")
	case c == '\'':
		return s.fail(s.at, codeSyntaxError, "a member's name stands in single quotes; JSON wants double ones")
	}
	return s.unexpected("a member's name in double quotes is expected")
}

// badValue notes that no value begins at the present place, with advice for what people write in place of one.
func (s *scanner) badValue() bool {
	rest := s.data[s.at:]
	word := strings.ToLower(string(rest[:min(len(rest), 12)]))
	unsigned := strings.TrimLeft(word, "+-")
	switch {
	case strings.HasPrefix(unsigned, "nan"), strings.HasPrefix(unsigned, "inf"):
		return s.fail(s.at, codeNotFinite, "JSON has no NaN and no Infinity; leave the member out or give null")
	case strings.HasPrefix(word, "none"), strings.HasPrefix(word, "nil"), strings.HasPrefix(word, "undefined"):
		return s.fail(s.at, codeSyntaxError, "JSON writes an absent value as null; leave the member out or give null")
	case strings.HasPrefix(word, "true"), strings.HasPrefix(word, "false"), strings.HasPrefix(word, "null"):
		return s.fail(s.at, codeSyntaxError, "JSON writes true, false and null in small letters")
	case word[0] == '\'':
		return s.fail(s.at, codeSyntaxError, "a string stands in single quotes; JSON wants double ones")
	case word[0] == '+':
		return s.fail(s.at, codeSyntaxError, "JSON writes numbers without a plus sign")
	case word[0] == '.':
		return s.fail(s.at, codeSyntaxError, "JSON writes a digit before the decimal point")
	case word[0] == '-':
		return s.fail(s.at, codeSyntaxError, "a number needs a digit after its minus sign")
	}
	return s.unexpected("a JSON value is expected")
}
