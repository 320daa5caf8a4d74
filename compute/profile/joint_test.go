package profile_test

import (
	"errors"
	"math"
	"math/rand/v2"
	"testing"

	"leat/compute/flow"
	"leat/compute/friction"
	"leat/compute/profile"
	"leat/compute/section"
)

// randomChain draws a chain of up to six reaches with everything that a joint may have.
func randomChain(r *rand.Rand) (*profile.Run, error) {
	run := &profile.Run{Discharge: math.Exp(r.Float64()*6 - 3)}
	size := 0.8 * math.Pow(run.Discharge, 0.4)
	some := func(share, most float64) float64 {
		if r.Float64() < share {
			return most * r.Float64()
		}
		return 0
	}
	n := 2 + r.IntN(5)
	for i := range n {
		w := size * (0.6 + 1.6*r.Float64())
		var s section.Section
		var err error
		switch r.IntN(7) {
		case 0:
			s, err = section.NewRectangular(w)
		case 1, 2:
			s, err = section.NewTrapezoidal(w, 2*r.Float64(), 3*r.Float64())
		case 3:
			s, err = section.NewTriangular(0.5+r.Float64(), 0.5+2*r.Float64())
		case 4:
			s, err = section.NewCircular(1.5 * w)
		case 5:
			s, err = section.NewEgg(1.8*w, r.IntN(2) == 0)
		case 6:
			s, err = section.NewBox(w, 1.2*w, 0)
		}
		if err != nil {
			return nil, err
		}
		law, err := friction.NewManning(0.01 + 0.03*r.Float64())
		if err != nil {
			return nil, err
		}
		slope := math.Exp(-8 + 6*r.Float64())
		switch r.IntN(12) {
		case 0:
			slope = 0
		case 1:
			slope = -slope / 20
		}
		reach := profile.Reach{Channel: flow.Channel{Section: s, Law: law, Slope: slope, Gravity: gravity, Barrels: 1 + r.IntN(5)/3*r.IntN(3)}, Length: size * (2 + 100*r.Float64()*r.Float64())}
		if i > 0 {
			reach.Inflow, reach.Entry = some(0.2, 0.5*run.Discharge), some(0.3, 1.5)
		}
		if i < n-1 {
			reach.Drop, reach.Loss = some(0.3, 1.5*size), some(0.3, 1)
		}
		run.Reaches = append(run.Reaches, reach)
	}
	run.Downstream = profile.Boundary{Kind: profile.FreeOverfall}
	if r.IntN(3) > 0 {
		run.Downstream = profile.Boundary{Kind: profile.Depth, Value: size * (0.3 + 3*r.Float64())}
	}
	if r.IntN(3) == 0 {
		run.Upstream = profile.Boundary{Kind: profile.Depth, Value: size * (0.05 + 0.4*r.Float64())}
	}
	return run, nil
}

// withoutInflow returns the depth in a channel at which the force is the same without an inflow, on the branch asked for.
func withoutInflow(c *flow.Channel, depth, with, without float64, subcritical bool) float64 {
	force := c.State(depth, with).SpecificForce
	critical, _ := c.Critical(without, nil)
	least := c.Section.Height()
	if len(critical) > 0 {
		least = critical[0]
	}
	lo, hi := least, least
	if subcritical {
		for c.State(hi, without).SpecificForce < force {
			hi *= 2
		}
	} else {
		for lo = least / 2; c.State(lo, without).SpecificForce < force; lo /= 2 {
		}
	}
	for range 200 {
		mid := lo + (hi-lo)/2
		if c.State(mid, without).SpecificForce < force == subcritical {
			lo = mid
		} else {
			hi = mid
		}
	}
	return lo + (hi-lo)/2
}

// governed reports whether the least energy of the lower section governs a joint.
func governed(lower *profile.Reach, before float64, surplus func(depth, losses float64) float64) bool {
	with := before + lower.Inflow
	depths, _ := lower.Channel.Critical(with, nil)
	least := lower.Channel.Section.Height()
	if len(depths) > 0 {
		least = depths[0]
	}
	if lower.Inflow > 0 {
		least = withoutInflow(&lower.Channel, least, with, before, true)
	}
	return math.Abs(surplus(least, 1)) < 1e-9
}

