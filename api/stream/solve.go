package stream

import (
	"runtime/debug"
	"time"
)

// solveAll is one worker: it answers the batches that it gets hold of.
func (r *run) solveAll(worker int) {
	for b := range r.work {
		if r.ctx.Err() != nil || !r.solve(worker, b) {
			return
		}
		b.solved <- struct{}{}
	}
}

// solve answers the records of a batch, and reports whether the run goes on.
func (r *run) solve(worker int, b *batch) bool {
	var spent time.Duration
	for i := 0; i < len(b.records); {
		if err := r.Slot.Acquire(r.ctx); err != nil {
			r.abort(&BrokenError{Part: "slot", Err: err})
			return false
		}
		held := time.Duration(0)
		i, held = r.hold(worker, b, i)
		spent += held
		if r.ctx.Err() != nil {
			return false
		}
	}
	r.pace.note(len(b.records), spent, len(b.out))
	return true
}

// hold answers records from i on for as long as the slot, which it gives back, may be held.
func (r *run) hold(worker int, b *batch, i int) (next int, held time.Duration) {
	defer r.Slot.Release()
	for start := time.Now(); i < len(b.records) && held < SlotHold; held = time.Since(start) {
		from := 0
		if i > 0 {
			from = b.records[i-1].in
		}
		e := &b.records[i]
		r.answer(worker, b, e, Record{Line: e.line, Bytes: b.in[from:e.in:e.in]})
		e.out = len(b.out)
		i++
	}
	return i, held
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
