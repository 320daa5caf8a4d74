package stream

import (
	"context"
	"io"
	"time"
)

const (
	// SlotHold is the longest that a worker holds its Slot, one record's own time excepted.
	SlotHold = 5 * time.Millisecond
	// DefaultStall is the Stall of a Pump that names none.
	DefaultStall = 30 * time.Second
)

// A Pump is one run from a body to its answers. Reader, Writer, Solver and Output must be given, the rest may be left zero.
// A Pump is used once.
type Pump struct {
	Reader Reader
	Writer Writer
	Solver Solver

	// Output takes the answers. Only one goroutine writes to it.
	Output io.Writer
	// Flush pushes what Output holds on its way. It is called, from the goroutine that writes, when everything
	// answered so far has been written; nil where Output holds nothing back.
	Flush func() error

	// Held, where given, has nothing sent before all of the output is known, or more of it waits than Store keeps in memory, so that what is
	// said before a short output can tell of the whole. It is called once, from the goroutine that sends, before the first write: in the
	// first case with the summary and the output's size in bytes, in the second with nil. Where it returns false nothing is sent at all; in
	// the second case that breaks the run off with ErrDeclined.
	Held func(whole *Summary, size int64) bool

	// Workers solve at the same time; 0 means GOMAXPROCS.
	Workers int
	// Slot returns what a worker holds while it solves; nil means a FreeSlot for each.
	Slot func(worker int) Slot
	// Store gives the bounds of the answers that the client has not taken, and the folder for them; nil means
	// DefaultMemory bytes in memory, and no further reading while they are full.
	Store *Store

	// Draining, once closed, ends the run after the records already read. nil never does.
	Draining <-chan struct{}
	// Stall is how long nothing may move in either direction, while nothing is being solved, before the run is
	// ended with the reason Idle or, where the client owes us its reading, broken off with ErrStalled. 0 means DefaultStall, less than 0 never.
	Stall time.Duration
	// Activity, where given, is shared with what else sees bytes move: its Reader around the body lets a line
	// that arrives byte by byte count as movement.
	Activity *Activity

	// StopReading must make a blocked Reader.Next (and Discard) return soon, with any error. It is called at most
	// once: when the run is broken off, or ends early while the client is silent. nil where reading never blocks for long.
	// A server of net/http does it with a read deadline in the past, and that cancels the request's context; therefore
	// a context that is cancelled later than StopReading is called no longer breaks the run off: what is owed is sent,
	// and a client that has gone shows by the write that fails.
	StopReading func()
	// StopWriting must make a blocked write to Output return soon, with any error. It is called at most once, when
	// the run is broken off. nil where writing never blocks for long.
	StopWriting func()
	// Discard is called once, from the goroutine that reads, when the run ends early while the client may still be
	// sending: it should read and throw away what comes (through Activity, so that it counts as movement) until the
	// body ends, an error, or a bound of its own; a client that sends everything before it reads gets its answers
	// that way. nil leaves the rest unread.
	Discard func()

	// Answered is told of records answered, after each batch and in order; nil is not.
	Answered func(lines, problems int)
	// Panicking is told of each panic of the Solver, from the worker's goroutine; nil is not.
	Panicking func(line int64, panicked *Panicked)
}

// Run pumps until the end line is sent. It returns when all its goroutines have ended. With a nil error the output is whole: its end says what
// the summary says (or Held declined it). With an error it was broken off, whatever the summary counts, and must not look like a clean end; the error is a
// *ReadError, a *WriteError, a *BrokenError, ErrStalled, ErrDeclined, or the cause of ctx.
func (p *Pump) Run(ctx context.Context) (Summary, error) {
	return newRun(p).run(ctx)
}