// TestJoints holds every joint of random chains to the rules: the energies on both sides balance with the losses, or a least energy governs.
func TestJoints(t *testing.T) {
	counts := map[string]int{}
	worst := 0.0
	joints := 0
	for seed := range uint64(1500) {
		r := rand.New(rand.NewPCG(seed, 99))
		run, err := randomChain(r)
		if err != nil {
			t.Fatal(err)
		}
		answer, err := profile.Solve(run)
		if err != nil {
			var none *profile.NoSolution
			if !errors.As(err, &none) {
				t.Errorf("seed %d: %v", seed, err)
			}
			counts["no solution: "+err.Error()]++
			continue
		}
		start, before := 0.0, run.Discharge
		for i := 1; i < len(run.Reaches); i++ {
			upper, lower := &run.Reaches[i-1], &run.Reaches[i]
			start += upper.Length
			var above, below *profile.Point
			for j := range answer.Stations {
				p := &answer.Stations[j]
				if p.Reach == i-1 {
					above = p
				}
				if p.Reach == i && below == nil {
					below = p
				}
			}
			if above == nil || below == nil || math.Abs(above.Chainage-start) > 1e-9*start || math.Abs(below.Chainage-start) > 1e-9*start {
				t.Errorf("seed %d: no stations at joint %d", seed, i)
				break
			}
			one := upper.Channel.State(above.State.Geometry.Depth, before)
			quiet, shoots := one.Regime != flow.Supercritical, below.State.Regime == flow.Supercritical
			// surplus is the energy left over when the flow passes from the one depth to another below, as a share of what it has.
			surplus := func(depth float64, losses float64) float64 {
				head := lower.Channel.State(depth, before)
				return (one.SpecificEnergy + upper.Drop - losses*upper.Loss*math.Abs(one.VelocityHead-head.VelocityHead) - head.SpecificEnergy -
					losses*lower.Entry*head.VelocityHead) / one.SpecificEnergy
			}
			// without the inflow: on the branch of the flow below, and where that is critical on either
			var depths []float64
			depth := below.State.Geometry.Depth
			switch {
			case lower.Inflow == 0:
				depths = []float64{depth}
			case below.State.Regime == flow.CriticalFlow:
				depths = []float64{withoutInflow(&lower.Channel, depth, before+lower.Inflow, before, true), withoutInflow(&lower.Channel, depth, before+lower.Inflow, before, false)}
			default:
				depths = []float64{withoutInflow(&lower.Channel, depth, before+lower.Inflow, before, !shoots)}
			}
			left := math.Inf(-1)
			for _, d := range depths {
				if x := surplus(d, 1); math.Abs(x) <= 1e-9 || math.Abs(left) > 1e-9 && x > left {
					left = x
				}
			}
			critical := func(s *flow.State, c *flow.Channel) bool {
				if s.Regime == flow.FullFlow {
					return s.Geometry.Depth <= c.Section.Height()*(1+1e-9)
				}
				return math.Abs(s.FroudeNumber-1) < 1e-6
			}
			name := one.Regime.String() + " to " + below.State.Regime.String()
			switch {
			case math.Abs(left) <= 1e-9:
				worst = max(worst, math.Abs(left))
				counts["balance, "+name]++
				if quiet && shoots && !critical(&one, &upper.Channel) {
					t.Errorf("seed %d joint %d: %s without critical depth: %g to %g", seed, i, name, one.Geometry.Depth, depth)
				}
			case left > 0 && quiet && !shoots && critical(&one, &upper.Channel):
				counts["a fall onto deeper water, "+name]++
			case left > 0 && quiet && !shoots && governed(lower, before, surplus):
				// the lower section's least energy asks for more with its losses than the deeper water below
				counts["least energy with its losses above deeper water, "+name]++
			case !quiet && !shoots && surplus(depths[0], 0) > 0:
				counts["turns, "+name]++
			default:
				t.Errorf("seed %d joint %d: %s with a surplus of %.3g: depths %.12g and %.12g, inflow %g, drop %g, losses %g and %g, barrels %d and %d", seed, i, name, left,
					one.Geometry.Depth, depth, lower.Inflow, upper.Drop, upper.Loss, lower.Entry, upper.Channel.Barrels, lower.Channel.Barrels)
			}
			before += lower.Inflow
			joints++
		}
	}
	for what, n := range counts {
		t.Logf("%5d %s", n, what)
	}
	if joints < 4000 {
		t.Errorf("%d joints only", joints)
	}
	t.Logf("worst balance %.2g", worst)
}
