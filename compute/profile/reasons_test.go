package profile

import (
	"errors"
	"math"
	"math/rand/v2"
	"strings"
	"testing"

	"leat/compute/flow"
	"leat/compute/friction"
	"leat/compute/section"
)

// Runs that a random search once found wrong, or without an answer that there is.
func TestRunsOnceWrong(t *testing.T) {
	for seed, why := range map[uint64]string{
		2408: "a gap of the energy at a bench in a reach", 4443: "between stations", 9839: "of supercritical flow", 11582: "on a falling bed",
		12813: "while the depth rises", 17202: "and falls",
		13497: "critical depth next to a crown",
		31815: "a passage through critical depth", 41695: "one from supercritical to subcritical flow", 48774: "and another", 50217: "an upstream depth between two critical ones",
		1172: "critical depth jumps inside an interval, and the flow passes through it", 5673: "under lateral inflow", 8569: "and drowns the joint above", 19567: "behind a jump",
	} {
		run, err := randomRun(rand.New(rand.NewPCG(seed, 11)))
		if err != nil {
			t.Fatal(err)
		}
		a, err := Solve(run)
		if err != nil {
			t.Errorf("seed %d, %s: %v", seed, why, err)
			continue
		}
		head := 0.0
		for _, s := range a.Stations {
			head = math.Max(head, s.State.SpecificEnergy)
		}
		if !(a.Balance.Energy <= 1e-9*head) {
			t.Errorf("seed %d, %s: energy residual %.1e of the head %.3g", seed, why, a.Balance.Energy, head)
		}
	}
}

// A reason without a solution says which reach or station it comes from.
func TestReasonsNameTheirMember(t *testing.T) {
	table, err := section.NewTabulated([][4]float64{{0.5, 1, 3, 2}, {1, 2, 4, 2}})
	if err != nil {
		t.Fatal(err)
	}
	manning, err := friction.NewManning(0.03)
	if err != nil {
		t.Fatal(err)
	}
	ditch, err := section.NewTrapezoidal(2, 1, 1)
	if err != nil {
		t.Fatal(err)
	}
	channel := func(s section.Section, slope float64) flow.Channel {
		return flow.Channel{Section: s, Law: manning, Slope: slope, Gravity: 9.80665, Barrels: 1}
	}
	random := func(seed uint64) *Run {
		run, err := randomRun(rand.New(rand.NewPCG(seed, 11)))
		if err != nil {
			t.Fatal(err)
		}
		return run
	}
	deep := Boundary{Kind: Depth, Value: 1.5}
	for _, row := range []struct {
		name, code, member string
		run                *Run
	}{
		{"a table at the end of the upper reach", "above_section", "reaches/0/section",
			&Run{Discharge: 1, Reaches: []Reach{{Channel: channel(table, 0.001), Length: 50}, {Channel: channel(ditch, 0.001), Length: 50}}, Downstream: deep}},
		{"a table further up", "above_section", "reaches/0/section",
			&Run{Discharge: 1, Reaches: []Reach{{Channel: channel(table, -0.01), Length: 50}, {Channel: channel(ditch, 0.001), Length: 50}}, Downstream: Boundary{Kind: Depth, Value: 0.9}}},
		{"a table at a station", "above_section", "stations/1/section",
			&Run{Discharge: 1, Stations: []Station{{Channel: channel(ditch, 0), BedLevel: 0.1}, {Channel: channel(table, 0), Chainage: 50, BedLevel: 0.05},
				{Channel: channel(ditch, 0), Chainage: 100}}, Downstream: deep}},
		{"a table at the boundary", "above_section", "downstream",
			&Run{Discharge: 1, Reaches: []Reach{{Channel: channel(table, 0.001), Length: 50}}, Downstream: deep}},
		{"a weir above a table", "above_section", "downstream",
			&Run{Discharge: 1, Reaches: []Reach{{Channel: channel(table, 0.001), Length: 50}}, Downstream: Boundary{Kind: BroadCrested, CrestHeight: 0.9, CrestWidth: 1}}},
		{"coefficients that disagree, in a reach", "no_jump", "reaches/1/roughness", random(2824)},
		{"and between stations", "no_jump", "stations/1/roughness", random(5755)},
		{"a bench too rough for water as shallow as that above it", "no_conveyance", "reaches/1/roughness", random(41116)},
		{"an energy that is least at a break", "no_critical_depth", "stations/0/section", random(15625)},
	} {
		_, err := Solve(row.run)
		var reason *NoSolution
		if !errors.As(err, &reason) || reason.Code != row.code || reason.Member != row.member || !strings.HasSuffix(reason.Detail, ".") {
			t.Errorf("%s: %+v, want %s at %s", row.name, err, row.code, row.member)
			if reason != nil {
				t.Logf("%s at %q", reason.Code, reason.Member)
			}
		}
	}
}
