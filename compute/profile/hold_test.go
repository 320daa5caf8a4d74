package profile

import (
	"math"
	"testing"

	"leat/compute/flow"
	"leat/compute/friction"
	"leat/compute/section"
)

// terraced returns a channel 2 m wide with walls of 1 to 1 up to a bench on its right at 1 m, 6 m wide, which rises by so much to its outer edge. The zones part
// in the middle of the bed and of the bench, so that as the bench is covered the perimeter of the second zone jumps, its conveyance falls, and alpha changes:
// it rises where the second is the rougher one already, and falls where the first is.
func terraced(t *testing.T, rise, slope, inner float64) flow.Channel {
	t.Helper()
	s, err := section.NewSurveyed([][2]float64{{-2, 2.5}, {0, 0}, {2, 0}, {3, 1}, {9, 1 + rise}, {11, 3}})
	if err != nil {
		t.Fatal(err)
	}
	law, err := friction.NewZones(s.(section.Zoned), []float64{1, 6}, []float64{inner, 0.03, 0.03}, friction.Divided)
	if err != nil {
		t.Fatal(err)
	}
	return flow.Channel{Section: s, Law: law, Slope: slope, Gravity: 9.80665, Barrels: 1}
}

// A level bench is the limit of one that rises a little: as its rise vanishes the depths of the one must come to those of the other, where the energy crosses
// a gap as where it does not, in reaches as between stations. While it crosses, friction lies between its values below and above the bench; where the bed falls much
// more than friction takes, the limit does not depend on it.
func TestLevelBenchIsALimit(t *testing.T) {
	for _, row := range []struct {
		name     string
		q, slope float64
		up, down Boundary
		length   float64
		inner    float64
		held     bool
		within   float64 // m: what friction between its two values leaves open while the energy crosses
	}{
		{"backwater on a mild slope", 2, 0.002, Boundary{}, Boundary{Kind: Depth, Value: 1.4}, 600, 0.03, true, 1e-3},
		{"backwater on a steep slope", 1, 0.1, Boundary{}, Boundary{Kind: Depth, Value: 1.5}, 12, 0.03, true, 0},
		{"drawdown", 3, 0.0005, Boundary{}, Boundary{Kind: CriticalFlow}, 900, 0.03, true, 2e-3},
		{"backwater on a steep slope, alpha falling", 1, 0.1, Boundary{}, Boundary{Kind: Depth, Value: 1.5}, 12, 0.06, false, 0},
	} {
		for _, stations := range []bool{false, true} {
			depths := func(rise float64) (out []float64, held float64) {
				c := terraced(t, rise, row.slope, row.inner)
				run := &Run{Discharge: row.q, Upstream: row.up, Downstream: row.down}
				if stations {
					other := terraced(t, rise, row.slope, row.inner) // equal, but not the very same, so that the interval is not prismatic
					run.Stations = []Station{{Channel: c, BedLevel: row.slope * row.length}, {Channel: other, Chainage: row.length}}
				} else {
					run.Reaches = []Reach{{Channel: c, Length: row.length}}
				}
				for x := 0.0; x <= row.length; x += row.length / 40 {
					run.Report.At = append(run.Report.At, x)
				}
				a, err := Solve(run)
				if err != nil {
					t.Fatalf("%s, rise %g: %v", row.name, rise, err)
				}
				head := 0.0
				for _, s := range a.Stations {
					out = append(out, s.State.Geometry.Depth)
					head = max(head, s.State.SpecificEnergy)
				}
				if !(a.Balance.Energy <= 1e-9*head) {
					t.Errorf("%s, rise %g: energy balance %.1e", row.name, rise, a.Balance.Energy)
				}
				ch := &chain{run: run}
				if err := ch.lay(); err != nil {
					t.Fatal(err)
				}
				if err := ch.sweepUp(); err != nil {
					t.Fatal(err)
				}
				for _, l := range ch.legs {
					for _, s := range l.subs {
						for _, p := range s.panels {
							if p.held {
								held += math.Abs(p.x1 - p.x0)
							}
						}
					}
				}
				return out, held
			}
			level, held := depths(0)
			if (held > 0) != row.held {
				t.Errorf("%s, stations %v: the depth is held over %g m", row.name, stations, held)
			}
			var off [3]float64
			for i, rise := range [3]float64{1e-2, 1e-3, 1e-4} {
				rising, _ := depths(rise)
				if len(rising) != len(level) {
					t.Fatalf("%s: %d and %d stations", row.name, len(rising), len(level))
				}
				for k := range level {
					off[i] = max(off[i], math.Abs(rising[k]-level[k]))
				}
			}
			t.Logf("%s, stations %v: held over %.4g m, off by %.2e, %.2e, %.2e", row.name, stations, held, off[0], off[1], off[2])
			if row.within == 0 && !(off[1] <= 0.15*off[0] && off[2] <= 0.15*off[1]) || row.within > 0 && !(off[2] <= row.within) {
				t.Errorf("%s, stations %v: depths differ by %.1e, %.1e, %.1e from those of benches that rise by 1e-2, 1e-3, 1e-4 m: no limit", row.name, stations, off[0], off[1], off[2])
			}
		}
	}
}

// A joint or a boundary may ask for an energy that no depth has: then the depth stands at the break.
func TestEnergyInAGap(t *testing.T) {
	c := terraced(t, 0, 0.002, 0.03)
	s := sideOf(&c, 2)
	below, above := s.energy(1), s.energy(justAbove(1))
	if !(above > below*(1+1e-6)) {
		t.Fatalf("no gap: %v below and %v above the bench", below, above)
	}
	for _, row := range []struct{ share, from, to float64 }{{-0.01, 0.9, 1 - 1e-9}, {0.01, 1, 1}, {0.5, 1, 1}, {0.99, 1, 1}, {1.01, 1 + 1e-9, 1.1}} {
		depth, ok, err := s.subcritical(below+row.share*(above-below), 0, 0)
		if err != nil || !ok || !(depth >= row.from && depth <= row.to) {
			t.Errorf("share %g of the gap: depth %v, %v, %v; want %g to %g", row.share, depth, ok, err, row.from, row.to)
		}
	}
	// Supercritical flow has such a gap where alpha falls as the bench is covered: the first zone is the rougher one.
	c = terraced(t, 0, 0.002, 0.06)
	s = sideOf(&c, 12)
	below, above = s.energy(1), s.energy(justAbove(1))
	if !(above < below*(1-1e-6)) {
		t.Fatalf("no gap: %v below and %v above the bench", below, above)
	}
	for _, row := range []struct{ share, from, to float64 }{{-0.01, 0.9, 1 - 1e-9}, {0.01, 1, 1}, {0.99, 1, 1}, {1.01, 1 + 1e-9, 1.1}} {
		depth, ok := s.supercritical(below+row.share*(above-below), 0, 0, 0)
		if !ok || !(depth >= row.from && depth <= row.to) {
			t.Errorf("supercritical, share %g of the gap: depth %v, %v; want %g to %g", row.share, depth, ok, row.from, row.to)
		}
	}
}
