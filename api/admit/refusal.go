package admit

import (
	"fmt"
	"math/rand/v2"
	"time"
)

// A Reason is why work is refused.
type Reason string

// The reasons of a Pool.
const (
	LineFull   Reason = "line_full"   // as many wait as may
	LongWait   Reason = "long_wait"   // those before would take longer than anyone should wait
	WaitedLong Reason = "waited_long" // it waited so long
)

// Reasons returns all reasons of a Pool.
func Reasons() []Reason { return []Reason{LineFull, LongWait, WaitedLong} }

// A Refusal is the error of work for which there is no slot.
type Refusal struct {
	Reason   Reason
	Waiting  int           // how many waited
	Expected time.Duration // how long the wait would have been, or was
}

func (r *Refusal) Error() string {
	return fmt.Sprintf("no slot: %s, %d waiting, wait %v", r.Reason, r.Waiting, r.Expected)
}

// spread is by how many seconds the pauses of those refused at the same time differ.
const spread = 3

// Pause returns the whole seconds after which to try again: at least a time, and some seconds by chance, so that those who were refused together
// do not come back together.
func Pause(least time.Duration) int {
	return max(1, int((least+time.Second-1)/time.Second)) + rand.IntN(spread)
}
