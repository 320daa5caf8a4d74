package stream

import "time"

const (
	// stopTick is how often the watch looks after a reader that was asked to stop.
	stopTick = 50 * time.Millisecond
	// silenceAfterStop is how long a client may be silent before a reader that was asked to stop is made to.
	silenceAfterStop = 2 * stopTick
	// longestStop is how long it may go on even while bytes come in, say of a line without end.
	longestStop = 5 * time.Second
	// linger is how long what a client still sends is read and thrown away once it has been sent everything.
	linger = 2 * time.Second
)

// watch sees to what no part can see by itself, until all of them have ended: a client or a process that goes, a stop
// that the reader does not notice because it waits for the client, and a stall.
func (r *run) watch(over <-chan struct{}) {
	draining, asked, delivered := r.Draining, r.stop.asked, r.delivered
	var askedAt, deliveredAt time.Time
	ticker := time.NewTicker(r.tick(time.Second))
	defer ticker.Stop()
	for {
		select {
		case <-over:
			return
		case <-r.ctx.Done():
			r.endReading()
			r.endWriting()
			return
		case <-draining:
			draining = nil
			r.stop.ask(Draining)
		case <-asked:
			asked, askedAt = nil, time.Now()
			ticker.Reset(r.tick(stopTick))
		case <-delivered:
			delivered, deliveredAt = nil, time.Now()
			ticker.Reset(r.tick(stopTick))
		case <-ticker.C:
			r.watchStall()
			if !askedAt.IsZero() {
				r.watchStop(time.Since(askedAt))
			}
			if !deliveredAt.IsZero() && time.Since(deliveredAt) > linger {
				r.endReading()
			}
		}
	}
}

// tick is how long the watch waits between looks: longest, or less where the stall limit is short.
func (r *run) tick(longest time.Duration) time.Duration {
	return max(time.Millisecond, min(longest, r.Stall/8))
}

// watchStop ends the wait of a reader that was asked to stop so long ago. While bytes come in it will soon stop by
// itself, and the rest of the body can then be discarded, which it cannot after StopReading.
func (r *run) watchStop(ago time.Duration) {
	if r.inside.next.Load() && (min(ago, r.Activity.Silence()) > silenceAfterStop || ago > longestStop) {
		r.endReading()
	}
}

// watchStall acts when nothing has moved for too long.
func (r *run) watchStall() {
	if r.Activity.Quiet() < r.Stall {
		return
	}
	switch {
	case r.inside.write.Load() || r.inside.room.Load():
		r.abort(ErrStalled)
	case r.pending.Load() > 0 || r.spool.waits() && !r.holding.Load():
		// Being solved, or about to be sent: not the client's doing.
	default:
		r.stop.ask(Idle)
		r.endReading()
	}
}

// endReading makes a blocked read return.
func (r *run) endReading() {
	if !r.readingEnded.Swap(true) && r.StopReading != nil {
		r.readingCut.Store(true)
		r.StopReading()
	}
}

// endWriting makes a blocked write return.
func (r *run) endWriting() {
	if !r.writingEnded.Swap(true) && r.StopWriting != nil {
		r.StopWriting()
	}
}
