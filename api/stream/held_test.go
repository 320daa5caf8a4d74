package stream

import (
	"bytes"
	"context"
	"errors"
	"io"
	"strings"
	"testing"
	"time"
)

// What fits the memory is sent with its summary known beforehand; more is sent without, whether there is a file or not.
func TestHeldOutputIsKnownBeforeItIsSent(t *testing.T) {
	for _, c := range []struct {
		name   string
		lines  int
		folder string
		known  bool
	}{
		{"empty", 0, "", true}, {"short", 100, "", true}, {"long, without a file", 60_000, "", false}, {"long, with a file", 60_000, t.TempDir(), false},
	} {
		var out bytes.Buffer
		p := newPump(strings.NewReader(numbered(c.lines)), &out)
		p.Store = NewStore(c.folder, 256<<10, 0, 0)
		calls := 0
		var told Summary
		var size int64
		p.Held = func(whole *Summary, n int64) bool {
			if calls++; out.Len() > 0 || (whole != nil) != c.known {
				t.Errorf("%s: held until %v with %d bytes sent", c.name, whole, out.Len())
			}
			if whole != nil {
				told, size = *whole, n
			}
			return true
		}
		var s Summary
		var err error
		within(t, 20*time.Second, func() { s, err = p.Run(context.Background()) })
		if err != nil || calls != 1 {
			t.Fatalf("%s: %v after %d calls", c.name, err, calls)
		}
		numberedAnswers(t, check(t, out.Bytes(), s).lines)
		if c.known && (told != s || size != int64(out.Len())) {
			t.Errorf("%s: told %+v and %d bytes, is %+v and %d", c.name, told, size, s, out.Len())
		}
	}
}

// An output that Held declines is not sent.
func TestDeclinedOutputIsNotSent(t *testing.T) {
	var out bytes.Buffer
	p := newPump(strings.NewReader(numbered(10)), &out)
	p.Held = func(*Summary, int64) bool { return false }
	s, err := p.Run(context.Background())
	if err != nil || !s.Complete || s.Lines != 10 || out.Len() != 0 {
		t.Errorf("%+v %v, %d bytes sent", s, err, out.Len())
	}
}

// Neither is one that is declined because it is long.
func TestDeclinedLongOutputIsNotSent(t *testing.T) {
	var out bytes.Buffer
	p := newPump(strings.NewReader(numbered(60_000)), &out)
	p.Store = NewStore("", 256<<10, 0, 0)
	p.Held = func(whole *Summary, _ int64) bool { return whole != nil }
	within(t, 20*time.Second, func() {
		if _, err := p.Run(context.Background()); !errors.Is(err, ErrDeclined) || out.Len() != 0 {
			t.Errorf("%v, %d bytes sent", err, out.Len())
		}
	})
}

// A client that neither sends nor ends is noticed though answers are held.
func TestIdleClientIsNoticedWhileAnswersAreHeld(t *testing.T) {
	in, body := io.Pipe()
	defer body.Close()
	var out bytes.Buffer
	p := newPump(in, &out)
	p.Stall = 200 * time.Millisecond
	p.StopReading = func() { in.CloseWithError(io.ErrClosedPipe) }
	p.Held = func(whole *Summary, _ int64) bool { return whole.Complete }
	go io.WriteString(body, numbered(10))
	within(t, 10*time.Second, func() {
		if s, err := p.Run(context.Background()); err != nil || s.Reason != Idle || s.Lines != 10 || out.Len() != 0 {
			t.Errorf("%+v %v, %d bytes sent", s, err, out.Len())
		}
	})
}
