package stream

import (
	"sync/atomic"
	"time"
)

// pace says how many records the next batch may have: few at first, so that the first answers come at once; few where
// records take long or have long answers; else batchRecords. It steers speed only: answers do not depend on it.
type pace struct {
	batches int          // filled so far; the reader's own
	cost    atomic.Int64 // nanoseconds a record, lately
	length  atomic.Int64 // bytes an answer, lately
}

// records is the bound for the next batch.
func (p *pace) records() int {
	n := int64(batchRecords)
	if p.batches < 6 {
		n = 1 << p.batches
	}
	p.batches++
	if cost := p.cost.Load(); cost > 0 {
		n = min(n, int64(SlotHold)/cost)
	}
	if length := p.length.Load(); length > 0 {
		n = min(n, batchAnswers/length)
	}
	return int(max(n, 1))
}

// note takes in what a batch took. Notes of two workers at once may overwrite each other: either will do.
func (p *pace) note(records int, spent time.Duration, bytes int) {
	n := int64(max(records, 1))
	p.cost.Store((3*p.cost.Load() + int64(spent)/n) / 4)
	p.length.Store((3*p.length.Load() + int64(bytes)/n) / 4)
}
