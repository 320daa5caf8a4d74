package stream

import (
	"crypto/sha256"
	"hash"
)

// writeAll is the writer: it takes the solved batches in their order, frames and hashes their answers, and puts them into
// the spool, and then the end.
func (r *run) writeAll() {
	f := framing{writer: r.Writer, hash: sha256.New()}
	resumeAt := int64(0) // of the first batch that the spool had no room for
	for b := range r.ordered {
		select {
		case <-b.solved:
		case <-r.ctx.Done():
			return
		}
		// Before pending falls: the watch must not take the end of a long calculation for the client's idleness.
		r.Activity.Sent()
		if resumeAt == 0 && !r.waitForRoom(int64(len(b.out))) {
			if r.ctx.Err() != nil {
				return
			}
			resumeAt = b.records[0].line
			r.stop.ask(SpoolFull)
		}
		if resumeAt > 0 {
			r.pending.Add(-1)
			r.free <- b
			continue
		}
		r.count(b)
		f.batch(b)
		if r.pending.Add(-1) == 0 {
			f.flush()
		}
		r.free <- b
		f.hash.Write(f.out)
		r.spool.append(f.out)
	}
	if r.ctx.Err() != nil {
		return
	}
	s := &r.summary
	switch {
	case resumeAt > 0:
		s.Reason, s.ResumeAt = SpoolFull, resumeAt
	case r.early.early:
		s.Reason, s.ResumeAt = r.stop.reason, r.early.resumeAt
	default:
		s.Complete = true
	}
	r.spool.end(f.end(s))
}

// waitForRoom reports whether the spool has room. Where it has no file, it waits until it has, or the run is broken off.
func (r *run) waitForRoom(size int64) bool {
	for !r.spool.fits(size) {
		if r.Store.folder != "" {
			return false
		}
		r.inside.room.Store(true)
		select {
		case <-r.spool.emptied:
		case <-r.ctx.Done():
			return false
		}
		r.inside.room.Store(false)
	}
	return true
}

func (r *run) count(b *batch) {
	problems := 0
	for i := range b.records {
		if b.records[i].problem {
			problems++
		}
	}
	r.summary.Lines += int64(len(b.records))
	r.summary.Problems += int64(problems)
	if r.Answered != nil {
		r.Answered(len(b.records), problems)
	}
}

// framing is the Writer with its buffer and the hash of what it framed.
type framing struct {
	writer Writer
	hash   hash.Hash
	begun  bool
	out    []byte
}

func (f *framing) begin() {
	if cap(f.out) > keptBytes {
		f.out = nil
	}
	f.out = f.out[:0]
	if !f.begun {
		f.begun = true
		f.out = f.writer.Begin(f.out)
	}
}

func (f *framing) batch(b *batch) {
	f.begin()
	from := 0
	for i := range b.records {
		to := b.records[i].out
		f.out = f.writer.Answer(f.out, b.out[from:to:to])
		from = to
	}
}

func (f *framing) flush() { f.out = f.writer.Flush(f.out) }

// end frames the end, and completes the summary.
func (f *framing) end(s *Summary) []byte {
	f.begin()
	f.flush()
	f.hash.Write(f.out)
	f.hash.Sum(s.SHA256[:0])
	before := len(f.out)
	f.out = f.writer.End(f.out, *s)
	f.hash.Write(f.out[before:])
	f.hash.Sum(s.Whole[:0])
	return f.out
}
