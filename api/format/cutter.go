package format

import "io"

const (
	// readBytes is how much of a body is read at a time.
	readBytes = 64 << 10
	// emptyReads is how often in a row a body may give neither bytes nor an error.
	emptyReads = 100
)

// A cutter reads a body through one buffer and cuts it where a rule finds ends. Its memory is that buffer, however long the pieces.
type cutter struct {
	body io.Reader
	rule rule

	buffer   []byte
	from, to int   // of what is read and not consumed
	searched int   // up to here there is no end
	end      int   // where the byte stands that ends the present piece, or -1
	err      error // with which the body ended
}

// A rule finds the end of a piece. It is given each byte of a body once and in order, and remembers what it must.
type rule interface {
	// find returns where the first byte in data stands that ends the present piece, or -1. With an end it has seen nothing beyond it.
	find(data []byte) int
}

func newCutter(body io.Reader, rule rule) cutter {
	return cutter{body: body, rule: rule, buffer: make([]byte, readBytes), end: -1}
}

// next appends the rest of the present piece to dst, as far as it has no more than limit bytes: of a longer one the bytes are not kept, and kept is false.
// end is the byte that ends it. The error is io.EOF where the body ends within the piece, which then is complete as far as the body goes.
func (c *cutter) next(dst []byte, limit int) (extended []byte, end byte, kept bool, err error) {
	extended, kept = dst, true
	for {
		piece, ended := c.take()
		if kept = kept && len(extended)-len(dst)+len(piece) <= limit; kept {
			extended = append(extended, piece...)
		} else {
			extended = dst
		}
		if ended {
			return extended, c.buffer[c.from-1], kept, nil
		}
		if err := c.more(); err != nil {
			return extended, 0, kept, err
		}
	}
}

// take consumes what is at hand of the present piece, and reports whether its end was among it.
func (c *cutter) take() (piece []byte, ended bool) {
	if c.find() {
		piece = c.buffer[c.from:c.end]
		c.from, c.searched, c.end = c.end+1, c.end+1, -1
		return piece, true
	}
	piece = c.buffer[c.from:c.to]
	c.from = c.to
	return piece, false
}

// find reports whether an end is at hand.
func (c *cutter) find() bool {
	if c.end < 0 && c.searched < c.to {
		if i := c.rule.find(c.buffer[c.searched:c.to]); i >= 0 {
			c.end = c.searched + i
			c.searched = c.end + 1
		} else {
			c.searched = c.to
		}
	}
	return c.end >= 0
}

// more waits for more of the body. All that was at hand is consumed.
func (c *cutter) more() error {
	for range emptyReads {
		if c.err != nil {
			return c.err
		}
		var n int
		n, c.err = c.body.Read(c.buffer)
		c.from, c.to, c.searched = 0, n, 0
		if n > 0 {
			return nil
		}
	}
	c.err = io.ErrNoProgress
	return c.err
}
