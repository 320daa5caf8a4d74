package profile

import (
	"math"
	"testing"

	"leat/compute/flow"
	"leat/compute/friction"
	"leat/compute/section"
)

// A steep channel cut into reaches that are all alike bears supercritical flow at normal depth through every cut, as it would uncut: nothing there can hold
// it up. Its coefficients are those of compound sections, of which the energy's is the larger, so that where the energy is least the force is not, and the
// subcritical flow of critical depth at the end of a reach has more force than the flow that arrives.
func TestLikeReachesHoldNothingUp(t *testing.T) {
	s, err := section.NewTrapezoidal(3, 1, 2)
	if err != nil {
		t.Fatal(err)
	}
	law, err := friction.NewManning(0.02)
	if err != nil {
		t.Fatal(err)
	}
	for k := range 200 {
		q := 2 + 0.37*float64(k)
		c := flow.Channel{Section: s, Law: law, Gravity: 9.80665, EnergyCoefficient: 1.4, MomentumCoefficient: 1.1}
		slope, known := c.CriticalSlope(q)
		if !known {
			t.Fatalf("%v m3/s: no critical slope", q)
		}
		c.Slope = 1.05 * slope
		run := &Run{Discharge: q, Upstream: Boundary{Kind: Normal}, Downstream: Boundary{Kind: FreeOverfall}}
		for i := range 5 {
			run.Reaches = append(run.Reaches, Reach{Channel: c, Length: 100 + 31.7*float64(i)})
		}
		a, err := Solve(run)
		if err != nil {
			t.Fatalf("%v m3/s: %v", q, err)
		}
		normal := a.Reaches[0].NormalDepth
		for _, p := range a.Stations {
			if !(math.Abs(p.State.Geometry.Depth-normal) <= 1e-12*normal) {
				t.Errorf("%v m3/s: %v deep at %v, not %v", q, p.State.Geometry.Depth, p.Chainage, normal)
			}
		}
		for _, at := range a.Controls {
			if at.Chainage > 0 {
				t.Errorf("%v m3/s: %+v", q, at)
			}
		}
	}
}
