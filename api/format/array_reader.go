package format

import (
	"bytes"
	"fmt"
	"io"

	"leat/api/stream"
	"leat/api/wellformed"
	"leat/api/wire"
)

// An itemRule cuts the inside of a JSON array at the commas between its items and at its closing bracket.
type itemRule struct {
	depth    int // of arrays and objects within the array
	inString bool
	escaped  bool
	outside  bool // the array has not begun or has ended: nothing is cut
}

func (r *itemRule) find(data []byte) int {
	if r.outside {
		return -1
	}
	for i, c := range data {
		if r.inString {
			switch {
			case r.escaped:
				r.escaped = false
			case c == '\\':
				r.escaped = true
			case c == '"':
				r.inString = false
			}
			continue
		}
		switch c {
		case '"':
			r.inString = true
		case '{', '[':
			r.depth++
		case '}':
			r.depth = max(0, r.depth-1)
		case ']':
			if r.depth == 0 {
				r.outside = true
				return i
			}
			r.depth--
		case ',':
			if r.depth == 0 {
				return i
			}
		}
	}
	return -1
}

// An itemReader finds the items of one JSON array in a body, without reading what they are.
type itemReader struct {
	cutter
	rule   itemRule
	limit  int
	record int64 // the number of the item that comes next
	after  bool  // a comma stands before it
	ended  bool  // the array's closing bracket was read
}

// begin starts inside the array, whose first bracket has been consumed.
func (a *itemReader) begin() {
	a.rule.outside = false
	a.searched, a.end = a.from, -1
}

// item appends the next item; done is true where the array ended instead.
func (a *itemReader) item(dst []byte) (extended []byte, line int64, done bool, err error) {
	if a.ended {
		return dst, a.record, true, nil
	}
	extended, end, kept, err := a.next(dst, a.limit)
	line = a.record
	switch {
	case err == io.EOF:
		return dst, line, false, a.refuse("the body ends inside record %d, or before the closing bracket of the list; send it whole, with every quotation mark and bracket closed", line)
	case err != nil:
		return dst, line, false, err
	}
	a.ended = end == ']'
	if a.ended && kept && isBlankJSON(extended[len(dst):]) {
		if a.after {
			return dst, line, false, a.refuse("there is a comma before the closing bracket, after record %d; leave it out", line-1)
		}
		return dst, line, true, nil
	}
	a.record++
	a.after = true
	if !kept {
		return dst, line, false, &stream.Fault{Reason: &stream.Overlong{Limit: a.limit}}
	}
	item := bytes.TrimSpace(extended[len(dst):])
	return extended[:len(dst)+copy(extended[len(dst):], item)], line, false, nil
}

// refuse makes the error of a body in which no further record can be found.
func (a *itemReader) refuse(format string, values ...any) error {
	return refuseJSON("syntax_error", fmt.Sprintf(format, values...))
}

// refuseJSON makes the error of a body that is not acceptable JSON; detail begins with a small letter and ends without a point.
func refuseJSON(code, detail string) error {
	return &Refusal{wire.MalformedJSON(wire.Fault{Code: code, Detail: sentence(detail)})}
}

// sentence makes a sentence of a clause.
func sentence(clause string) string {
	if c := clause[0]; 'a' <= c && c <= 'z' {
		clause = string(c-'a'+'A') + clause[1:]
	}
	return clause + "."
}

// Ready reports whether an item, or the end, is at hand.
func (a *itemReader) Ready() bool { return a.ended || a.find() || a.err != nil }

// Position is the item that comes next.
func (a *itemReader) Position() int64 { return a.record }

func isBlankJSON(data []byte) bool { return wellformed.SkipSpace(data, 0) == len(data) }

// An arrayReader finds the items of a body that is one JSON array.
type arrayReader struct {
	itemReader
	begun bool
}

func newArrayReader(body io.Reader, limit int) *arrayReader {
	a := &arrayReader{itemReader: itemReader{limit: limit, record: 1}}
	a.rule.outside = true
	a.cutter = newCutter(body, &a.rule)
	return a
}

// Next appends the next item to dst.
func (a *arrayReader) Next(dst []byte) (extended []byte, line int64, err error) {
	if !a.begun {
		if err := a.open(); err != nil {
			return dst, 1, err
		}
		a.begun = true
	}
	extended, line, done, err := a.item(dst)
	if done {
		return dst, line, a.close()
	}
	return extended, line, err
}

// open reads the bracket that begins the array.
func (a *arrayReader) open() error {
	c, err := a.solid()
	switch {
	case err == io.EOF:
		return refuseJSON("empty_body", "there is no JSON value; a list of requests is expected: [{…}, {…}]")
	case err != nil:
		return err
	case c == '{':
		return refuseJSON("syntax_error", "a list of requests is expected, not an object: put requests into brackets, [{…}, {…}], or send one alone to the same operation without /bulk")
	case c == 0xEF:
		return refuseJSON("byte_order_mark", "a byte order mark is not accepted in JSON; send UTF-8 without one")
	case c != '[':
		return refuseJSON("syntax_error", "a list of requests is expected: [{…}, {…}]")
	}
	a.begin()
	return nil
}

// close reads what follows the array, which must be nothing.
func (a *arrayReader) close() error {
	switch _, err := a.solid(); err {
	case io.EOF:
		return io.EOF
	case nil:
		return refuseJSON("trailing_data", "there is something after the closing bracket of the list; one list is accepted")
	default:
		return err
	}
}

// solid consumes white space and the byte after it, which it returns.
func (c *cutter) solid() (byte, error) {
	for {
		for c.from < c.to {
			b := c.buffer[c.from]
			c.from++
			c.searched = max(c.searched, c.from)
			if b != ' ' && b != '\t' && b != '\n' && b != '\r' {
				return b, nil
			}
		}
		if err := c.more(); err != nil {
			return 0, err
		}
	}
}
