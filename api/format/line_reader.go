package format

import (
	"bytes"
	"io"

	"leat/api/stream"
)

// A LineReader finds the lines of a body that hold more than white space. Lines end with a line feed, with or without a
// carriage return before it; the last may end with the body. Its memory is one buffer, however long the lines.
type LineReader struct {
	cutter
	limit int
	line  int64 // the number of the line that comes next, or is being read
}

var _ stream.Reader = (*LineReader)(nil)

// A lineRule cuts at line feeds.
type lineRule struct{}

func (lineRule) find(data []byte) int { return bytes.IndexByte(data, '\n') }

// NewLineReader reads lines of up to limit bytes, without their ends. A longer one is an *stream.Overlong fault.
func NewLineReader(body io.Reader, limit int) *LineReader {
	return &LineReader{cutter: newCutter(body, lineRule{}), limit: limit, line: 1}
}

// Next appends the next line that is not blank to dst.
func (l *LineReader) Next(dst []byte) (extended []byte, line int64, err error) {
	for {
		// One byte beyond the limit is kept, which may be the carriage return before the line feed.
		extended, _, kept, err := l.next(dst, l.limit+1)
		if err != nil && (err != io.EOF || kept && len(extended) == len(dst)) {
			return dst, l.line, err
		}
		line := l.line
		l.line++
		extended = extended[:len(dst)+len(trimReturn(extended[len(dst):]))]
		if !kept || len(extended)-len(dst) > l.limit {
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
		line := trimReturn(l.buffer[l.from:l.end])
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
