package operation

import (
	"math"
	"strconv"

	"leat/api/wire"
	"leat/compute/flow"
)

// Rating is the operation rating: a depth-discharge table.
var Rating = Operation{Name: "rating", Form: (*wire.RatingAnswer)(nil), Request: (*wire.RatingRequest)(nil), Solve: func(body []byte, options Options) (Solved, *wire.Problem) {
	var request wire.RatingRequest
	return Run("rating", body, options, &request, &request.Common, func() (wire.Answer, *wire.Problem) {
		return solveRating(&request, &options)
	})
}}

func solveRating(r *wire.RatingRequest, options *Options) (wire.Answer, *wire.Problem) {
	in := inputs{&r.Common, r.Barrels, &r.Section, &r.Roughness, r.BedSlope}
	c, problem := in.channel()
	if problem != nil {
		return nil, problem
	}
	if len(r.Discharges) > 0 {
		return rateDischarges(&c, r, &in, options.begin())
	}
	return rateDepths(&c, r, &in, options.begin())
}

// rateDepths gives the discharge that flows uniformly, or critically, at evenly spaced depths.
func rateDepths(c *flow.Channel, r *wire.RatingRequest, in *inputs, checkpoint func() error) (wire.Answer, *wire.Problem) {
	if fault, above := aboveSection(c, r.ToDepth.Value, "/to_depth"); above {
		return nil, wire.InvalidRequest(fault)
	}
	var w warnings
	w.doubt("", in)
	a := &wire.RatingAnswer{States: make([]wire.State, r.Count.Value)}
	for i := range a.States {
		if i%betweenCheckpoints == 0 {
			if err := checkpoint(); err != nil {
				return nil, stopped(err)
			}
		}
		depth := evenly(r.FromDepth.Value, r.ToDepth.Value, i, r.Count.Value)
		var q float64
		var absent flow.Absence
		if r.Kind == wire.RatingUniform {
			q, absent = c.UniformAt(depth)
		} else {
			q, absent = c.CriticalAt(depth)
		}
		s := c.State(depth, q)
		if absent != flow.Present {
			w.add("discharge_absent", "/kind", "There is no "+string(r.Kind)+" flow at this depth. "+absent.String())
			a.States[i] = withoutFlow(state(&s, members(c, true)|wire.WithDischarge))
			continue
		}
		w.state(c, &s, "/section")
		a.States[i] = state(&s, members(c, true)|wire.WithDischarge)
	}
	a.Warnings = w.done()
	return a, nil
}

// evenly returns the i-th of n evenly spaced values, both ends exact.
func evenly(from, to float64, i, n int) float64 {
	if i == n-1 {
		return to
	}
	return from + (to-from)*(float64(i)/float64(n-1))
}

// withoutFlow returns a state in which everything that needs a discharge is unknown.
func withoutFlow(s wire.State) wire.State {
	none := math.NaN()
	s.Discharge, s.Velocity, s.VelocityHead, s.FroudeNumber, s.SpecificEnergy, s.SpecificForce = none, none, none, none, none, none
	s.FrictionSlope, s.BedShearStress, s.StreamPower, s.Regime = none, none, none, ""
	return s
}

// rateDischarges gives the lowest normal, or critical, depth of each discharge.
func rateDischarges(c *flow.Channel, r *wire.RatingRequest, in *inputs, checkpoint func() error) (wire.Answer, *wire.Problem) {
	var w warnings
	w.doubt("", in)
	var room [8]float64
	m := members(c, true) | wire.WithDischarge
	a := &wire.RatingAnswer{States: make([]wire.State, len(r.Discharges))}
	for i, q := range r.Discharges {
		if err := checkpoint(); err != nil {
			return nil, stopped(err)
		}
		find, name := c.Normal, "normal"
		if r.Kind == wire.RatingCritical {
			find, name = c.Critical, "critical"
		}
		depths, absent := find(q, room[:0])
		if absent == flow.Unsolved {
			return nil, wire.Internal("The solver did not converge on one of the discharges; nothing is given rather than a guess.")
		}
		if absent != flow.Present {
			w.add("depth_absent", "/discharges/"+strconv.Itoa(i), "There is no "+name+" depth at this discharge. "+absent.String())
			a.States[i] = withoutDepth(q, m)
			continue
		}
		s := c.State(depths[0], q)
		w.state(c, &s, "/discharges/"+strconv.Itoa(i))
		a.States[i] = state(&s, m)
	}
	a.Warnings = w.done()
	return a, nil
}

// withoutDepth returns the state of a discharge that has no depth: all else unknown.
func withoutDepth(q float64, m wire.StateMembers) wire.State {
	none := math.NaN()
	s := withoutFlow(wire.State{Members: m, Depth: none, Area: none, WettedPerimeter: none, HydraulicRadius: none, TopWidth: none,
		HydraulicDepth: none, CentroidDepth: none, Conveyance: none, UniformDischarge: none})
	s.Discharge = q
	return s
}
