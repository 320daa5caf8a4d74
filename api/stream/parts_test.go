package stream

import (
	"bufio"
	"bytes"
	"crypto/sha256"
	"encoding/hex"
	"errors"
	"fmt"
	"io"
	"strconv"
	"strings"
	"testing"
	"time"

	"go.uber.org/goleak"
)

func TestMain(m *testing.M) { goleak.VerifyTestMain(m) }

// lines is a Reader of plain lines, for tests: it refuses those that say "refuse".
type lines struct {
	r    *bufio.Reader
	line int64
}

var errRefused = errors.New("refused by the reader")

func newLines(r io.Reader) *lines { return &lines{r: bufio.NewReaderSize(r, 64<<10)} }

func (l *lines) Next(dst []byte) ([]byte, int64, error) {
	s, err := l.r.ReadSlice('\n')
	if err != nil && (err != io.EOF || len(s) == 0) {
		return dst, l.line + 1, err
	}
	l.line++
	s = bytes.TrimSuffix(s, []byte("\n"))
	if string(s) == "refuse" {
		return dst, l.line, &Fault{Reason: errRefused}
	}
	return append(dst, s...), l.line, nil
}

func (l *lines) Ready() bool {
	b, _ := l.r.Peek(l.r.Buffered())
	return bytes.IndexByte(b, '\n') >= 0
}

func (l *lines) Position() int64 { return l.line + 1 }

// echo is a Solver that answers with the line's number and bytes; "bad…" is a problem, "panic" panics.
type echo struct {
	before func(worker int, record Record)
}

func (e echo) Solve(worker int, record Record, dst []byte) ([]byte, bool) {
	if e.before != nil {
		e.before(worker, record)
	}
	dst = strconv.AppendInt(dst, record.Line, 10)
	dst = append(dst, ' ')
	dst = append(dst, record.Bytes...)
	if string(record.Bytes) == "panic" {
		panic("as asked")
	}
	return dst, bytes.HasPrefix(record.Bytes, []byte("bad"))
}

func (e echo) Refuse(_ int, record Record, cause error, dst []byte) []byte {
	return fmt.Appendf(dst, "%d refused: %v", record.Line, cause)
}

// lineFeeds is a Writer of lines, with one at each end.
type lineFeeds struct{}

func (lineFeeds) Begin(dst []byte) []byte          { return append(dst, "begin\n"...) }
func (lineFeeds) Answer(dst, answer []byte) []byte { return append(append(dst, answer...), '\n') }
func (lineFeeds) Flush(dst []byte) []byte          { return dst }
func (lineFeeds) End(dst []byte, s Summary) []byte {
	return fmt.Appendf(dst, "end %t %s %d %d %d %x\n", s.Complete, s.Reason, s.ResumeAt, s.Lines, s.Problems, s.SHA256)
}

func newPump(in io.Reader, out io.Writer) *Pump {
	return &Pump{Reader: newLines(in), Writer: lineFeeds{}, Solver: echo{}, Output: out, Workers: 4}
}

// numbered is a body of n lines, each with some text.
func numbered(n int) string {
	var b strings.Builder
	for i := 1; i <= n; i++ {
		fmt.Fprintf(&b, "text %d\n", i)
	}
	return b.String()
}

// account is what a client can tell of an output that ended.
type account struct {
	lines []string // the answers
	end   string
}

// check takes an output apart, and holds its end line and the summary to the rest of it.
func check(t testing.TB, out []byte, s Summary) account {
	t.Helper()
	text, found := strings.CutSuffix(string(out), "\n")
	if !found {
		t.Fatalf("output does not end with a line feed: %q", tail(out))
	}
	i := strings.LastIndexByte(text, '\n')
	body, end := text[:i+1], text[i+1:]
	sum := sha256.Sum256([]byte(body))
	want := fmt.Sprintf("end %t %s %d %d %d %s", s.Complete, s.Reason, s.ResumeAt, s.Lines, s.Problems, hex.EncodeToString(sum[:]))
	if end != want {
		t.Fatalf("end line\n%s\nwant\n%s", end, want)
	}
	if sum != s.SHA256 || sha256.Sum256(out) != s.Whole {
		t.Fatal("the summary's hashes are not those of the output")
	}
	body, found = strings.CutPrefix(body, "begin\n")
	if !found {
		t.Fatalf("output does not begin: %q", text[:min(len(text), 80)])
	}
	a := account{end: end}
	if body != "" {
		a.lines = strings.Split(strings.TrimSuffix(body, "\n"), "\n")
	}
	if int64(len(a.lines)) != s.Lines {
		t.Fatalf("%d answers, the summary says %d", len(a.lines), s.Lines)
	}
	return a
}

// numberedAnswers fails unless the answers are those to the first lines of numbered, in order.
func numberedAnswers(t testing.TB, lines []string) {
	t.Helper()
	for i, line := range lines {
		if want := fmt.Sprintf("%d text %d", i+1, i+1); line != want {
			t.Fatalf("answer %d is %q, want %q", i+1, line, want)
		}
	}
}

func tail(b []byte) []byte { return b[max(0, len(b)-200):] }

// within fails if f takes too long.
func within(t testing.TB, limit time.Duration, f func()) {
	t.Helper()
	done := make(chan struct{})
	go func() { defer close(done); f() }()
	select {
	case <-done:
	case <-time.After(limit):
		t.Fatalf("not done within %v", limit)
	}
}
