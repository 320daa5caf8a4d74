package format

import (
	"bytes"
	"io"

	"leat/api/stream"
)

const (
	// readBytes is how much of a body is read at a time.
	readBytes = 64 << 10
	// emptyReads is how often in a row a body may give neither bytes nor an error.
	emptyReads = 100
)

// A LineReader finds the lines of a body that hold more than white space. Lines end with a line feed, with or without a
// carriage return before it; the last may end with the body. Its memory is one buffer, however long the lines.
type LineReader struct {
	body  io.Reader
	limit int
	line  int64 // the number of the line that comes next, or is being read

	buffer   []byte
	from, to int   // of what is read and not consumed
	searched int   // up to here there is no line feed
	feed     int   // where one is, or -1
	err      error // with which the body ended
}

var _ stream.Reader = (*LineReader)(nil)

// NewLineReader reads lines of up to limit bytes, without their ends. A longer one is an *stream.Overlong fault.
func NewLineReader(body io.Reader, limit int) *LineReader {
	return &LineReader{body: body, limit: limit, line: 1, buffer: make([]byte, readBytes), feed: -1}
}

// Next appends the next line that is not blank to dst.
func (l *LineReader) Next(dst []byte) (extended []byte, line int64, err error) {
	for {
		extended, overlong, err := l.next(dst)
		if err != nil {
			return dst, l.line, err
		}
		line := l.line
		l.line++
		if overlong {
			return dst, line, &stream.Fault{Reason: &stream.Overlong{Limit: l.limit}}
		}
		if !isBlank(extended[len(dst):]) {
			return extended, line, nil
		}
	}
}

// Ready passes over blank lines at hand, and reports whether a line that is not blank, or the end, is at hand too.
func (l *LineReader) Ready() bool {
	for l.find() {
		line := trimReturn(l.buffer[l.from:l.feed])
		if len(line) > l.limit || !isBlank(line) {
			return true
		}
		l.take()
		l.line++
	}
	return l.err != nil
}

// Position is the line that comes next, or that was being read when the body failed.
func (l *LineReader) Position() int64 { return l.line }

// next appends the next line, blank or not. The bytes of an overlong one are not kept.
func (l *LineReader) next(dst []byte) (extended []byte, overlong bool, err error) {
	extended = dst
	for some := false; ; {
		piece, ended := l.take()
		some = some || ended || len(piece) > 0
		// One byte beyond the limit is kept, which may be the carriage return before the line feed.
		if overlong = overlong || len(extended)-len(dst)+len(piece) > l.limit+1; !overlong {
			extended = append(extended, piece...)
		}
		if ended {
			break
		}
		if err := l.read(); err == io.EOF && some {
			break
		} else if err != nil {
			return dst, false, err
		}
	}
	extended = extended[:len(dst)+len(trimReturn(extended[len(dst):]))]
	return extended, overlong || len(extended)-len(dst) > l.limit, nil
}

// take consumes what is at hand of the current line, and reports whether its end was among it.
func (l *LineReader) take() (piece []byte, ended bool) {
	if l.find() {
		piece = l.buffer[l.from:l.feed]
		l.from, l.searched, l.feed = l.feed+1, l.feed+1, -1
		return piece, true
	}
	piece = l.buffer[l.from:l.to]
	l.from = l.to
	return piece, false
}

// find reports whether a line feed is at hand.
func (l *LineReader) find() bool {
	if l.feed < 0 && l.searched < l.to {
		if i := bytes.IndexByte(l.buffer[l.searched:l.to], '\n'); i >= 0 {
			l.feed = l.searched + i
		}
		l.searched = l.to
	}
	return l.feed >= 0
}

// read waits for more of the body. All that was at hand is consumed.
func (l *LineReader) read() error {
	for range emptyReads {
		if l.err != nil {
			return l.err
		}
		var n int
		n, l.err = l.body.Read(l.buffer)
		l.from, l.to, l.searched = 0, n, 0
		if n > 0 {
			return nil
		}
	}
	l.err = io.ErrNoProgress
	return l.err
}

func trimReturn(line []byte) []byte { return bytes.TrimSuffix(line, []byte{'\r'}) }

// isBlank reports whether a line holds only what JSON calls white space.
func isBlank(line []byte) bool {
	for _, c := range line {
		if c != ' ' && c != '\t' && c != '\r' {
			return false
		}
	}
	return true
}
