package drive

import (
	"context"
	"math"
	"math/rand/v2"
	"sync"
	"sync/atomic"
	"time"
)

// A drive is one carrying out of a plan.
type drive struct {
	plan      *Plan
	address   string
	client    *client
	targets   []*target
	queueWait time.Duration // of the service
}

// pick returns the target of the mix that a number from 0 to 1 stands for.
func (d *drive) pick(share float64) *target {
	var whole float64
	for _, t := range d.targets {
		whole += t.Share
	}
	share *= whole
	for _, t := range d.targets {
		if share -= t.Share; share < 0 {
			return t
		}
	}
	return d.targets[len(d.targets)-1]
}

// dice is the same sequence in every drive.
func dice() *rand.Rand { return rand.New(rand.NewPCG(20, 26)) }

// closed is the closed loop: callers that each send as soon as they have an answer.
func (d *drive) closed(ctx context.Context, c *Capacity) *tally {
	t := new(tally)
	until := time.Now().Add(seconds(c.Seconds))
	var callers sync.WaitGroup
	for i := range c.AtOnce {
		die := rand.New(rand.NewPCG(20, uint64(i)))
		callers.Go(func() {
			for ctx.Err() == nil && time.Now().Before(until) {
				of, due := d.pick(die.Float64()), time.Now()
				r, err := d.client.send(ctx, of.bytes, due)
				t.note(of, r, err, due, until, d.queueWait)
			}
		})
	}
	callers.Wait()
	return t
}

// due returns when the i-th request of a stage is due after its beginning, and whether it is one of the stage.
func (s *Stage) due(i int, rate float64) (time.Duration, bool) {
	n, from := float64(i), s.FromRate
	if from == 0 {
		from = rate
	}
	// The rate rises evenly, so that from*t + (rate - from)/(2 seconds)*t^2 requests are due by t.
	rise := (rate - from) / (2 * s.Seconds)
	at := n / from
	if rise != 0 {
		root := from*from + 4*rise*n
		if root < 0 {
			return 0, false
		}
		at = 2 * n / (from + math.Sqrt(root))
	}
	return seconds(at), at < s.Seconds
}

// open is the open loop: each request is sent when it is due, whatever became of those before.
func (d *drive) open(ctx context.Context, s *Stage, rate float64) *tally {
	t := new(tally)
	die := dice()
	var flights sync.WaitGroup
	var under atomic.Int64
	start := time.Now()
	until := start.Add(seconds(s.Seconds))
	for i := 0; ; i++ {
		after, inside := s.due(i, rate)
		if !inside || ctx.Err() != nil {
			break
		}
		due := start.Add(after)
		if pause := time.Until(due); pause > 0 {
			time.Sleep(pause)
		}
		of := d.pick(die.Float64())
		if under.Add(1) > mostFlights {
			under.Add(-1)
			t.mutex.Lock()
			t.unsent++
			t.mutex.Unlock()
			continue
		}
		flights.Go(func() {
			defer under.Add(-1)
			r, err := d.client.send(ctx, of.bytes, due)
			t.note(of, r, err, due, until, d.queueWait)
		})
	}
	flights.Wait()
	return t
}

func seconds(s float64) time.Duration { return time.Duration(s * float64(time.Second)) }
