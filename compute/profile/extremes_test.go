package profile_test

import (
	"errors"
	"math"
	"math/rand/v2"
	"testing"
	"time"

	"leat/compute/flow"
	"leat/compute/friction"
	"leat/compute/profile"
	"leat/compute/section"
)

// An extreme is a run at an end of what is asked of the solver, with the jumps and critical controls that it has to have.
type extreme struct {
	name            string
	run             profile.Run
	jumps, controls int // -1 where the run decides
}

// shape returns a section that has to be good.
func shape(t testing.TB) func(section.Section, error) section.Section {
	return func(s section.Section, err error) section.Section {
		t.Helper()
		if err != nil {
			t.Fatal(err)
		}
		return s
	}
}

// channelOf returns a channel with Manning's law.
func channelOf(t testing.TB, s section.Section, n, slope float64) flow.Channel {
	t.Helper()
	law, err := friction.NewManning(n)
	if err != nil {
		t.Fatal(err)
	}
	return flow.Channel{Section: s, Law: law, Slope: slope, Gravity: gravity}
}

// stretchOf returns a run of one reach.
func stretchOf(c flow.Channel, discharge, length float64, up, down profile.Boundary) profile.Run {
	return profile.Run{Discharge: discharge, Reaches: []profile.Reach{{Channel: c, Length: length}}, Upstream: up, Downstream: down}
}

func depthOf(depth float64) profile.Boundary {
	return profile.Boundary{Kind: profile.Depth, Value: depth}
}

func gateOf(opening float64) profile.Boundary {
	return profile.Boundary{Kind: profile.Gate, Opening: opening, Contraction: 0.61}
}

// valley returns a surveyed section of many points: two banks with the roughness of real ground.
func valley(t testing.TB, points int, seed uint64) section.Section {
	t.Helper()
	r := rand.New(rand.NewPCG(seed, 9))
	list := make([][2]float64, points)
	for i := range list {
		x := 2*float64(i)/float64(points-1) - 1
		list[i] = [2]float64{20 * (x + 1), 6*x*x + 0.02*r.Float64()}
	}
	return shape(t)(section.NewSurveyed(list))
}

// manyReaches returns a chain whose reaches differ in width and slope, with steep ones among them.
func manyReaches(t testing.TB, n int) profile.Run {
	t.Helper()
	r := rand.New(rand.NewPCG(5, 5))
	run := profile.Run{Discharge: 6, Downstream: depthOf(2)}
	for i := range n {
		slope := 0.0005 + 0.001*r.Float64()
		if i%10 == 9 {
			slope = 0.03
		}
		s := shape(t)(section.NewTrapezoidal(2+r.Float64(), 1.5, 1.5))
		run.Reaches = append(run.Reaches, profile.Reach{Channel: channelOf(t, s, 0.025, slope), Length: 20 + 60*r.Float64()})
	}
	return run
}

// manyStations returns a surveyed run whose widths and falls vary from station to station, with steep intervals among them.
func manyStations(t testing.TB, n int) profile.Run {
	t.Helper()
	r := rand.New(rand.NewPCG(6, 6))
	run := profile.Run{Discharge: 6, Downstream: depthOf(2)}
	at, bed := 0.0, 0.1*float64(n)
	for i := range n {
		s := shape(t)(section.NewTrapezoidal(2.5+r.Float64(), 1.5, 1.5))
		run.Stations = append(run.Stations, profile.Station{Channel: channelOf(t, s, 0.025+0.005*r.Float64(), 0), Chainage: at, BedLevel: bed})
		at += 20 + 40*r.Float64()
		bed -= 0.03 + 0.02*r.Float64()
		if i%20 == 19 {
			bed-- // down a step of the land
		}
	}
	return run
}

// manyPoints returns a backwater curve reported at so many places.
func manyPoints(t testing.TB, n int) profile.Run {
	t.Helper()
	run := stretchOf(channelOf(t, shape(t)(section.NewTrapezoidal(6, 1.5, 1.5)), 0.025, 0.001), 20, 5000, profile.Boundary{}, depthOf(3))
	for k := range n {
		run.Report.At = append(run.Report.At, 5000*float64(k)/float64(n-1))
	}
	return run
}

