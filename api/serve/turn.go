package serve

import (
	"context"
	"runtime"
	"time"

	"leat/api/wire"
)

// turnsPerProcessor is how many unary requests are solved at once for each processor. More would not end sooner, and each holds
// its answer in memory while it grows.
const turnsPerProcessor = 4

// turns are the tokens of the requests of one operation that are being solved.
type turns chan struct{}

func newTurns() turns { return make(turns, turnsPerProcessor*runtime.GOMAXPROCS(0)) }

// take waits until a request may be solved, at most for a limit and while its client is there.
func (t turns) take(ctx context.Context, limit time.Duration) bool {
	select {
	case t <- struct{}{}:
		return true
	default:
	}
	timer := time.NewTimer(limit)
	defer timer.Stop()
	select {
	case t <- struct{}{}:
		return true
	case <-timer.C:
	case <-ctx.Done():
	}
	return false
}

// use solves a request that has taken its turn, and gives the turn back, after a panic too.
func (t turns) use(solve func() ([]byte, []string, *wire.Problem)) ([]byte, []string, *wire.Problem) {
	defer func() { <-t }()
	return solve()
}
