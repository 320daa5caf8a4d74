package stream

import (
	"bytes"
	"context"
	"errors"
	"fmt"
	"io"
	"sync/atomic"
	"testing"
	"time"
)

// Whenever the drain comes, the lines before resume_at are answered and no others.
func TestADrainAnswersWhatWasRead(t *testing.T) {
	for range 5 {
		in, feed := io.Pipe()
		draining := make(chan struct{})
		var out bytes.Buffer
		p := newPump(in, &out)
		p.Draining = draining
		p.Discard = func() { io.Copy(io.Discard, in) }
		p.StopReading = func() { t.Error("reading cut while the client sends") }
		sent := make(chan struct{})
		go func() {
			defer close(sent)
			for i := 1; i < 20_000; i++ {
				fmt.Fprintf(feed, "text %d\n", i)
				if i == 10_000 {
					close(draining)
				}
			}
			feed.Close()
		}()
		s, err := p.Run(t.Context())
		<-sent
		if err != nil || s.Complete || s.Reason != Draining || s.ResumeAt != s.Lines+1 || s.Lines < 9_000 {
			t.Fatalf("summary %+v, error %v", s, err)
		}
		numberedAnswers(t, check(t, out.Bytes(), s).lines)
	}
}

// A drain does not wait for a client that neither sends nor ends its body.
func TestADrainEndsASilentClient(t *testing.T) {
	in, feed := io.Pipe()
	draining := make(chan struct{})
	var out bytes.Buffer
	p := newPump(in, &out)
	p.Draining = draining
	p.StopReading = func() { in.CloseWithError(errors.New("read cut")) }
	p.Discard = func() { t.Error("discards after reading was cut") }
	var answered atomic.Int64
	p.Answered = func(n, _ int) {
		if answered.Add(int64(n)) == 2 {
			time.AfterFunc(50*time.Millisecond, func() { close(draining) }) // the reader waits by then
		}
	}
	go fmt.Fprint(feed, "text 1\ntext 2\nhalf a li")
	within(t, 2*time.Second, func() {
		s, err := p.Run(t.Context())
		if err != nil || s.Complete || s.Reason != Draining || s.ResumeAt != 3 || s.Lines != 2 {
			t.Errorf("summary %+v, error %v", s, err)
		}
		numberedAnswers(t, check(t, out.Bytes(), s).lines)
	})
}

// A server of net/http cancels the context when the read that StopReading ends fails: the end is told all the same.
func TestTheEndIsToldThoughStopReadingCancels(t *testing.T) {
	in, feed := io.Pipe()
	ctx, cancel := context.WithCancel(t.Context())
	defer cancel()
	var out bytes.Buffer
	p := newPump(in, &out)
	p.Stall = 50 * time.Millisecond
	p.StopReading = func() { cancel(); in.CloseWithError(errors.New("read cut")) }
	go fmt.Fprint(feed, "text 1\n")
	s, err := p.Run(ctx)
	if err != nil || s.Complete || s.Reason != Idle || s.ResumeAt != 2 {
		t.Fatalf("summary %+v, error %v", s, err)
	}
	numberedAnswers(t, check(t, out.Bytes(), s).lines)
}

// A body that has ended is answered whole, drain or not.
func TestADrainAfterTheEndChangesNothing(t *testing.T) {
	draining := make(chan struct{})
	var out bytes.Buffer
	p := newPump(bytes.NewReader([]byte("text 1\ntext 2\n")), &out)
	p.Draining = draining
	p.Solver = echo{before: func(_ int, r Record) {
		if r.Line == 1 {
			time.Sleep(20 * time.Millisecond) // meanwhile the reader sees the end
			close(draining)
			time.Sleep(20 * time.Millisecond)
		}
	}}
	s, err := p.Run(t.Context())
	if err != nil || !s.Complete || s.Lines != 2 {
		t.Fatalf("summary %+v, error %v", s, err)
	}
}

// What a client goes on sending once it has been sent everything is thrown away for a while, not for ever.
func TestDiscardIsEndedOnceAllIsDelivered(t *testing.T) {
	in, feed := io.Pipe()
	draining := make(chan struct{})
	var out bytes.Buffer
	p := newPump(in, &out)
	p.Draining = draining
	p.Discard = func() { io.Copy(io.Discard, in) }
	p.StopReading = func() { in.CloseWithError(errors.New("read cut")) }
	go func() {
		for i := 1; ; i++ {
			if i == 1000 {
				close(draining)
			}
			if _, err := fmt.Fprintf(feed, "text %d\n", i); err != nil {
				return
			}
		}
	}()
	within(t, linger+2*time.Second, func() {
		s, err := p.Run(t.Context())
		if err != nil || s.Reason != Draining {
			t.Errorf("summary %+v, error %v", s, err)
		}
	})
}
