package stream

import "errors"

// ErrStalled is the error of a run that was broken off because the client took nothing for too long.
var ErrStalled = errors.New("the client takes no answers")

// ErrDeclined is the error of a run whose Held declined an output before all of it was known.
var ErrDeclined = errors.New("the output is declined")

// A ReadError is the error of a run whose Reader found no next record.
type ReadError struct {
	Err error
	// Line is where the reader stood.
	Line int64
	// Sent is the number of bytes that Output took: with 0, a caller can still answer otherwise.
	Sent int64
}

func (e *ReadError) Error() string { return "read: " + e.Err.Error() }

// Unwrap returns the reader's own error.
func (e *ReadError) Unwrap() error { return e.Err }

// A WriteError is the error of a run whose Output failed: the client has gone.
type WriteError struct{ Err error }

func (e *WriteError) Error() string { return "write: " + e.Err.Error() }

// Unwrap returns the error of the Output.
func (e *WriteError) Unwrap() error { return e.Err }

// A BrokenError is the error of a run in which a Reader, Writer, Slot, Output or spool panicked or failed on our own side.
type BrokenError struct {
	Part  string // "reader", "writer", "worker", "sender" or "slot"
	Err   error
	Stack []byte // of a panic, else nil
}

func (e *BrokenError) Error() string { return e.Part + ": " + e.Err.Error() }

// Unwrap returns the cause.
func (e *BrokenError) Unwrap() error { return e.Err }