func extremes(t testing.TB) []extreme {
	t.Helper()
	made := shape(t)
	wide := func(b float64) section.Section { return made(section.NewRectangular(b)) }
	sloped := func(b, z float64) section.Section { return made(section.NewTrapezoidal(b, z, z)) }
	pipe := func(d float64) section.Section { return made(section.NewCircular(d)) }
	none, overfall := profile.Boundary{}, profile.Boundary{Kind: profile.FreeOverfall}
	normal := profile.Boundary{Kind: profile.Normal}
	list := []extreme{
		{"a trickle of 1e-6 m3/s in a groove", stretchOf(channelOf(t, wide(0.01), 0.012, 0.001), 1e-6, 10, none, depthOf(0.005)), 0, 0},
		{"a trickle of 1e-6 m3/s as a film", stretchOf(channelOf(t, wide(6), 0.02, 0.001), 1e-6, 100, none, depthOf(0.05)), 0, 0},
		{"a trickle of 1e-6 m3/s down a chute", stretchOf(channelOf(t, wide(0.01), 0.008, 0.2), 1e-6, 1, none, depthOf(0.01)), -1, -1},
		{"a river of 1e5 m3/s", stretchOf(channelOf(t, sloped(2000, 3), 0.03, 1e-4), 1e5, 100_000, none, depthOf(25)), 0, 0},
		{"a river of 1e5 m3/s over a fall", stretchOf(channelOf(t, sloped(2000, 3), 0.03, 1e-4), 1e5, 100_000, none, overfall), 0, 0},
		{"a river of 1e5 m3/s that shoots and jumps", stretchOf(channelOf(t, wide(500), 0.02, 0.02), 1e5, 20_000, none, depthOf(60)), 1, 1},
		{"slope 1e-9 to a fall", stretchOf(channelOf(t, sloped(4, 2), 0.025, 1e-9), 5, 10_000, none, overfall), 0, 0},
		{"slope 1e-9 backed up", stretchOf(channelOf(t, sloped(4, 2), 0.025, 1e-9), 5, 10_000, none, depthOf(3)), 0, 0},
		{"slope 1e-9 below a gate", stretchOf(channelOf(t, wide(4), 0.025, 1e-9), 5, 60, gateOf(0.3), overfall), 1, 0},
		{"slope 0.5 from a pool", stretchOf(channelOf(t, wide(3), 0.016, 0.5), 10, 100, none, overfall), 0, 1},
		{"slope 0.5 into a pool", stretchOf(channelOf(t, wide(3), 0.016, 0.5), 10, 100, none, depthOf(8)), 1, 1},
		{"slope 0.5 below a gate", stretchOf(channelOf(t, wide(3), 0.016, 0.5), 10, 100, gateOf(0.2), overfall), 0, 0},
		{"n 0.008 mild", stretchOf(channelOf(t, wide(3), 0.008, 1e-4), 3, 5000, none, overfall), 0, 0},
		{"n 0.008 steep", stretchOf(channelOf(t, wide(3), 0.008, 0.01), 3, 500, none, depthOf(3)), 1, 1},
		{"n 0.2 mild", stretchOf(channelOf(t, sloped(3, 2), 0.2, 0.01), 3, 2000, none, depthOf(3)), 0, 0},
		{"n 0.2 below a gate", stretchOf(channelOf(t, sloped(3, 2), 0.2, 0.1), 3, 2000, gateOf(0.15), normal), 1, 0},
		{"a reach of 100 km", stretchOf(channelOf(t, sloped(6, 2), 0.03, 3e-4), 20, 100_000, none, depthOf(5)), 0, 0},
		{"a reach of 100 km to a fall", stretchOf(channelOf(t, sloped(6, 2), 0.03, 3e-4), 20, 100_000, none, overfall), 0, 0},
		{"a reach of 1 m", stretchOf(channelOf(t, sloped(6, 2), 0.03, 3e-4), 20, 1, none, depthOf(5)), 0, 0},
		{"a reach of 1 m to a fall", stretchOf(channelOf(t, sloped(6, 2), 0.03, 3e-4), 20, 1, none, overfall), 0, 0},
		{"a pipe of 0.1 m, free", stretchOf(channelOf(t, pipe(0.1), 0.01, 0.01), 0.003, 50, none, overfall), -1, -1},
		{"a pipe of 0.1 m, drowned", stretchOf(channelOf(t, pipe(0.1), 0.01, 0.04), 0.005, 50, none, depthOf(0.8)), 1, 1},
		{"a pipe of 10 m, free", stretchOf(channelOf(t, pipe(10), 0.013, 0.001), 150, 2000, none, overfall), -1, -1},
		{"a pipe of 10 m, drowned", stretchOf(channelOf(t, pipe(10), 0.013, 0.02), 300, 2000, none, depthOf(25)), 1, 1},
		{"a section of 5,000 points", stretchOf(channelOf(t, valley(t, 5000, 1), 0.03, 0.001), 30, 5000, none, depthOf(4)), 0, 0},
		{"a section of 5,000 points, steep", stretchOf(channelOf(t, valley(t, 5000, 1), 0.03, 0.04), 30, 300, none, depthOf(4)), 1, 1},
		{"5,000 reaches", manyReaches(t, 5000), -1, -1},
		{"10,000 stations", manyStations(t, 10_000), -1, -1},
	}
	surveyed := profile.Run{Discharge: 30, Downstream: depthOf(4)}
	for i := range 3 {
		surveyed.Stations = append(surveyed.Stations, profile.Station{Channel: channelOf(t, valley(t, 5000-i, uint64(i)), 0.03, 0), Chainage: 300 * float64(i), BedLevel: 2 - 0.3*float64(i)})
	}
	return append(list, extreme{"three stations of 5,000 points", surveyed, 0, 0})
}

