package stream

import (
	"crypto/sha256"
	"hash"
)

// writeAll is the writer: it takes the solved batches in their order, frames and hashes their answers, and puts them into
// the spool, and then the end.
func (r *run) writeAll() {
	f := framing{writer: r.Writer, hash: sha256.New()}
	resumeAt := int64(0) // the first record whose answer the spool had no room for
	for b := range r.ordered {
		for last := false; !last; {
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
				resumeAt = b.records[b.first].line
				r.stop.ask(SpoolFull)
			}
			last = b.last()
			r.writePiece(&f, b, resumeAt > 0)
		}
		r.free <- b
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

// writePiece puts one piece of a batch into the spool, or drops it, and gives the batch back to its worker unless it was the last.
func (r *run) writePiece(f *framing, b *batch, drop bool) {
	if !drop {
		r.count(b)
		f.piece(b)
	}
	if !b.last() {
		b.next()
		b.taken <- struct{}{}
	} else if r.pending.Add(-1) == 0 && !drop {
		f.flush()
	}
	if !drop {
		f.hash.Write(f.out)
		r.spool.append(f.out)
	}
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
	lines, problems := b.ready-b.first, 0
	for i := range b.records[b.first:b.ready] {
		if b.records[b.first+i].problem {
			problems++
		}
	}
	r.summary.Lines += int64(lines)
	r.summary.Problems += int64(problems)
	if r.Answered != nil {
		r.Answered(lines, problems)
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

func (f *framing) piece(b *batch) {
	f.begin()
	from := 0
	for i := b.first; i < b.ready; i++ {
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
