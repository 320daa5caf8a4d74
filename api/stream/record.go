package stream

// A Record is one request of a bulk body.
type Record struct {
	// Line is the number the caller knows it by: of the physical line, or of the record in formats without lines; from 1.
	Line int64
	// Bytes is the request in the form that the Solver expects. It is valid until the Solver's method returns. It is
	// empty where the reader refused the record.
	Bytes []byte
}

// A Reader finds the records of a body. Its methods are called from one goroutine at a time.
type Reader interface {
	// Next appends the next record to dst and returns the extended buffer and the record's line. The error is
	// io.EOF at the end of the body; a *Fault for a record that cannot be given to the Solver while later
	// ones can; and anything else where no next record can be found: that breaks the run off. With an error
	// dst comes back as it was.
	Next(dst []byte) (extended []byte, line int64, err error)
	// Ready reports whether Next will return without waiting for the client. Only then is a batch filled further.
	Ready() bool
	// Position is the line from which a caller must send again if no further record is taken: every record
	// that Next returned lies before it. It may be called after Next failed.
	Position() int64
}

// A Fault is the error of a Reader for one record, which costs that record only.
type Fault struct {
	// Reason says to the Solver's Refuse what was wrong: an *Overlong, or an error of the reader's own.
	Reason error
}

func (f *Fault) Error() string { return "record refused: " + f.Reason.Error() }

// Unwrap returns the reason.
func (f *Fault) Unwrap() error { return f.Reason }

// Overlong is the reason for a record longer than its bound. The record's bytes were skipped, not kept.
type Overlong struct {
	Limit int // bytes a record may have
}

func (o *Overlong) Error() string { return "record longer than its bound" }

// A Panicked is what a panic of the Solver is turned into: it costs one record.
type Panicked struct {
	Value any
	Stack []byte
}

func (p *Panicked) Error() string { return "panic while solving a record" }
