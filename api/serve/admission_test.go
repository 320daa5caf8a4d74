package serve

import (
	"context"
	"io"
	"net/http"
	"strconv"
	"strings"
	"sync"
	"sync/atomic"
	"testing"
	"time"

	"github.com/prometheus/client_golang/prometheus/testutil"

	"leat/api/admit"
	"leat/api/operation"
	"leat/api/wire"
)

// A gate is an operation whose solves wait until it is opened.
type gate struct {
	inside, most atomic.Int64
	open         chan struct{}
	checks       bool // with checkpoints while they wait
}

func newGate() *gate { return &gate{open: make(chan struct{})} }

func (g *gate) operation(name string, long bool) *operation.Operation {
	return &operation.Operation{Name: name, Long: long, Solve: func(_ []byte, options operation.Options) (operation.Solved, *wire.Problem) {
		if n := g.inside.Add(1); n > g.most.Load() {
			g.most.Store(n)
		}
		defer g.inside.Add(-1)
		checkpoint := options.Begin(options.Worker)
		for g.checks {
			select {
			case <-g.open:
				return operation.Solved{Answer: fakeAnswer("{}")}, nil
			case <-time.After(100 * time.Microsecond):
				checkpoint()
			}
		}
		<-g.open
		return operation.Solved{Answer: fakeAnswer("{}")}, nil
	}}
}

// retries checks the header that says when to come again.
func (r reply) retries(t *testing.T) {
	t.Helper()
	if seconds, err := strconv.Atoi(r.header.Get("Retry-After")); err != nil || seconds < 1 || seconds > 60 {
		t.Errorf("Retry-After %q", r.header.Get("Retry-After"))
	}
}

func TestSlotsAreGivenBack(t *testing.T) {
	r := start(t, func(c *Config, _ *Surroundings) { c.Solves, c.QueueWait = 1, 2*time.Second })
	for range 3 {
		r.send("POST", "/v1/depths", `{"act":"panic"}`, "Content-Type", jsonHeader).problem(t, 500)
		r.send("POST", "/v1/profile", `{"act":"refuse"}`, "Content-Type", jsonHeader).problem(t, 422)
		r.send("POST", "/v1/bulk/depths", "{\"act\":\"panic\"}\n{}\n", "Content-Type", "application/x-ndjson")
	}
	if got := r.send("POST", "/v1/depths", `{}`, "Content-Type", jsonHeader); got.status != 200 {
		t.Errorf("%d %s", got.status, got.body)
	}
}

// When the line is full the answer is 503 at once; probes, metrics and limits do not wait; nothing that was let in is lost.
func TestAFullLineAnswers503AtOnce(t *testing.T) {
	g := newGate()
	r := startOperations(t, []*operation.Operation{g.operation("depths", false)}, func(c *Config, _ *Surroundings) {
		c.Solves, c.Queue, c.QueueWait = 2, 3, time.Minute
	})
	var all sync.WaitGroup
	var good atomic.Int64
	for range 5 {
		all.Go(func() {
			if r.send("POST", "/v1/depths", `{}`, "Content-Type", jsonHeader).status == 200 {
				good.Add(1)
			}
		})
	}
	waitFor(t, "the line to be full", func() bool { return r.admission.pool.Waiting(admit.Short) == 3 })
	began := time.Now()
	got := r.send("POST", "/v1/depths", `{}`, "Content-Type", jsonHeader)
	if p := got.problem(t, 503); !strings.HasSuffix(p.Type, "/saturated") || !strings.Contains(p.Detail, "3 requests wait") {
		t.Errorf("%+v", p)
	}
	got.retries(t)
	for _, path := range []string{"/livez", "/readyz", "/metrics", "/v1/limits", "/version"} {
		if got := r.send("GET", path, ""); got.status != 200 {
			t.Errorf("%s: %d", path, got.status)
		}
	}
	if took := time.Since(began); took > 20*time.Second {
		t.Errorf("took %v", took)
	}
	text := string(r.send("GET", "/metrics", "").body)
	for _, series := range []string{
		`leat_queue_length{class="short"} 3`, `leat_queue_length{class="bulk"} 0`, `leat_slots 2`, `leat_slots_held{class="short"} 2`,
		`leat_turned_away_total{reason="line_full"} 1`, `leat_turned_away_total{reason="rate"} 0`, `leat_refusals_total{problem="saturated"} 1`,
	} {
		if !strings.Contains(text, series+"\n") {
			t.Errorf("no %s", series)
		}
	}
	close(g.open)
	all.Wait()
	if good.Load() != 5 || g.most.Load() != 2 {
		t.Errorf("%d of 5 answered, %d at once", good.Load(), g.most.Load())
	}
}

