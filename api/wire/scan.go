package wire

import "bytes"

// MaxNesting is the greatest depth of arrays and objects within each other.
const MaxNesting = 32

// A scanner refuses what the contract does not accept as JSON, before anything is parsed: it reads a body once,
// allocates nothing in the ordinary case, and notes where the top's id and units stand.
// It accepts exactly one value of I-JSON (RFC 7493) within the contract's bounds on numbers, nesting and lists.
type scanner struct {
	data   []byte
	at     int
	limits *Limits

	frames [MaxNesting]frame
	depth  int      // of frames in use
	names  [][]byte // of all objects that it is inside of, one object's after another's
	room   []byte   // for names without their escapes

	id, units span // values of the top's members of these names, if any

	fault *scanFault
}

// A frame is one array or object that the scanner is inside of.
type frame struct {
	array bool
	index int                 // of the item being read, in an array
	name  []byte              // of the member being read, in an object; nil between two
	first int                 // in names, of this object's
	set   map[string]struct{} // this object's names, once they are many
}

// A span is a part of the data.
type span struct{ start, end int }

func (s span) in(data []byte) []byte { return data[s.start:s.end] }

// scan reads data and reports whether it is acceptable. If not, s.fault says why.
func (s *scanner) scan(data []byte, limits *Limits) bool {
	s.data, s.at, s.limits = data, 0, limits
	s.depth, s.fault = 0, nil
	s.id, s.units = span{}, span{}
	s.names, s.room = s.names[:0], s.room[:0]

	if bytes.HasPrefix(data, []byte("\xef\xbb\xbf")) {
		return s.fail(0, codeByteOrderMark, "a byte order mark is not accepted; send UTF-8 without one")
	}
	s.space()
	if s.at == len(data) {
		return s.fail(s.at, codeEmptyBody, "there is no JSON value; a JSON object is expected")
	}
	if !s.value() {
		return false
	}
	s.space()
	if s.at < len(data) {
		return s.trailing()
	}
	return true
}

// keptRoom is how much room for names a scanner at rest keeps.
const keptRoom = 64 << 10

// release forgets the data, so that a scanner at rest keeps no body alive.
func (s *scanner) release() {
	s.data, s.limits, s.fault = nil, nil, nil
	clear(s.frames[:])
	clear(s.names[:cap(s.names)])
	s.names = s.names[:0]
	if cap(s.room) > keptRoom {
		s.room = nil
	}
}

func (s *scanner) space() {
	for s.at < len(s.data) {
		switch s.data[s.at] {
		case ' ', '\t', '\n', '\r':
			s.at++
		default:
			return
		}
	}
}

func (s *scanner) value() bool {
	if s.at == len(s.data) {
		return s.fail(s.at, codeSyntaxError, "the JSON ends where a value is expected")
	}
	switch c := s.data[s.at]; {
	case c == '"':
		_, _, ok := s.text()
		return ok
	case c == '-' || '0' <= c && c <= '9':
		return s.number()
	case c == '{':
		return s.object()
	case c == '[':
		return s.array()
	case c == 't':
		return s.literal("true")
	case c == 'f':
		return s.literal("false")
	case c == 'n':
		return s.literal("null")
	}
	return s.badValue()
}

func (s *scanner) literal(word string) bool {
	if len(s.data)-s.at >= len(word) && string(s.data[s.at:s.at+len(word)]) == word {
		s.at += len(word)
		return true
	}
	return s.badValue()
}

// enter opens a frame for an array or object at the present place.
func (s *scanner) enter(array bool) bool {
	if s.depth == MaxNesting {
		return s.fail(s.at, codeNestingTooDeep, "arrays and objects are nested more than 32 deep")
	}
	s.frames[s.depth] = frame{array: array, first: len(s.names)}
	s.depth++
	s.at++
	s.space()
	return true
}

func (s *scanner) leave() {
	s.depth--
	s.at++
}

func (s *scanner) object() bool {
	if !s.enter(false) {
		return false
	}
	f := &s.frames[s.depth-1]
	if s.at < len(s.data) && s.data[s.at] == '}' {
		s.leave()
		return true
	}
	for afterComma := false; ; afterComma = true {
		if s.at == len(s.data) {
			return s.fail(s.at, codeSyntaxError, "the JSON ends inside an object")
		}
		if s.data[s.at] != '"' {
			return s.badName(afterComma)
		}
		start := s.at
		raw, escaped, ok := s.text()
		if !ok {
			return false
		}
		f.name = raw
		if escaped {
			f.name = s.unescaped(s.data[start:s.at])
		}
		if !s.addName(f, f.name) {
			return s.fail(start, codeDuplicateMember, "this member stands twice in one object; give it once")
		}
		s.space()
		if s.at == len(s.data) {
			return s.fail(s.at, codeSyntaxError, "the JSON ends after a member's name")
		}
		if s.data[s.at] != ':' {
			return s.unexpected("a colon is expected after a member's name")
		}
		s.at++
		s.space()
		start = s.at
		if !s.value() {
			return false
		}
		if s.depth == 1 {
			s.note(f.name, span{start, s.at})
		}
		s.space()
		if s.at == len(s.data) {
			return s.fail(s.at, codeSyntaxError, "the JSON ends inside an object")
		}
		switch s.data[s.at] {
		case ',':
			s.at++
			s.space()
			f.name = nil
		case '}':
			s.leave()
			s.names = s.names[:f.first]
			return true
		default:
			return s.unexpected("a comma or the object's closing brace is expected after a member's value")
		}
	}
}

// note keeps the places of those members of the top that are wanted before the rest is read.
func (s *scanner) note(name []byte, value span) {
	switch string(name) {
	case "id":
		s.id = value
	case "units":
		s.units = value
	}
}

func (s *scanner) array() bool {
	start := s.at
	limit, limitName := s.itemLimit()
	if !s.enter(true) {
		return false
	}
	f := &s.frames[s.depth-1]
	if s.at < len(s.data) && s.data[s.at] == ']' {
		s.leave()
		return true
	}
	for {
		if f.index == limit {
			s.depth--
			return s.tooMany(start, limit, limitName)
		}
		if s.at < len(s.data) && s.data[s.at] == ']' {
			return s.fail(s.at, codeSyntaxError, "there is a comma before the closing bracket; leave it out")
		}
		if !s.value() {
			return false
		}
		s.space()
		if s.at == len(s.data) {
			return s.fail(s.at, codeSyntaxError, "the JSON ends inside an array")
		}
		switch s.data[s.at] {
		case ',':
			s.at++
			s.space()
			f.index++
		case ']':
			s.leave()
			return true
		default:
			return s.unexpected("a comma or the array's closing bracket is expected after an item")
		}
	}
}

// itemLimit returns the limit of the array that begins here, by the member whose value it is.
func (s *scanner) itemLimit() (limit int, name string) {
	name = "array_items"
	if s.depth > 0 {
		if f := &s.frames[s.depth-1]; !f.array {
			name = limitOfList(f.name)
		}
	}
	return s.limits.named(name), name
}
