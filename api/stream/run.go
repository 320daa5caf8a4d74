package stream

import (
	"context"
	"fmt"
	"math"
	"runtime"
	"runtime/debug"
	"sync"
	"sync/atomic"
)

// A run is a Pump at work.
type run struct {
	Pump

	ctx   context.Context // done when the run is broken off, or over
	abort context.CancelCauseFunc

	// Batches go round from free to the reader, to the workers and to the writer. Each channel has room for all of them.
	free    chan *batch
	work    chan *batch
	ordered chan *batch  // in the order of the records
	pending atomic.Int64 // batches read and not yet in the spool

	stop  stop
	early ending // the reader's; set before ordered is closed
	pace  pace
	spool *spool

	inside  inside
	holding atomic.Bool  // the sender waits for more, because the output is held
	sent    atomic.Int64 // bytes given to Output
	summary Summary      // the writer's
	whole   atomic.Bool  // the end is sent

	delivered chan struct{} // closed when nothing will be sent any more

	readingEnded atomic.Bool // nothing more is to be read
	readingCut   atomic.Bool // and StopReading was called for it
	writingEnded atomic.Bool
}

// inside says to the watch which parts are where the client may keep them waiting.
type inside struct {
	next  atomic.Bool // the reader in Next
	write atomic.Bool // the sender in Output or Flush
	room  atomic.Bool // the writer waiting for room in the spool
}

// An ending says whether reading ended before the body did, and where.
type ending struct {
	early    bool
	resumeAt int64
}

func newRun(p *Pump) *run {
	r := &run{Pump: *p}
	if r.Workers <= 0 {
		r.Workers = runtime.GOMAXPROCS(0)
	}
	if r.Slot == nil {
		r.Slot = func(int) Slot { return FreeSlot{} }
	}
	if r.Store == nil {
		r.Store = NewStore("", 0, 0, 0)
	}
	switch {
	case r.Stall == 0:
		r.Stall = DefaultStall
	case r.Stall < 0:
		r.Stall = math.MaxInt64
	}
	if r.Activity == nil {
		r.Activity = NewActivity()
	}
	inFlight := 2*r.Workers + 2
	r.free = make(chan *batch, inFlight)
	r.work = make(chan *batch, inFlight)
	r.ordered = make(chan *batch, inFlight)
	for range inFlight {
		r.free <- batches.Get().(*batch)
	}
	r.spool = newSpool(r.Store)
	r.stop.asked = make(chan struct{})
	r.delivered = make(chan struct{})
	return r
}

func (r *run) run(ctx context.Context) (Summary, error) {
	r.ctx, r.abort = context.WithCancelCause(context.WithoutCancel(ctx))
	defer r.abort(nil)
	defer context.AfterFunc(ctx, func() {
		if !r.readingCut.Load() {
			r.abort(context.Cause(ctx))
		}
	})()
	r.Activity.Received()

	over := make(chan struct{})
	var watch, parts sync.WaitGroup
	watch.Go(func() { r.guard("watch", func() { r.watch(over) }) })
	parts.Go(func() { r.guard("reader", r.readAll) })
	for worker := range r.Workers {
		parts.Go(func() { r.guard("worker", func() { r.solveAll(worker) }) })
	}
	parts.Go(func() { r.guard("writer", r.writeAll) })
	parts.Go(func() { r.guard("sender", r.sendAll) })
	parts.Wait()
	close(over)
	watch.Wait()

	r.spool.close()
	r.recycle()
	if r.whole.Load() {
		return r.summary, nil
	}
	err := context.Cause(r.ctx)
	if read, found := err.(*ReadError); found {
		read.Sent = r.sent.Load()
	}
	return r.summary, err
}

// guard runs a part; a panic in it breaks the run off.
func (r *run) guard(part string, f func()) {
	defer func() {
		if v := recover(); v != nil {
			err, ok := v.(error)
			if !ok {
				err = fmt.Errorf("panic: %v", v)
			}
			r.abort(&BrokenError{Part: part, Err: err, Stack: debug.Stack()})
		}
	}()
	f()
}

// recycle gives back the batches at rest. After a run that was broken off the others are left to the garbage collector.
func (r *run) recycle() {
	for {
		select {
		case b := <-r.free:
			b.reset()
			batches.Put(b)
		default:
			return
		}
	}
}
