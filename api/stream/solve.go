package stream

import (
	"runtime/debug"
	"time"
)

// solveAll is one worker: it answers the batches that it gets hold of.
func (r *run) solveAll(worker int) {
	slot := r.Slot(worker)
	for b := range r.work {
		if r.ctx.Err() != nil || !r.solve(worker, slot, b) {
			return
		}
		b.solved <- struct{}{}
	}
}

// solve answers the records of a batch, and reports whether the run goes on. Where answers are long it hands them over in
// pieces, and waits in between until the writer has come to them: what waits for its turn is bounded.
func (r *run) solve(worker int, slot Slot, b *batch) bool {
	var spent time.Duration
	for b.ready < len(b.records) {
		if b.ready > b.first && len(b.out) >= batchAnswers {
			r.pace.note(b.ready-b.first, spent, len(b.out))
			spent = 0
			b.solved <- struct{}{}
			select {
			case <-b.taken:
			case <-r.ctx.Done():
				return false
			}
		}
		if err := slot.Acquire(r.ctx); err != nil {
			r.abort(&BrokenError{Part: "slot", Err: err})
			return false
		}
		spent += r.hold(worker, slot, b)
		if r.ctx.Err() != nil {
			return false
		}
	}
	r.pace.note(b.ready-b.first, spent, len(b.out))
	return true
}

// hold answers records for as long as the slot, which it gives back, may be held, or until there is a piece to hand over.
func (r *run) hold(worker int, slot Slot, b *batch) (held time.Duration) {
	defer slot.Release()
	for start := time.Now(); b.ready < len(b.records) && held < SlotHold && len(b.out) < batchAnswers; held = time.Since(start) {
		from := 0
		if b.ready > 0 {
			from = b.records[b.ready-1].in
		}
		e := &b.records[b.ready]
		r.answer(worker, b, e, Record{Line: e.line, Bytes: b.in[from:e.in:e.in]})
		e.out = len(b.out)
		b.ready++
	}
	return held
}

// answer appends one answer to the batch.
func (r *run) answer(worker int, b *batch, e *entry, record Record) {
	cause := e.cause
	if cause == nil {
		panicked := r.try(worker, b, e, record)
		if panicked == nil {
			return
		}
		cause = panicked
	}
	b.out = r.Solver.Refuse(worker, record, cause, b.out)
	e.problem = true
}

// try solves one record; after a panic the batch's answers are as they were.
func (r *run) try(worker int, b *batch, e *entry, record Record) (panicked *Panicked) {
	before := len(b.out)
	defer func() {
		if v := recover(); v != nil {
			b.out = b.out[:before]
			panicked = &Panicked{Value: v, Stack: debug.Stack()}
			if r.Panicking != nil {
				r.Panicking(record.Line, panicked)
			}
		}
	}()
	b.out, e.problem = r.Solver.Solve(worker, record, b.out)
	return nil
}
