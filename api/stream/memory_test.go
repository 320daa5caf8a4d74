package stream

import (
	"bytes"
	"io"
	"runtime"
	"sync"
	"testing"
	"time"
)

// repeated is a body of n equal lines that takes no memory.
type repeated struct {
	line []byte
	n    int
	at   int // in the current line
}

func (r *repeated) Read(p []byte) (int, error) {
	done := 0
	for done < len(p) && r.n > 0 {
		c := copy(p[done:], r.line[r.at:])
		done += c
		r.at += c
		if r.at == len(r.line) {
			r.at = 0
			r.n--
		}
	}
	if done == 0 {
		return 0, io.EOF
	}
	return done, nil
}

// heap is the greatest heap in use seen until stop is called, beyond what was in use at the start.
func heap() (stop func() int64) {
	runtime.GC()
	var before, now runtime.MemStats
	runtime.ReadMemStats(&before)
	quit := make(chan struct{})
	var watch sync.WaitGroup
	var most uint64
	watch.Go(func() {
		for {
			select {
			case <-quit:
				return
			case <-time.After(5 * time.Millisecond):
				runtime.ReadMemStats(&now)
				most = max(most, now.HeapInuse)
			}
		}
	})
	return func() int64 {
		close(quit)
		watch.Wait()
		return int64(most) - int64(before.HeapInuse)
	}
}

// 200 000 answers of 600 bytes, none taken until all is sent: 120 MB that must not be in memory.
func TestMemoryIsFlatWhileNobodyReads(t *testing.T) {
	in, feed := io.Pipe()
	out, sink := io.Pipe()
	p := newPump(in, sink)
	p.Store = NewStore(t.TempDir(), 1<<20, 0, 0)
	var s Summary
	var err error
	var run sync.WaitGroup
	stop := heap()
	run.Go(func() { s, err = p.Run(t.Context()); sink.Close() })
	line := append(bytes.Repeat([]byte("x"), 599), '\n')
	const n = 200_000 / share
	io.Copy(feed, &repeated{line: line, n: n})
	feed.Close()
	if p.Store.Used() < 100<<20/share {
		t.Errorf("only %d bytes in the file", p.Store.Used())
	}
	taken, _ := io.Copy(io.Discard, out)
	run.Wait()
	grown := stop()
	if err != nil || s.Lines != n || taken < 600*n {
		t.Fatalf("summary %+v, %d bytes, error %v", s, taken, err)
	}
	t.Logf("heap grew by %.1f MiB at most", float64(grown)/(1<<20))
	if grown > 24<<20 {
		t.Errorf("the heap grew by %d bytes", grown)
	}
}

// The same when all is read at once, and when records and answers are large.
func TestMemoryIsFlatWhateverTheLines(t *testing.T) {
	for _, c := range []struct{ bytes, n int }{{20, 1_000_000 / share}, {500_000, 400 / share}} {
		stop := heap()
		line := append(bytes.Repeat([]byte("x"), c.bytes-1), '\n')
		p := newPump(nil, io.Discard)
		p.Reader = &wholeLines{body: &repeated{line: line, n: c.n}, line: make([]byte, c.bytes)}
		s, err := p.Run(t.Context())
		grown := stop()
		if err != nil || s.Lines != int64(c.n) {
			t.Fatalf("summary %+v, error %v", s, err)
		}
		t.Logf("lines of %d bytes: heap grew by %.1f MiB at most", c.bytes, float64(grown)/(1<<20))
		if grown > 48<<20 {
			t.Errorf("lines of %d bytes: the heap grew by %d bytes", c.bytes, grown)
		}
	}
}

// wholeLines reads lines of one known length.
type wholeLines struct {
	body io.Reader
	line []byte
	n    int64
}

func (w *wholeLines) Next(dst []byte) ([]byte, int64, error) {
	if _, err := io.ReadFull(w.body, w.line); err != nil {
		return dst, w.n, err
	}
	w.n++
	return append(dst, w.line[:len(w.line)-1]...), w.n, nil
}

func (w *wholeLines) Ready() bool     { return true }
func (w *wholeLines) Position() int64 { return w.n + 1 }

// Short records with long answers: the reader is far ahead before anybody knows how long they are.
func TestMemoryIsFlatWhenAnswersAreLong(t *testing.T) {
	long := bytes.Repeat([]byte("y"), 3<<20)
	stop := heap()
	p := newPump(bytes.NewReader([]byte(numbered(300/share))), io.Discard)
	p.Workers = 2
	p.Solver = longAnswers{long: long}
	s, err := p.Run(t.Context())
	grown := stop()
	if err != nil || s.Lines != 300/share {
		t.Fatalf("summary %+v, error %v", s, err)
	}
	t.Logf("heap grew by %.1f MiB at most", float64(grown)/(1<<20))
	if grown > 96<<20 {
		t.Errorf("the heap grew by %d bytes", grown)
	}
}

type longAnswers struct {
	echo
	long []byte
}

func (l longAnswers) Solve(_ int, _ Record, dst []byte) ([]byte, bool) {
	return append(dst, l.long...), false
}
