package profile

import (
	"errors"
	"flag"
	"math"
	"math/rand/v2"
	"runtime"
	"slices"
	"sync"
	"sync/atomic"
	"testing"
	"time"

	"leat/compute"
	"leat/compute/flow"
	"leat/compute/friction/frictiontest"
	"leat/compute/solve"
)

var (
	randomChains = flag.Int("chains", 3000, "how many random chains TestRandomChains solves")
	firstChain   = flag.Int64("first", 1, "the seed of the first of them")
)

// dice returns a channel whose size fits a discharge, so that most chains have a story to tell.
func dice(r *rand.Rand) (flow.Channel, error) {
	s, err := frictiontest.Kinds[r.IntN(len(frictiontest.Kinds))].Make(r)
	if err != nil {
		return flow.Channel{}, err
	}
	law, err := frictiontest.Law(r, s)
	if err != nil {
		return flow.Channel{}, err
	}
	c := flow.Channel{Section: s, Law: law, Slope: solve.Exp(math.Log(1e-5) + r.Float64()*math.Log(1e4)), Gravity: 9.80665, Barrels: 1 + r.IntN(2)}
	switch r.IntN(12) {
	case 0:
		c.Slope = 0
	case 1:
		c.Slope = -c.Slope / 10
	}
	return c, nil
}

func randomBoundary(r *rand.Rand, upstream bool) Boundary {
	depth := solve.Exp(math.Log(0.05) + r.Float64()*math.Log(100))
	if upstream {
		switch r.IntN(5) {
		case 0:
			return Boundary{Kind: Depth, Value: depth / 5}
		case 1:
			return Boundary{Kind: Gate, Opening: depth / 5, Contraction: 0.61}
		case 2:
			return Boundary{Kind: CriticalFlow}
		}
		return Boundary{}
	}
	switch r.IntN(9) {
	case 0:
		return Boundary{Kind: FreeOverfall}
	case 1:
		return Boundary{Kind: Normal}
	case 2:
		return Boundary{Kind: CriticalFlow}
	case 3:
		return Boundary{Kind: Gate, Opening: depth / 5, Contraction: 0.61}
	case 4:
		return Boundary{Kind: SharpCrested, CrestHeight: depth / 2, CrestWidth: 0.3 + 5*r.Float64()}
	case 5:
		return Boundary{Kind: BroadCrested, CrestHeight: depth / 2, CrestWidth: 0.3 + 5*r.Float64()}
	case 6:
		return Boundary{Kind: Level, Value: depth}
	}
	return Boundary{Kind: Depth, Value: depth}
}

// randomRun returns a chain of one to five reaches, or of stations.
func randomRun(r *rand.Rand) (*Run, error) {
	run := &Run{Discharge: solve.Exp(math.Log(0.01) + r.Float64()*math.Log(1e4)), Upstream: randomBoundary(r, true), Downstream: randomBoundary(r, false)}
	n := 1 + r.IntN(5)
	first, err := dice(r)
	if err != nil {
		return nil, err
	}
	if r.IntN(4) == 0 {
		at, bed := 0.0, 10.0
		for range n + 1 {
			c := first
			if !c.Section.Closed() {
				if c, err = dice(r); err != nil || c.Section.Closed() {
					c = first
				}
			}
			c.Barrels = first.Barrels
			run.Stations = append(run.Stations, Station{Channel: c, Chainage: at, BedLevel: bed})
			length := solve.Exp(math.Log(5) + r.Float64()*math.Log(100))
			at += length
			bed -= length * 0.02 * (r.Float64() - 0.2) * r.Float64()
		}
		return run, nil
	}
	for i := range n {
		c := first
		switch r.IntN(3) {
		case 0:
			if c, err = dice(r); err != nil {
				return nil, err
			}
		case 1:
			c.Slope = solve.Exp(math.Log(1e-5) + r.Float64()*math.Log(1e4))
		}
		reach := Reach{Channel: c, Length: solve.Exp(math.Log(1) + r.Float64()*math.Log(5000))}
		if i > 0 {
			if r.IntN(4) == 0 {
				reach.Inflow = run.Discharge * r.Float64()
			}
			reach.Entry = float64(r.IntN(3)) * 0.5 * r.Float64()
		}
		if r.IntN(8) == 0 {
			reach.Lateral = run.Discharge * r.Float64() / reach.Length
		}
		if i < n-1 {
			reach.Drop = float64(r.IntN(2)) * r.Float64()
			reach.Loss = float64(r.IntN(2)) * r.Float64()
		}
		run.Reaches = append(run.Reaches, reach)
	}
	return run, nil
}

// Every random chain must end in an answer whose balances, recomputed from its depths, hold, or in a stated physical reason.
func TestRandomChains(t *testing.T) {
	var next, solved, refused, impossible, shown atomic.Int64
	var mutex sync.Mutex
	var times []time.Duration
	reasons := map[string]int{}
	worst := 0.0
	var wait sync.WaitGroup
	for range runtime.GOMAXPROCS(0) {
		wait.Go(func() {
			for {
				seed := *firstChain - 1 + next.Add(1)
				if seed >= *firstChain+int64(*randomChains) {
					return
				}
				if seed%50_000 == 0 { // a long run tells how far it is
					t.Logf("%d begun: %d solved, %d refused, %d impossible", seed, solved.Load(), refused.Load(), impossible.Load())
				}
				r := rand.New(rand.NewPCG(uint64(seed), 11))
				run, err := randomRun(r)
				if err != nil {
					impossible.Add(1)
					continue
				}
				begin := time.Now()
				steps := 0
				run.Checkpoint = func() error {
					if steps++; steps > 1_000_000 {
						return errors.New("too many steps")
					}
					return nil
				}
				a, err := Solve(run)
				took := time.Since(begin)
				var reason *NoSolution
				var faults compute.Faults
				mutex.Lock()
				times = append(times, took)
				switch {
				case errors.As(err, &reason):
					reasons[reason.Code]++
				case errors.As(err, &faults):
					reasons[faults[0].Code]++
				}
				mutex.Unlock()
				switch {
				case err == nil:
					solved.Add(1)
					head := 0.0
					wrong := false
					for _, p := range a.Stations {
						head = max(head, p.State.SpecificEnergy)
						wrong = wrong || !(p.State.Geometry.Depth > 0) || math.IsNaN(p.EnergyLevel)
					}
					residual := a.Balance.Energy / head
					if residual > 1e-8 || wrong || math.IsNaN(residual) {
						if shown.Add(1) <= 20 {
							t.Errorf("seed %d: energy residual %.1e of the head %.3g, wrong %v (%d reaches, %d stations)", seed, residual, head, wrong, len(run.Reaches), len(run.Stations))
						}
					}
					mutex.Lock()
					worst = max(worst, residual)
					mutex.Unlock()
				case reason != nil || faults != nil:
					refused.Add(1)
				default:
					if shown.Add(1) <= 20 {
						t.Errorf("seed %d: %v (%d reaches, %d stations)", seed, err, len(run.Reaches), len(run.Stations))
					}
				}
			}
		})
	}
	wait.Wait()
	slices.Sort(times)
	t.Logf("%d solved, %d refused %v, %d impossible; worst energy residual %.1e; median %v, 99 %% %v, most %v", solved.Load(), refused.Load(), reasons,
		impossible.Load(), worst, times[len(times)/2], times[len(times)*99/100], times[len(times)-1])
}
