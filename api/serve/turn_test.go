package serve

import (
	"context"
	"strings"
	"sync"
	"sync/atomic"
	"testing"
	"time"

	"leat/api/operation"
	"leat/api/wire"
)

func TestTurnsAreGivenBack(t *testing.T) {
	r := start(t, func(c *Config, _ *Surroundings) { c.TimeLimit = 2 * time.Second })
	for range 2 * cap(newTurns()) {
		r.send("POST", "/v1/depths", `{"act":"panic"}`, "Content-Type", jsonHeader).problem(t, 500)
		r.send("POST", "/v1/depths", `{"act":"refuse"}`, "Content-Type", jsonHeader).problem(t, 422)
	}
}

func TestTurnsAreBounded(t *testing.T) {
	ctx, cancel := context.WithCancel(t.Context())
	turns := newTurns()
	for range cap(turns) {
		if !turns.take(ctx, 0) {
			t.Fatal("a free turn is not given")
		}
	}
	began := time.Now()
	if turns.take(ctx, 50*time.Millisecond) || time.Since(began) < 50*time.Millisecond {
		t.Error("a turn too many, or no wait for one")
	}
	given := make(chan bool)
	go func() { given <- turns.take(ctx, time.Minute) }()
	turns.use(func() ([]byte, []string, *wire.Problem) { return nil, nil, nil })
	if !<-given {
		t.Error("the turn that was given back is not given on")
	}
	go func() { given <- turns.take(ctx, time.Minute) }()
	cancel()
	if <-given {
		t.Error("a turn for a client that has gone")
	}
}

// No more requests than turns are inside an operation at once, and one that waits too long is told to come again.
func TestSaturatedOperationAnswers503(t *testing.T) {
	var inside, most atomic.Int64
	release := make(chan struct{})
	slow := &operation.Operation{Name: "depths", Solve: func([]byte, operation.Options) (operation.Solved, *wire.Problem) {
		if n := inside.Add(1); n > most.Load() {
			most.Store(n)
		}
		<-release
		inside.Add(-1)
		return operation.Solved{}, wire.NoSolution("", "none", "None was wanted.")
	}}
	r := startOperations(t, []*operation.Operation{slow}, func(c *Config, _ *Surroundings) { c.TimeLimit = 300 * time.Millisecond })
	bound := cap(newTurns())
	var all sync.WaitGroup
	for range bound {
		all.Go(func() { r.send("POST", "/v1/depths", `{}`, "Content-Type", jsonHeader) })
	}
	waitFor(t, "all turns to be taken", func() bool { return inside.Load() == int64(bound) })
	got := r.send("POST", "/v1/depths", `{}`, "Content-Type", jsonHeader)
	if p := got.problem(t, 503); got.header.Get("Retry-After") == "" || !strings.HasSuffix(p.Type, "/saturated") {
		t.Errorf("%v %+v", got.header, p)
	}
	close(release)
	all.Wait()
	if most.Load() != int64(bound) {
		t.Errorf("%d at once, want %d", most.Load(), bound)
	}
}
