package stream

import (
	"bytes"
	"errors"
	"fmt"
	"io"
	"math/rand/v2"
	"sync"
	"testing"
	"time"
)

// However a run ends, and with whatever client: if it does not break off, the end line is right, the lines before
// resume_at are answered, in order, and no others.
func TestEveryEndIsToldRightly(t *testing.T) {
	folder := t.TempDir()
	reasons := map[Reason]int{}
	for round := range 80 {
		r := rand.New(rand.NewPCG(7, uint64(round)))
		in, feed := io.Pipe()
		out, sink := io.Pipe()
		draining := make(chan struct{})
		n, drainAt := 1+r.IntN(10_000), -1
		if r.IntN(3) == 0 {
			drainAt = r.IntN(n)
		}
		p := newPump(in, sink)
		p.Workers = 1 + r.IntN(5)
		p.Store = NewStore(folder, 1+r.Int64N(128<<10), 1+r.Int64N(256<<10), 0)
		p.Draining = draining
		p.Stall = 10 * time.Second
		p.StopReading = func() { in.CloseWithError(errors.New("read cut")) }
		p.StopWriting = func() { sink.CloseWithError(errors.New("write cut")) }
		p.Discard = func() { io.Copy(io.Discard, in) }
		slow := r.IntN(2) == 0
		p.Solver = echo{before: func(_ int, record Record) {
			if slow && record.Line%64 == 0 {
				time.Sleep(100 * time.Microsecond)
			}
		}}
		readsFirst := r.IntN(2) == 0
		var s Summary
		var err error
		var run sync.WaitGroup
		run.Go(func() { s, err = p.Run(t.Context()); sink.Close() })
		sent := make(chan struct{})
		go func() {
			defer close(sent)
			defer feed.Close()
			var lines bytes.Buffer
			for i := 1; i <= n; i++ {
				fmt.Fprintf(&lines, "text %d\n", i)
				if i == drainAt {
					close(draining)
				}
				if lines.Len() > 4000 || i == n {
					if _, err := lines.WriteTo(feed); err != nil {
						return // reading was cut: the end says why
					}
				}
			}
		}()
		if !readsFirst {
			<-sent
		}
		all, _ := io.ReadAll(out)
		run.Wait()
		<-sent
		if err != nil {
			t.Fatalf("round %d: %v", round, err)
		}
		a := check(t, all, s)
		numberedAnswers(t, a.lines)
		if s.Complete && s.Lines != int64(n) || !s.Complete && s.ResumeAt != s.Lines+1 {
			t.Fatalf("round %d: %d lines sent, summary %+v", round, n, s)
		}
		if p.Store.Used() != 0 {
			t.Fatalf("round %d: store still in use", round)
		}
		reasons[s.Reason]++
	}
	if reasons[""] == 0 || reasons[Draining] == 0 || reasons[SpoolFull] == 0 {
		t.Errorf("some ends were never seen: %v", reasons)
	}
	t.Log(reasons)
}
