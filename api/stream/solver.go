package stream

import "context"

// A Solver answers records. Both methods are called from several goroutines at once, but never twice at a time with the
// same worker, so that scratch memory may be kept by worker, from 0 up to Pump.Workers - 1.
type Solver interface {
	// Solve appends the answer to a record to dst, and reports whether it is a problem. What it appends is given to
	// the Writer in one piece.
	Solve(worker int, record Record, dst []byte) (extended []byte, problem bool)
	// Refuse appends the problem of a record that the reader refused (cause is the Fault's Reason) or whose Solve
	// panicked (cause is a *Panicked). It must not panic.
	Refuse(worker int, record Record, cause error, dst []byte) (extended []byte)
}

// A Slot is a share of the processors. A worker holds it only while it solves, and gives it back after at most
// SlotHold (or one record, if that takes longer); never while it reads, writes or waits.
type Slot interface {
	// Acquire waits for the share. It fails only when ctx is done, or for a reason that breaks the run off.
	Acquire(ctx context.Context) error
	Release()
}

// FreeSlot is the Slot that is always there.
type FreeSlot struct{}

// Acquire returns the context's error without waiting.
func (FreeSlot) Acquire(ctx context.Context) error { return ctx.Err() }

// Release does nothing.
func (FreeSlot) Release() {}