// Long solves that fill all slots and their line keep neither short ones nor bulk waiting.
func TestLongSolvesKeepNobodyWaiting(t *testing.T) {
	g := newGate()
	g.checks = true
	r := startOperations(t, []*operation.Operation{g.operation("profile", true), fakeOperation("depths")}, func(c *Config, _ *Surroundings) {
		c.Solves, c.Queue, c.QueueWait, c.TimeLimit = 1, 2, time.Minute, time.Minute
	})
	var all sync.WaitGroup
	for range 3 {
		all.Go(func() { r.send("POST", "/v1/profile", `{}`, "Content-Type", jsonHeader) })
	}
	waitFor(t, "the line to be full", func() bool { return r.admission.pool.Waiting(admit.Long) == 2 })
	if got := r.send("POST", "/v1/profile", `{}`, "Content-Type", jsonHeader); got.status != 503 {
		t.Errorf("profile: %d", got.status)
	}
	if got := r.send("POST", "/v1/depths", `{}`, "Content-Type", jsonHeader); got.status != 200 {
		t.Errorf("depths: %d", got.status)
	}
	got := r.send("POST", "/v1/bulk/depths", strings.Repeat("{}\n", 300), "Content-Type", "application/x-ndjson")
	if !strings.Contains(string(got.body), `{"end":true,"lines":300`) {
		t.Errorf("bulk: %d %s", got.status, got.body)
	}
	close(g.open)
	all.Wait()
}

func TestWhoWaitsTooLongIsToldSo(t *testing.T) {
	g := newGate()
	r := startOperations(t, []*operation.Operation{g.operation("depths", false)}, func(c *Config, _ *Surroundings) {
		c.Solves, c.QueueWait = 1, 50*time.Millisecond
	})
	var all sync.WaitGroup
	all.Go(func() { r.send("POST", "/v1/depths", `{}`, "Content-Type", jsonHeader) })
	waitFor(t, "the slot to be taken", func() bool { return g.inside.Load() == 1 })
	got := r.send("POST", "/v1/depths", `{}`, "Content-Type", jsonHeader)
	if p := got.problem(t, 503); !strings.Contains(p.Detail, "queue_wait_seconds, 0.05") {
		t.Errorf("%+v", p)
	}
	got.retries(t)
	close(g.open)
	all.Wait()
}

func TestACallerThatComesTooOftenGets429(t *testing.T) {
	r := start(t, func(c *Config, _ *Surroundings) { c.Rate, c.Burst = 0.01, 3 })
	for range 2 {
		if got := r.send("POST", "/v1/depths", `{}`, "Content-Type", jsonHeader); got.status != 200 {
			t.Errorf("%d within the burst", got.status)
		}
	}
	if got := r.send("POST", "/v1/bulk/depths", "{}\n{}\n{}\n{}\n", "Content-Type", "application/x-ndjson"); got.status != 200 {
		t.Errorf("bulk: %d", got.status)
	}
	for path, media := range map[string]string{"/v1/depths": jsonHeader, "/v1/bulk/depths": "application/x-ndjson"} {
		got := r.send("POST", path, `{}`, "Content-Type", media)
		if p := got.problem(t, 429); !strings.HasSuffix(p.Type, "/too_many_requests") || !strings.Contains(p.Detail, "requests_per_second, 0.01") {
			t.Errorf("%+v", p)
		}
		if seconds, err := strconv.Atoi(got.header.Get("Retry-After")); err != nil || seconds < 90 || seconds > 103 {
			t.Errorf("Retry-After %q", got.header.Get("Retry-After"))
		}
	}
	for _, path := range []string{"/livez", "/readyz", "/metrics", "/v1/limits"} {
		if got := r.send("GET", path, ""); got.status != 200 {
			t.Errorf("%s: %d", path, got.status)
		}
	}
	if n := testutil.ToFloat64(r.metrics.turnedAway.WithLabelValues(awayRate)); n != 2 {
		t.Errorf("%v counted", n)
	}
}

