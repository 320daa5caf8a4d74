package stream

import (
	"errors"
	"io"
)

// readAll is the reader: it fills batches until the body ends, a stop is asked for, or no next record can be found.
func (r *run) readAll() {
	// Guarded by itself: after a panic the run must be broken off before the writer sees that nothing more comes.
	r.guard("reader", r.fillAll)
	close(r.work)
	close(r.ordered)
	if r.early.early && r.Discard != nil && r.ctx.Err() == nil && !r.readingEnded.Load() {
		r.Discard()
	}
}

func (r *run) fillAll() {
	for more := true; more; {
		var b *batch
		select {
		case b = <-r.free:
		case <-r.stop.asked:
			r.endEarly()
			return
		case <-r.ctx.Done():
			return
		}
		b.reset()
		more = r.fill(b)
		if len(b.records) == 0 {
			r.free <- b
			continue
		}
		r.pending.Add(1)
		r.ordered <- b
		r.work <- b
	}
}

// fill puts records into an empty batch: at least one, for which it waits, and more while they are at hand. It reports
// whether reading may go on.
func (r *run) fill(b *batch) (more bool) {
	for limit := r.pace.records(); len(b.records) < limit && len(b.in) < batchBytes; {
		if len(b.records) > 0 && !r.Reader.Ready() {
			return true
		}
		if r.stop.isAsked() {
			r.endEarly()
			return false
		}
		in, line, err := r.next(b.in)
		e := entry{line: line, in: len(b.in)}
		if err == nil {
			b.in, e.in = in, len(in)
		} else if e.cause = r.readFault(err); e.cause == nil {
			return false
		}
		b.records = append(b.records, e)
		r.Activity.Received()
	}
	return true
}

// readFault returns why a record is refused, or nil where reading has ended.
func (r *run) readFault(err error) (cause error) {
	var fault *Fault
	switch {
	case errors.As(err, &fault):
		return fault.Reason
	case err == io.EOF:
	case r.stop.isAsked():
		// The error is that of StopReading, or as good as it.
		r.endEarly()
	default:
		r.abort(&ReadError{Err: err, Line: r.Reader.Position()})
	}
	return nil
}

func (r *run) next(dst []byte) ([]byte, int64, error) {
	r.inside.next.Store(true)
	defer r.inside.next.Store(false)
	return r.Reader.Next(dst)
}

func (r *run) endEarly() {
	r.early = ending{early: true, resumeAt: r.Reader.Position()}
}
