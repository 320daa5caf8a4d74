package stream

import (
	"bytes"
	"context"
	"errors"
	"io"
	"math/rand/v2"
	"strings"
	"sync/atomic"
	"testing"
	"testing/iotest"
	"time"
)

func TestAnswersKeepTheOrderUnderRandomDurations(t *testing.T) {
	var out bytes.Buffer
	p := newPump(strings.NewReader(numbered(3000)), &out)
	p.Solver = echo{before: func(int, Record) {
		if rand.IntN(10) == 0 {
			time.Sleep(time.Duration(rand.IntN(300)) * time.Microsecond)
		}
	}}
	s, err := p.Run(t.Context())
	if err != nil {
		t.Fatal(err)
	}
	a := check(t, out.Bytes(), s)
	if !s.Complete || s.Lines != 3000 || s.Problems != 0 {
		t.Fatalf("summary %+v", s)
	}
	numberedAnswers(t, a.lines)
}

func TestNoRecordsAtAll(t *testing.T) {
	var out bytes.Buffer
	s, err := newPump(strings.NewReader(""), &out).Run(t.Context())
	if err != nil {
		t.Fatal(err)
	}
	if a := check(t, out.Bytes(), s); !s.Complete || len(a.lines) != 0 {
		t.Fatalf("summary %+v", s)
	}
}

func TestOneByteAtATime(t *testing.T) {
	var out bytes.Buffer
	s, err := newPump(iotest.OneByteReader(strings.NewReader(numbered(500))), &out).Run(t.Context())
	if err != nil {
		t.Fatal(err)
	}
	numberedAnswers(t, check(t, out.Bytes(), s).lines)
	if s.Lines != 500 {
		t.Fatalf("%d lines", s.Lines)
	}
}

func TestProblemsRefusalsAndPanicsCostOneRecord(t *testing.T) {
	var out bytes.Buffer
	p := newPump(strings.NewReader("one\nbad two\npanic\nrefuse\nfive\n"), &out)
	var panics, answered, problems atomic.Int64
	p.Panicking = func(line int64, panicked *Panicked) {
		if line != 3 || panicked.Value != "as asked" || len(panicked.Stack) == 0 {
			t.Errorf("panic at line %d: %v", line, panicked.Value)
		}
		panics.Add(1)
	}
	p.Answered = func(n, bad int) { answered.Add(int64(n)); problems.Add(int64(bad)) }
	s, err := p.Run(t.Context())
	if err != nil {
		t.Fatal(err)
	}
	a := check(t, out.Bytes(), s)
	want := "1 one|2 bad two|3 refused: panic while solving a record|4 refused: refused by the reader|5 five"
	if got := strings.Join(a.lines, "|"); got != want {
		t.Errorf("got  %s\nwant %s", got, want)
	}
	if !s.Complete || s.Lines != 5 || s.Problems != 3 || panics.Load() != 1 || answered.Load() != 5 || problems.Load() != 3 {
		t.Errorf("summary %+v, %d panics, %d answered, %d problems", s, panics.Load(), answered.Load(), problems.Load())
	}
}

func TestAThousandPanics(t *testing.T) {
	var out bytes.Buffer
	body := strings.Repeat("panic\nfine\n", 1000)
	s, err := newPump(strings.NewReader(body), &out).Run(t.Context())
	if err != nil || s.Lines != 2000 || s.Problems != 1000 {
		t.Fatalf("summary %+v, error %v", s, err)
	}
	check(t, out.Bytes(), s)
}

func TestAFatalReadBreaksOff(t *testing.T) {
	broken := errors.New("the wire is cut")
	var out bytes.Buffer
	p := newPump(io.MultiReader(strings.NewReader("one\ntwo\nthr"), iotest.ErrReader(broken)), &out)
	s, err := p.Run(t.Context())
	var read *ReadError
	if !errors.As(err, &read) || !errors.Is(err, broken) || read.Line != 3 {
		t.Fatalf("error %v", err)
	}
	if read.Sent != int64(out.Len()) {
		t.Errorf("%d bytes sent, the error says %d", out.Len(), read.Sent)
	}
	if s.Complete || bytes.Contains(out.Bytes(), []byte("end")) {
		t.Fatalf("an end after a break: %q", out.Bytes())
	}
}

