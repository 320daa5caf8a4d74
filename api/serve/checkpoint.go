package serve

import (
	"context"
	"time"
)

// checkpoints returns what gives each long solve its checkpoint: it ends the solve past the time limit, which runs from its
// beginning, and when the client has gone.
func checkpoints(ctx context.Context, limit time.Duration) func() func() error {
	return func() func() error {
		deadline := time.Now().Add(limit)
		return func() error {
			switch {
			case ctx.Err() != nil:
				return goneClient()
			case time.Now().After(deadline):
				return lateAnswer(limit)
			}
			return nil
		}
	}
}