func TestCallersAreToldByTheirNameOrAddress(t *testing.T) {
	for caller, want := range map[string]string{
		"planning": "planning", "192.0.2.7": "192.0.2.7", "::1": "::/64", "2001:db8:1:2:3:4:5:6": "2001:db8:1:2::/64", "::ffff:192.0.2.7": "::ffff:192.0.2.7",
		"fe80::1%eth0": "fe80::/64", "": "",
	} {
		if got := rateKey(caller); got != want {
			t.Errorf("%s: %s, want %s", caller, got, want)
		}
	}
}

func TestStreamsAreBounded(t *testing.T) {
	r := start(t, func(c *Config, _ *Surroundings) { c.Streams = 1 })
	in, feed := io.Pipe()
	request, err := http.NewRequestWithContext(context.Background(), "POST", r.url("/v1/bulk/depths"), in)
	if err != nil {
		t.Fatal(err)
	}
	request.Header.Set("Content-Type", "application/x-ndjson")
	done := make(chan error, 1)
	go func() {
		response, err := r.client().Do(request)
		if err == nil {
			_, err = io.Copy(io.Discard, response.Body)
			response.Body.Close()
		}
		done <- err
	}()
	waitFor(t, "the stream to be open", func() bool { return r.admission.streams.Taken() == 1 })
	got := r.send("POST", "/v1/bulk/depths", "{}\n", "Content-Type", "application/x-ndjson")
	if p := got.problem(t, 503); !strings.Contains(p.Detail, "at once, 1, the limit streams") {
		t.Errorf("%+v", p)
	}
	got.retries(t)
	feed.Close()
	if err := <-done; err != nil {
		t.Error(err)
	}
	waitFor(t, "its place to be free", func() bool { return r.admission.streams.Taken() == 0 })
	if got := r.send("POST", "/v1/bulk/depths", "{}\n", "Content-Type", "application/x-ndjson"); got.status != 200 {
		t.Errorf("%d", got.status)
	}
}

// A solve that hangs without a checkpoint makes the service unready; one that goes on and has checkpoints does not, however long it takes.
func TestAStuckSolveMakesTheServiceUnready(t *testing.T) {
	for name, checks := range map[string]bool{"hangs": false, "goes on": true} {
		g := newGate()
		g.checks = checks
		r := startOperations(t, []*operation.Operation{g.operation("depths", false)}, nil)
		r.admission.stuck = 100 * time.Millisecond
		if checks {
			r.admission.stuck = 2 * time.Second
		}
		var all sync.WaitGroup
		all.Go(func() { r.send("POST", "/v1/depths", `{}`, "Content-Type", jsonHeader) })
		waitFor(t, "the solve to begin", func() bool { return g.inside.Load() == 1 })
		if got := r.send("GET", "/readyz", ""); got.status != 200 && checks {
			t.Errorf("%s: %d at first", name, got.status)
		}
		time.Sleep(r.admission.stuck + 100*time.Millisecond)
		got := r.send("GET", "/readyz", "")
		if checks && got.status != 200 {
			t.Errorf("%s: %d", name, got.status)
		}
		if !checks {
			if p := got.problem(t, 503); !strings.HasSuffix(p.Type, "/not_ready") || !strings.Contains(p.Detail, "holds its slot") {
				t.Errorf("%+v", p)
			}
		}
		if got := r.send("GET", "/livez", ""); got.status != 200 {
			t.Errorf("%s: livez %d", name, got.status)
		}
		close(g.open)
		all.Wait()
		if got := r.send("GET", "/readyz", ""); got.status != 200 {
			t.Errorf("%s: %d afterwards", name, got.status)
		}
	}
}
