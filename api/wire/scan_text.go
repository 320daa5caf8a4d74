package wire

import "unicode/utf8"

// plainCharacter tells the bytes of strings that need no look: ASCII but for control characters, quote and backslash.
var plainCharacter = func() (plain [256]bool) {
	for c := ' '; c < utf8.RuneSelf; c++ {
		plain[c] = c != '"' && c != '\\'
	}
	return plain
}()

// text reads a string and returns what stands between its quotes, and whether that holds escapes.
func (s *scanner) text() (raw []byte, escaped, ok bool) {
	start := s.at + 1
	i := start
	for {
		for i < len(s.data) && plainCharacter[s.data[i]] {
			i++
		}
		if i == len(s.data) {
			return nil, false, s.fail(i, codeSyntaxError, "the JSON ends inside a string")
		}
		switch c := s.data[i]; {
		case c == '"':
			s.at = i + 1
			return s.data[start:i], escaped, true
		case c == '\\':
			escaped = true
			n := s.escape(i)
			if n == 0 {
				return nil, false, false
			}
			i += n
		case c < ' ':
			return nil, false, s.fail(i, codeSyntaxError, "a control character stands in a string; escape it")
		default:
			r, n := utf8.DecodeRune(s.data[i:])
			if r == utf8.RuneError && n <= 1 {
				return nil, false, s.fail(i, codeInvalidUTF8, "a string is not valid UTF-8; send UTF-8")
			}
			i += n
		}
	}
}

// escape checks the escape that begins at i and returns its length, for a surrogate pair that of both; 0 after a fault.
func (s *scanner) escape(i int) int {
	if i+1 == len(s.data) {
		s.fail(i, codeSyntaxError, "the JSON ends inside a string")
		return 0
	}
	switch s.data[i+1] {
	case '"', '\\', '/', 'b', 'f', 'n', 'r', 't':
		return 2
	case 'u':
	default:
		s.fail(i, codeSyntaxError, `a string holds an escape that JSON does not know; \" \\ \/ \b \f \n \r \t and \u with four hexadecimal digits are accepted`)
		return 0
	}
	r, ok := hex4(s.data[i+2:])
	if !ok {
		s.fail(i, codeSyntaxError, `an escape \u needs four hexadecimal digits`)
		return 0
	}
	switch {
	case 0xDC00 <= r && r <= 0xDFFF:
	case 0xD800 <= r && r <= 0xDBFF:
		if rest := s.data[i+6:]; len(rest) >= 6 && rest[0] == '\\' && rest[1] == 'u' {
			if low, ok := hex4(rest[2:]); ok && 0xDC00 <= low && low <= 0xDFFF {
				return 12
			}
		}
	default:
		return 6
	}
	s.fail(i, codeLoneSurrogate, "a string holds half of a surrogate pair; give both halves or the character itself")
	return 0
}

func hex4(b []byte) (r rune, ok bool) {
	if len(b) < 4 {
		return 0, false
	}
	for _, c := range b[:4] {
		r <<= 4
		switch {
		case '0' <= c && c <= '9':
			r |= rune(c - '0')
		case 'a' <= c && c <= 'f':
			r |= rune(c - 'a' + 10)
		case 'A' <= c && c <= 'F':
			r |= rune(c - 'A' + 10)
		default:
			return 0, false
		}
	}
	return r, true
}