func TestAFailedWriteBreaksOff(t *testing.T) {
	gone := errors.New("the client has gone")
	p := newPump(strings.NewReader(numbered(100_000)), failingWriter{gone})
	_, err := p.Run(t.Context())
	var write *WriteError
	if !errors.As(err, &write) || !errors.Is(err, gone) {
		t.Fatalf("error %v", err)
	}
}

func TestAFailedFlushBreaksOff(t *testing.T) {
	gone := errors.New("the client has gone")
	p := newPump(strings.NewReader(numbered(10)), io.Discard)
	p.Flush = func() error { return gone }
	_, err := p.Run(t.Context())
	if !errors.Is(err, gone) {
		t.Fatalf("error %v", err)
	}
}

type failingWriter struct{ err error }

func (w failingWriter) Write([]byte) (int, error) { return 0, w.err }

type panickingReader struct{ *lines }

func (r panickingReader) Next(dst []byte) ([]byte, int64, error) {
	if r.line == 10 {
		panic("reader")
	}
	return r.lines.Next(dst)
}

type panickingWriter struct{ lineFeeds }

func (panickingWriter) Answer(dst, answer []byte) []byte { panic(io.ErrClosedPipe) }

func TestPanicsOfOtherPartsBreakOff(t *testing.T) {
	p := newPump(nil, io.Discard)
	p.Reader = panickingReader{newLines(strings.NewReader(numbered(100)))}
	_, err := p.Run(t.Context())
	var broken *BrokenError
	if !errors.As(err, &broken) || broken.Part != "reader" || len(broken.Stack) == 0 {
		t.Errorf("reader: %v", err)
	}
	p = newPump(strings.NewReader(numbered(100_000)), io.Discard)
	p.Writer = panickingWriter{}
	_, err = p.Run(t.Context())
	if !errors.As(err, &broken) || broken.Part != "writer" || !errors.Is(err, io.ErrClosedPipe) {
		t.Errorf("writer: %v", err)
	}
}

func TestCancelInTheMiddleStopsEverything(t *testing.T) {
	for range 20 {
		in, feed := io.Pipe()
		out, sink := io.Pipe()
		go func() { // sends for ever
			for {
				if _, err := feed.Write([]byte("line\n")); err != nil {
					return
				}
			}
		}()
		go io.CopyN(io.Discard, out, int64(rand.IntN(20_000))) // takes a while, then nothing
		ctx, cancel := context.WithCancel(t.Context())
		p := newPump(in, sink)
		p.StopReading = func() { in.CloseWithError(errors.New("read cut")) }
		p.StopWriting = func() { sink.CloseWithError(errors.New("write cut")) }
		p.Store = NewStore(t.TempDir(), 1<<10, 0, 0)
		time.AfterFunc(time.Duration(rand.IntN(20))*time.Millisecond, cancel)
		within(t, 5*time.Second, func() {
			if _, err := p.Run(ctx); !errors.Is(err, context.Canceled) {
				t.Errorf("error %v", err)
			}
		})
		out.Close()
		if used := p.Store.Used(); used != 0 {
			t.Errorf("%d bytes of the store still in use", used)
		}
	}
}

// Answers so long that batches pass to the writer in pieces keep their order, and problems and the end are counted right.
func TestLongAnswersKeepTheOrder(t *testing.T) {
	var out bytes.Buffer
	p := newPump(strings.NewReader(numbered(400)), &out)
	padding := strings.Repeat("z", 100<<10)
	p.Solver = padded{padding: padding}
	s, err := p.Run(t.Context())
	if err != nil || s.Lines != 400 || s.Problems != 57 {
		t.Fatalf("summary %+v, error %v", s, err)
	}
	a := check(t, out.Bytes(), s)
	for i, line := range a.lines {
		a.lines[i] = strings.TrimSuffix(line, padding)
	}
	numberedAnswers(t, a.lines)
}

type padded struct {
	echo
	padding string
}

func (s padded) Solve(worker int, record Record, dst []byte) ([]byte, bool) {
	dst, _ = s.echo.Solve(worker, record, dst)
	return append(dst, s.padding...), record.Line%7 == 0
}
