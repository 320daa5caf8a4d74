package stream

import (
	"bufio"
	"bytes"
	"context"
	"errors"
	"fmt"
	"io"
	"strings"
	"sync"
	"testing"
	"time"
)

// A client that waits for each answer before it sends the next line gets it at once.
func TestEachAnswerBeforeTheNextLine(t *testing.T) {
	in, feed := io.Pipe()
	out, sink := io.Pipe()
	buffered := bufio.NewWriterSize(sink, 1<<20)
	p := newPump(in, buffered)
	p.Flush = buffered.Flush
	var s Summary
	var err error
	var run sync.WaitGroup
	run.Go(func() { s, err = p.Run(t.Context()); sink.Close() })
	answers := bufio.NewReader(out)
	var all bytes.Buffer
	within(t, 20*time.Second, func() {
		for i := 1; i <= 1000; i++ {
			if i%3 == 0 { // in two pieces
				fmt.Fprint(feed, "te")
				fmt.Fprintf(feed, "xt %d\n", i)
			} else {
				fmt.Fprintf(feed, "text %d\n", i)
			}
			if i == 1 {
				line, _ := answers.ReadString('\n')
				all.WriteString(line)
			}
			line, rerr := answers.ReadString('\n')
			all.WriteString(line)
			if want := fmt.Sprintf("%d text %d\n", i, i); line != want {
				t.Errorf("answer %q, want %q (%v)", line, want, rerr)
				break
			}
		}
		feed.Close()
		io.Copy(&all, answers)
	})
	run.Wait()
	if err != nil || s.Lines != 1000 {
		t.Fatalf("summary %+v, error %v", s, err)
	}
	check(t, all.Bytes(), s)
}

func TestASilentClientIsEndedAsIdle(t *testing.T) {
	in, feed := io.Pipe()
	var out bytes.Buffer
	p := newPump(in, &out)
	p.Stall = 100 * time.Millisecond
	p.StopReading = func() { in.CloseWithError(errors.New("read cut")) }
	p.Discard = func() { t.Error("discards from a client that sends nothing") }
	go fmt.Fprint(feed, "text 1\ntext 2\nhalf a li")
	within(t, 5*time.Second, func() {
		s, err := p.Run(t.Context())
		if err != nil || s.Complete || s.Reason != Idle || s.ResumeAt != 3 || s.Lines != 2 {
			t.Errorf("summary %+v, error %v", s, err)
		}
		numberedAnswers(t, check(t, out.Bytes(), s).lines)
	})
}

// A line that arrives slowly is movement, if the body is read through the Activity.
func TestASlowLineIsNotIdle(t *testing.T) {
	in, feed := io.Pipe()
	var out bytes.Buffer
	p := newPump(nil, &out)
	p.Activity = NewActivity()
	p.Reader = newLines(p.Activity.Reader(in))
	p.Stall = 200 * time.Millisecond
	p.StopReading = func() { in.CloseWithError(errors.New("read cut")) }
	go func() {
		for _, c := range "text 1\n" {
			time.Sleep(80 * time.Millisecond)
			fmt.Fprintf(feed, "%c", c)
		}
		feed.Close()
	}()
	s, err := p.Run(t.Context())
	if err != nil || !s.Complete || s.Lines != 1 {
		t.Errorf("summary %+v, error %v", s, err)
	}
}

// A calculation longer than the stall limit is not the client's idleness.
func TestALongCalculationIsNotIdle(t *testing.T) {
	in, feed := io.Pipe()
	var out bytes.Buffer
	p := newPump(in, &out)
	p.Stall = 50 * time.Millisecond
	p.StopReading = func() { in.CloseWithError(errors.New("read cut")) }
	p.Solver = echo{before: func(int, Record) { time.Sleep(300 * time.Millisecond) }}
	go func() {
		fmt.Fprint(feed, "text 1\n")
		time.Sleep(320 * time.Millisecond)
		feed.Close()
	}()
	s, err := p.Run(t.Context())
	if err != nil || !s.Complete || s.Lines != 1 {
		t.Errorf("summary %+v, error %v", s, err)
	}
}

