package stream

import (
	"bytes"
	"context"
	"errors"
	"io"
	"strings"
	"sync/atomic"
	"testing"
	"time"
)

// one is a Slot for one worker at a time that remembers how it was held.
type one struct {
	free    chan struct{}
	since   time.Time
	longest time.Duration
	times   int
}

func newOne() *one {
	s := &one{free: make(chan struct{}, 1)}
	s.free <- struct{}{}
	return s
}

func (s *one) Acquire(ctx context.Context) error {
	select {
	case <-s.free:
		s.since = time.Now()
		return nil
	case <-ctx.Done():
		return ctx.Err()
	}
}

func (s *one) Release() {
	s.longest = max(s.longest, time.Since(s.since))
	s.times++
	s.free <- struct{}{}
}

func TestASlotIsHeldBrieflyAndByOneAtATime(t *testing.T) {
	var out bytes.Buffer
	p := newPump(strings.NewReader(numbered(200)), &out)
	slot := newOne()
	p.Slot = func(int) Slot { return slot }
	var solving atomic.Int32
	p.Solver = echo{before: func(int, Record) {
		if solving.Add(1) > 1 {
			t.Error("two at a time")
		}
		time.Sleep(time.Millisecond)
		solving.Add(-1)
	}}
	s, err := p.Run(t.Context())
	if err != nil {
		t.Fatal(err)
	}
	numberedAnswers(t, check(t, out.Bytes(), s).lines)
	if slot.times < 200/5 {
		t.Errorf("given back %d times", slot.times)
	}
	// A busy machine may stretch a hold, so this bound is generous.
	if slot.longest > 10*SlotHold {
		t.Errorf("held for %v", slot.longest)
	}
}

// While the reader and the writer wait for the client nobody holds the slot.
func TestNoSlotIsHeldWhileTheClientIsAwaited(t *testing.T) {
	in, feed := io.Pipe()
	out, sink := io.Pipe()
	p := newPump(in, sink)
	slot := newOne()
	p.Slot = func(int) Slot { return slot }
	go func() {
		io.WriteString(feed, numbered(10_000))
		time.Sleep(20 * time.Millisecond)
		if err := slot.Acquire(t.Context()); err != nil {
			t.Error(err)
		}
		slot.Release()
		feed.Close()
		io.Copy(io.Discard, out)
	}()
	within(t, 5*time.Second, func() {
		if _, err := p.Run(t.Context()); err != nil {
			t.Error(err)
		}
		sink.Close()
	})
}

type noSlot struct{ err error }

func (s noSlot) Acquire(context.Context) error { return s.err }
func (s noSlot) Release()                      { panic("never acquired") }

func TestASlotThatFailsBreaksOff(t *testing.T) {
	closed := errors.New("no more slots")
	p := newPump(strings.NewReader(numbered(10)), io.Discard)
	p.Slot = func(int) Slot { return noSlot{closed} }
	_, err := p.Run(t.Context())
	var broken *BrokenError
	if !errors.As(err, &broken) || broken.Part != "slot" || !errors.Is(err, closed) {
		t.Fatalf("error %v", err)
	}
}
