package serve

import (
	"context"
	"time"

	"leat/api/admit"
)

// checkpoints returns what gives each solve its checkpoint: it gives way to other work where that has its turn, and ends the solve past the
// time limit, which runs from its beginning while it holds its slot, and when the client has gone. hold is the slot that a worker holds.
func checkpoints(ctx context.Context, limit time.Duration, hold func(worker int) *admit.Hold) func(worker int) func() error {
	return func(worker int) func() error {
		slot, deadline := hold(worker), time.Now().Add(limit)
		return func() error {
			now := time.Now()
			if waited := slot.Checkpoint(now); waited > 0 {
				now, deadline = now.Add(waited), deadline.Add(waited)
			}
			switch {
			case ctx.Err() != nil:
				return goneClient()
			case now.After(deadline):
				return lateAnswer(limit)
			}
			return nil
		}
	}
}