func TestAClientThatTakesNothingIsCut(t *testing.T) {
	for _, store := range []*Store{NewStore(t.TempDir(), 4<<10, 0, 0), NewStore("", 4<<10, 0, 0)} {
		out, sink := io.Pipe()
		p := newPump(strings.NewReader(numbered(50_000)), sink)
		p.Store = store
		p.Stall = 100 * time.Millisecond
		p.StopWriting = func() { sink.CloseWithError(errors.New("write cut")) }
		within(t, 5*time.Second, func() {
			if _, err := p.Run(t.Context()); !errors.Is(err, ErrStalled) {
				t.Errorf("error %v", err)
			}
		})
		out.Close()
		if store.Used() != 0 {
			t.Error("store still in use")
		}
	}
}

// A client that sends everything before it reads gets every answer: more than fits into memory.
func TestEverythingSentBeforeAnythingIsRead(t *testing.T) {
	in, feed := io.Pipe()
	out, sink := io.Pipe()
	p := newPump(in, sink)
	p.Store = NewStore(t.TempDir(), 64<<10, 0, 0)
	const n = 200_000 / share
	var s Summary
	var err error
	var run sync.WaitGroup
	run.Go(func() { s, err = p.Run(t.Context()); sink.Close() })
	within(t, 20*time.Second, func() {
		io.WriteString(feed, numbered(n))
		feed.Close()
	})
	if p.Store.Used() == 0 {
		t.Error("nothing is in the file: the test shows nothing")
	}
	all, _ := io.ReadAll(out)
	run.Wait()
	if err != nil || !s.Complete || s.Lines != n {
		t.Fatalf("summary %+v, error %v", s, err)
	}
	numberedAnswers(t, check(t, all, s).lines)
	if p.Store.Used() != 0 {
		t.Error("store still in use")
	}
}

// At the spool's bound the run ends; the rest of the body is thrown away, so that the client comes to read, and is told where to resume.
func TestAFullSpoolSaysWhereToResume(t *testing.T) {
	const n = 150_000
	in, feed := io.Pipe()
	out, sink := io.Pipe()
	p := newPump(in, sink)
	p.Store = NewStore(t.TempDir(), 128<<10, 1<<20, 0)
	p.Discard = func() { io.Copy(io.Discard, in) }
	p.StopReading = func() { t.Error("reading cut while the client sends") }
	var s Summary
	var err error
	var run sync.WaitGroup
	run.Go(func() { s, err = p.Run(t.Context()); sink.Close() })
	within(t, 20*time.Second, func() {
		io.WriteString(feed, numbered(n))
		feed.Close()
	})
	if used := p.Store.Used(); used > 1<<20+2*batchAnswers {
		t.Errorf("%d bytes in the file", used)
	}
	all, _ := io.ReadAll(out)
	run.Wait()
	if err != nil || s.Complete || s.Reason != SpoolFull || s.ResumeAt != s.Lines+1 || s.Lines >= n || s.Lines < 10_000 {
		t.Fatalf("summary %+v, error %v", s, err)
	}
	numberedAnswers(t, check(t, all, s).lines)
}

// Without a folder a full memory holds the reader up, and all are answered.
func TestWithoutAFileReadingWaits(t *testing.T) {
	out, sink := io.Pipe()
	p := newPump(strings.NewReader(numbered(50_000)), sink)
	p.Store = NewStore("", 64<<10, 0, 0)
	var s Summary
	var err error
	var run sync.WaitGroup
	run.Go(func() { s, err = p.Run(t.Context()); sink.Close() })
	time.Sleep(50 * time.Millisecond)
	all, _ := io.ReadAll(out)
	run.Wait()
	if err != nil || !s.Complete {
		t.Fatalf("summary %+v, error %v", s, err)
	}
	numberedAnswers(t, check(t, all, s).lines)
}

// The client goes while its answers wait.
func TestTheClientVanishes(t *testing.T) {
	in, feed := io.Pipe()
	out, sink := io.Pipe()
	p := newPump(in, sink)
	p.StopReading = func() { in.CloseWithError(errors.New("read cut")) }
	p.StopWriting = func() { sink.CloseWithError(errors.New("write cut")) }
	go func() {
		io.WriteString(feed, numbered(1000))
		io.CopyN(io.Discard, out, 100)
		out.CloseWithError(errors.New("connection reset"))
	}()
	within(t, 5*time.Second, func() {
		_, err := p.Run(context.Background())
		var write *WriteError
		if !errors.As(err, &write) {
			t.Errorf("error %v", err)
		}
	})
	feed.Close()
}