// Every extreme solves, with residuals that are nothing against the head, and levels that agree with depths and never rise in energy.
func TestExtremes(t *testing.T) {
	const tolerance = 1e-9 // of the head
	for _, e := range extremes(t) {
		t.Run(e.name, func(t *testing.T) {
			begun := time.Now()
			answer, err := profile.Solve(&e.run)
			took := time.Since(begun)
			if err != nil {
				t.Fatal(err)
			}
			head, force, last := 0.0, 0.0, math.Inf(-1)
			scale := length(&e.run)
			for i := range answer.Stations {
				p := &answer.Stations[i]
				depth := p.State.Geometry.Depth
				head, force = max(head, p.State.SpecificEnergy), max(force, p.State.SpecificForce)
				slope := 0.0
				if len(e.run.Reaches) > 0 {
					slope = e.run.Reaches[p.Reach].Channel.Slope
				} else {
					a, b := &e.run.Stations[p.Reach], &e.run.Stations[p.Reach+1]
					slope = (a.BedLevel - b.BedLevel) / (b.Chainage - a.Chainage)
				}
				cosine := math.Sqrt(1 - slope*slope)
				off := 1e-14 * (1 + math.Abs(p.BedLevel) + depth)
				if !(depth > 0) || !(p.Chainage >= last) || !(math.Abs(p.WaterLevel-p.BedLevel-depth*cosine) <= off) || !(math.Abs(p.EnergyLevel-p.BedLevel-p.State.SpecificEnergy) <= off) ||
					!(math.Abs(p.State.SpecificEnergy-depth*cosine-p.State.VelocityHead) <= 1e-14*p.State.SpecificEnergy) {
					t.Fatalf("at %v after %v: depth %v, bed %v, water %v, energy %v", p.Chainage, last, depth, p.BedLevel, p.WaterLevel, p.EnergyLevel)
				}
				if i > 0 {
					if before := answer.Stations[i-1].EnergyLevel; !(p.EnergyLevel <= before+1e-9*p.State.SpecificEnergy) {
						t.Errorf("the energy level rises from %v to %v at %v", before, p.EnergyLevel, p.Chainage)
					}
				}
				last = p.Chainage
			}
			if !(answer.Balance.Energy <= tolerance*head) || !(answer.Balance.Momentum <= tolerance*force) {
				t.Errorf("balances %+v where the head is %v and the force %v", answer.Balance, head, force)
			}
			critical := 0
			for _, c := range answer.Controls {
				if !(c.Depth > 0) {
					t.Errorf("control %+v", c)
				}
				if c.Kind == "critical" {
					critical++
				}
			}
			if e.jumps >= 0 && len(answer.Jumps) != e.jumps || e.controls >= 0 && critical != e.controls {
				t.Errorf("%d jumps and %d critical controls, want %d and %d: %+v", len(answer.Jumps), critical, e.jumps, e.controls, answer.Curves)
			}
			place := 0.0
			for _, span := range answer.Curves {
				if !(math.Abs(span.From-place) <= 1e-12*scale) || !(span.To >= span.From) {
					t.Errorf("the curve %+v follows one that ends at %v", span, place)
				}
				place = span.To
			}
			if !(math.Abs(place-scale) <= 1e-12*scale) {
				t.Errorf("the curves end at %v of %v", place, scale)
			}
			t.Logf("%d stations, %d jumps, %d critical controls, energy %.1e of the head, %v", len(answer.Stations), len(answer.Jumps), critical, answer.Balance.Energy/head, took)
		})
	}
}

