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

// A loss is a share of the change of velocity head, and between like reaches nothing changes: the same depth asks for just the energy that arrives. Near it
// every other depth asks for more, so that the last places must not decide.
func TestLossOfNoChangeStopsNothing(t *testing.T) {
	s, err := section.NewRectangular(4)
	if err != nil {
		t.Fatal(err)
	}
	law, err := friction.NewManning(0.015)
	if err != nil {
		t.Fatal(err)
	}
	for k := range 200 {
		q := 2 + 0.11*float64(k)
		c := flow.Channel{Section: s, Law: law, Gravity: 9.80665}
		slope, _ := c.CriticalSlope(q)
		c.Slope = 7 * slope
		run := &Run{Discharge: q, Upstream: Boundary{Kind: Normal}, Downstream: Boundary{Kind: FreeOverfall}}
		for i := range 4 {
			run.Reaches = append(run.Reaches, Reach{Channel: c, Length: 50 + 31.7*float64(i), Loss: 0.9})
		}
		run.Reaches[3].Loss = 0
		a, err := Solve(run)
		if err != nil {
			t.Fatalf("%v m3/s: %v", q, err)
		}
		normal := a.Reaches[0].NormalDepth
		for _, p := range a.Stations {
			if !(math.Abs(p.State.Geometry.Depth-normal) <= 1e-12*normal) {
				t.Errorf("%v m3/s: %v deep at %v, not %v (F %v)", q, p.State.Geometry.Depth, p.Chainage, normal, p.State.FroudeNumber)
			}
		}
		if len(a.Jumps) > 0 || len(a.Notes) > 0 {
			t.Errorf("%v m3/s: %+v, %+v", q, a.Jumps, a.Notes)
		}
	}
}

// Where the lower of two like reaches begins at critical depth, that depth satisfies the joint and, with a loss, a deeper one does; the deepest counts, whatever
// the last places of the first say. In a rectangle with y in critical depths, y + (1 + share)/(2 y^2) = (3 + share)/2.
func TestDeepestOfTwoCounts(t *testing.T) {
	s, err := section.NewRectangular(4)
	if err != nil {
		t.Fatal(err)
	}
	law, err := friction.NewManning(0.015)
	if err != nil {
		t.Fatal(err)
	}
	for k := range 200 {
		q, share := 2+0.11*float64(k), 0.2+0.003*float64(k)
		c := flow.Channel{Section: s, Law: law, Gravity: 9.80665}
		sides := sideOf(&c, q)
		critical, err := sides.critical()
		if err != nil {
			t.Fatal(err)
		}
		j := joint{upper: sides, lower: sides, with: sides, loss: share}
		a, err := j.above(math.NaN())
		if err != nil {
			t.Fatal(err)
		}
		y := a.depth / critical
		if off := y + (1+share)/(2*y*y) - (3+share)/2; !(math.Abs(off) <= 1e-12) || !(y > 1.01) || !a.lowerControl {
			t.Errorf("%v m3/s, share %v: %+v, %v of critical depth, off by %.1e", q, share, a, y, off)
		}
	}
}
