package admit

import (
	"context"
	"sync/atomic"
	"time"
)

// A Hold is one claim to a slot of a pool, to be used by one goroutine at a time and as often as it likes. Make it by Pool.Hold.
type Hold struct {
	pool  *Pool
	class Class

	// Guarded by the pool's mutex.
	before, after *Hold // in line
	place         int   // in the pool's list of running holds; -1 while it waits
	since         time.Duration
	spent         time.Duration // held before since, for the same solve

	// seen is the last sign of life, in nanoseconds of the pool's clock, as long as the slot is held.
	seen  atomic.Int64
	ready chan struct{} // of capacity 1: a slot is given
}

// Acquire waits for a slot. In a class that has a line of bounded length the error is a *Refusal, mostly at once; in every class it is the
// context's where that ends first.
func (h *Hold) Acquire(ctx context.Context) error {
	if err := ctx.Err(); err != nil {
		return err
	}
	p := h.pool
	p.mutex.Lock()
	h.spent = 0
	now := p.now()
	if p.free > 0 {
		p.free--
		p.awake(h.class, now)
		p.give(h, now)
		p.mutex.Unlock()
		return nil
	}
	if refusal := p.refusal(h.class); refusal != nil {
		p.mutex.Unlock()
		return refusal
	}
	p.awake(h.class, now)
	p.shares[h.class].line.pushBack(h)
	p.waiting.Add(1)
	p.mutex.Unlock()

	var late <-chan time.Time
	if h.class != Bulk {
		timer := time.NewTimer(p.settings.Wait)
		defer timer.Stop()
		late = timer.C
	}
	select {
	case <-h.ready:
		return nil
	case <-late:
		return p.leave(h, &Refusal{Reason: WaitedLong, Expected: p.settings.Wait})
	case <-ctx.Done():
		return p.leave(h, ctx.Err())
	}
}

// Release gives the slot back, which must be held.
func (h *Hold) Release() {
	p := h.pool
	p.mutex.Lock()
	now := p.now()
	p.take(h, now)
	if h.class != Bulk {
		p.shares[h.class].finished(h.spent)
	}
	p.next(now)
	p.mutex.Unlock()
}

// Spent is how long the slot, which must be held, has been held since it was acquired.
func (h *Hold) Spent() time.Duration { return h.spent + h.pool.now() - h.since }

// Checkpoint is a sign of life of whoever holds the slot. Where the turn of another class has come it gives the slot away and waits until it has one again;
// it returns how long that took. at is now, which whoever has many checkpoints has read anyway.
func (h *Hold) Checkpoint(at time.Time) (waited time.Duration) {
	p := h.pool
	now := at.Sub(p.start)
	if now-time.Duration(h.seen.Load()) >= turn { // not every time: a store that all processors see costs more than the rest
		h.seen.Store(int64(now))
	}
	if p.waiting.Load() == 0 || now-h.since < turn {
		return 0
	}
	p.mutex.Lock()
	next, found := p.choose(h.class, now)
	mine := &p.shares[h.class]
	if !found || p.used(next, now) >= p.used(h.class, now) {
		p.mutex.Unlock()
		return 0
	}
	p.take(h, now)
	mine.line.pushFront(h) // what has begun ends before something new begins
	p.waiting.Add(1)
	p.hand(next, now)
	p.mutex.Unlock()
	<-h.ready
	return p.now() - now
}
