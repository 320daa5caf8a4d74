package profile

import (
	"strings"
	"testing"

	"leat/compute/flow"
)

// show solves a run and compares its story: the curves in order, with "jump" where one stands and "control" where critical depth inside or at a joint governs.
func show(t *testing.T, name, story string, run *Run) *Answer {
	t.Helper()
	a, err := Solve(run)
	if err != nil {
		t.Errorf("%s: %v", name, err)
		return nil
	}
	t.Logf("%s: %d stations, energy %.1e, momentum %.1e, extent %v", name, len(a.Stations), a.Balance.Energy, a.Balance.Momentum, a.Extent)
	var told []string
	jumps, controls := a.Jumps, a.Controls
	for _, c := range a.Curves {
		if len(jumps) > 0 && jumps[0].Chainage == c.From {
			told, jumps = append(told, "jump"), jumps[1:]
		}
		for len(controls) > 0 && controls[0].Chainage <= c.From+1e-3 {
			if controls[0].Kind == "critical" {
				told = append(told, "control")
			}
			controls = controls[1:]
		}
		name := c.Curve
		if name == "" {
			name = "-"
		}
		told = append(told, name)
	}
	for _, n := range a.Notes {
		if n.Code != "jump_length_for_rectangles" {
			told = append(told, n.Code)
		}
	}
	if got := strings.Join(told, " "); got != story {
		t.Errorf("%s: %s, want %s", name, got, story)
	}
	if !(a.Balance.Energy < 1e-9) || !(a.Balance.Momentum < 1e-11) {
		t.Errorf("%s: balance %+v", name, a.Balance)
	}
	return a
}

func reachOf(c *flow.Channel, length float64) Reach { return Reach{Channel: *c, Length: length} }

// The stories are the classic ones of gradually varied flow (Chow 1959, chapters 9 and 11: common practice).
func TestChains(t *testing.T) {
	mild, steep := trapezoid(t, 2, 1.5, 0.025, 0.001), trapezoid(t, 2, 1.5, 0.025, 0.05)
	show(t, "M1", "M1", &Run{Discharge: 5, Reaches: []Reach{reachOf(mild, 3000)}, Downstream: Boundary{Kind: Depth, Value: 2.5}})
	show(t, "M2 overfall", "M2", &Run{Discharge: 5, Reaches: []Reach{reachOf(mild, 3000)}, Downstream: Boundary{Kind: FreeOverfall}})
	show(t, "S2 out", "control S2 uniform", &Run{Discharge: 5, Reaches: []Reach{reachOf(steep, 300)}, Downstream: Boundary{Kind: FreeOverfall}})
	show(t, "S2 jump S1", "control S2 uniform jump S1", &Run{Discharge: 5, Reaches: []Reach{reachOf(steep, 300)}, Downstream: Boundary{Kind: Depth, Value: 2.5}})
	show(t, "mild steep mild", "M2 control S2 uniform jump S1 uniform", &Run{Discharge: 5, Reaches: []Reach{reachOf(mild, 3000), reachOf(steep, 200), reachOf(mild, 1000)}, Downstream: Boundary{Kind: Normal}})
	show(t, "gate M3 jump", "M3 jump uniform", &Run{Discharge: 5, Reaches: []Reach{reachOf(mild, 1000)}, Upstream: Boundary{Kind: Gate, Opening: 0.3, Contraction: 0.61}, Downstream: Boundary{Kind: Normal}})
	show(t, "gate drowned", "M1 boundary_drowned", &Run{Discharge: 5, Reaches: []Reach{reachOf(mild, 1000)}, Upstream: Boundary{Kind: Gate, Opening: 0.3, Contraction: 0.61}, Downstream: Boundary{Kind: Depth, Value: 4}})
	narrow := trapezoid(t, 0.8, 0.3, 0.025, 0.001)
	show(t, "choke", "M1 M2 control uniform", &Run{Discharge: 5, Reaches: []Reach{reachOf(mild, 1000), reachOf(narrow, 10), reachOf(mild, 1000)}, Downstream: Boundary{Kind: Normal}})
	lateral := reachOf(mild, 1000)
	lateral.Lateral = 0.002
	show(t, "lateral", "M1 uniform", &Run{Discharge: 3, Reaches: []Reach{lateral}, Downstream: Boundary{Kind: Normal}})
	show(t, "lateral overfall", "M1 uniform M2", &Run{Discharge: 3, Reaches: []Reach{lateral}, Downstream: Boundary{Kind: FreeOverfall}})
	side := reachOf(steep, 100)
	side.Lateral = 0.05
	show(t, "side channel", "S1 control S2", &Run{Discharge: 0.1, Reaches: []Reach{side}, Downstream: Boundary{Kind: FreeOverfall}})
	var stations []Station
	for i := range 11 {
		c := trapezoid(t, 2+0.1*float64(i%3), 1.5, 0.025+0.001*float64(i%2), 0)
		stations = append(stations, Station{Channel: *c, Chainage: 100 * float64(i), BedLevel: 10 - 0.1*float64(i) - 0.02*float64(i*i)})
	}
	show(t, "stations", "- - - - - - - - - -", &Run{Discharge: 5, Stations: stations, Downstream: Boundary{Kind: FreeOverfall}})
	show(t, "stations M1", "- - - - - - - - - -", &Run{Discharge: 5, Stations: stations, Downstream: Boundary{Kind: Depth, Value: 3}})
}