// An error from the checkpoint ends a solve within a few calls, wherever it comes.
func TestCheckpointEndsASolve(t *testing.T) {
	const few = 2
	enough := errors.New("enough")
	for _, e := range []extreme{
		{"reaches", manyReaches(t, 100), 0, 0}, {"stations", manyStations(t, 30), 0, 0}, {"points", manyPoints(t, 5000), 0, 0},
		{"surveyed", stretchOf(channelOf(t, valley(t, 5000, 1), 0.03, 0.001), 30, 5000, profile.Boundary{}, depthOf(4)), 0, 0},
	} {
		whole := 0
		run := e.run
		last, longest := time.Now(), time.Duration(0)
		run.Checkpoint = func() error {
			whole++
			now := time.Now()
			last, longest = now, max(longest, now.Sub(last))
			return nil
		}
		if _, err := profile.Solve(&run); err != nil {
			t.Fatal(e.name, err)
		}
		if whole < 3 {
			t.Errorf("%s: %d calls in a whole solve", e.name, whole)
		}
		t.Logf("%s: %d calls, %v at most between two, %v after the last", e.name, whole, longest, time.Since(last))
		for _, at := range []int{1, 2, 3, whole / 10, whole / 4, whole / 2, 3 * whole / 4, whole - 1, whole} {
			calls := 0
			run.Checkpoint = func() error {
				if calls++; calls >= at {
					return enough
				}
				return nil
			}
			answer, err := profile.Solve(&run)
			if !errors.Is(err, enough) || answer != nil || calls > at+few {
				t.Errorf("%s: an error at call %d of %d ends the solve after %d calls with %v", e.name, at, whole, calls, err)
			}
		}
	}
}

// BenchmarkGrowth solves runs of doubled sizes and reports the exponent of the growth of time, a fit of a power, with the time of the largest:
//
//	go test ./compute/profile -run '^$' -bench Growth -benchtime 1x
func BenchmarkGrowth(b *testing.B) {
	for _, g := range []struct {
		name     string
		from, to int
		make     func(testing.TB, int) profile.Run
	}{
		{"reaches", 625, 10_000, manyReaches},
		{"stations", 625, 10_000, manyStations},
		{"points", 6250, 100_000, manyPoints},
		{"level reaches", 625, 10_000, func(t testing.TB, n int) profile.Run { // without normal depths
			run := profile.Run{Discharge: 6, Downstream: depthOf(2)}
			c := channelOf(t, shape(t)(section.NewTrapezoidal(3, 1.5, 1.5)), 0.025, 0)
			for range n {
				run.Reaches = append(run.Reaches, profile.Reach{Channel: c, Length: 2})
			}
			return run
		}},
		{"survey", 625, 10_000, func(t testing.TB, n int) profile.Run {
			return stretchOf(channelOf(t, valley(t, n, 1), 0.03, 0.001), 30, 5000, profile.Boundary{}, depthOf(4))
		}},
	} {
		b.Run(g.name, func(b *testing.B) {
			for b.Loop() {
				var x, y []float64
				for n := g.from; n <= g.to; n *= 2 {
					run := g.make(b, n)
					least := math.Inf(1)
					for range 5 {
						begun := time.Now()
						if _, err := profile.Solve(&run); err != nil {
							b.Fatal(n, err)
						}
						least = min(least, time.Since(begun).Seconds())
					}
					x, y = append(x, math.Log(float64(n))), append(y, math.Log(least))
					b.Logf("%d: %.1f ms, %.2f us each", n, least*1e3, least*1e6/float64(n))
				}
				b.ReportMetric(fit(x, y), "exponent")
			}
		})
	}
}

// fit returns the slope of the straight line through points, by least squares.
func fit(x, y []float64) float64 {
	var meanX, meanY, xx, xy float64
	for i := range x {
		meanX += x[i] / float64(len(x))
		meanY += y[i] / float64(len(x))
	}
	for i := range x {
		xx += (x[i] - meanX) * (x[i] - meanX)
		xy += (x[i] - meanX) * (y[i] - meanY)
	}
	return xy / xx
}
