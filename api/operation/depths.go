package operation

import (
	"math"

	"leat/api/wire"
	"leat/compute/flow"
)

// Depths is the operation depths: the characteristic depths of one section.
var Depths = Operation{Name: "depths", Form: (*wire.DepthsAnswer)(nil), Request: (*wire.DepthsRequest)(nil), Solve: func(body []byte, options Options) (Solved, *wire.Problem) {
	request := depthsRequests.take()
	solved, problem := Run("depths", body, options, request, &request.Common, func() (wire.Answer, *wire.Problem) {
		return solveDepths(request, options.Brief)
	})
	depthsRequests.leave(request) // not after a panic
	return solved, problem
}}

var depthsRequests requests[wire.DepthsRequest]

func solveDepths(r *wire.DepthsRequest, brief bool) (wire.Answer, *wire.Problem) {
	in := inputs{&r.Common, r.Barrels, &r.Section, &r.Roughness, r.BedSlope}
	c, problem := in.channel()
	if problem != nil {
		return nil, problem
	}
	if r.Depth.Given {
		if fault, above := aboveSection(&c, r.Depth.Value, "/depth"); above {
			return nil, wire.InvalidRequest(fault)
		}
	}
	var w warnings
	w.doubt("", &in)
	var room flow.Room
	var a wire.DepthsAnswer
	if _, problem := describeDepths(&a, &c, r.Discharge.Value, r.Depth, depthsPlaces{"/section", "/discharge"}, brief, &room, &w); problem != nil {
		return nil, problem
	}
	a.Warnings = w.done()
	return &a, nil
}

// depthsPlaces are the members of a request that an answer's warnings point at.
type depthsPlaces struct {
	bank      string // of a depth above the bank
	discharge string
}

// describeDepths solves one discharge (total, m3/s) and tells in a all that is said of it, with a depth that occurs there if one is given; warnings go to w.
func describeDepths(a *wire.DepthsAnswer, c *flow.Channel, q float64, depth wire.Number, at depthsPlaces, brief bool, room *flow.Room, w *warnings) (flow.Depths, *wire.Problem) {
	d := c.Depths(q, room)
	if d.NormalAbsent == flow.Unsolved || d.CriticalAbsent == flow.Unsolved {
		return d, wire.Internal("The solver did not converge on this request; nothing is given rather than a guess.")
	}
	*a = wire.DepthsAnswer{
		Brief:       brief,
		NormalDepth: math.NaN(), CriticalDepth: math.NaN(),
		NormalAbsent: d.NormalAbsent.String(), CriticalAbsent: d.CriticalAbsent.String(),
		NormalVelocity: math.NaN(), NormalFroudeNumber: math.NaN(), NormalBedShearStress: math.NaN(),
		Fill: d.Fill, SlopeClass: d.Class.String(), CriticalSlope: d.CriticalSlope,
		Capacity: wire.Capacity{
			Known: !math.IsNaN(d.Capacity.Discharge), Discharge: d.Capacity.Discharge, Depth: d.Capacity.Depth,
			FullDischarge: d.FullDischarge, Ratio: d.Ratio,
		},
		Freeboard: d.Freeboard, Closed: c.Section.Closed(), Surcharged: d.Surcharged, FullFrictionSlope: d.FullFriction,
	}
	if len(d.Normal) > 0 {
		s := c.State(d.Normal[0], q)
		a.NormalDepth = s.Geometry.Depth
		a.NormalVelocity, a.NormalFroudeNumber, a.NormalBedShearStress = s.Velocity, s.FroudeNumber, s.BedShearStress
		w.state(c, &s, at.bank)
	}
	if len(d.Critical) > 0 {
		a.CriticalDepth = d.Critical[0]
	}
	if !brief {
		a.Normal, a.Critical = states(c, d.Normal, q), states(c, d.Critical, q)
	}
	w.depths(&d, at.discharge)
	if depth.Given {
		given, problem := given(c, &d, depth.Value, q, w)
		if problem != nil {
			return d, problem
		}
		a.Given = given
	}
	return d, nil
}

// depths adds what is to be said of the characteristic depths.
func (w *warnings) depths(d *flow.Depths, discharge string) {
	if d.Surcharged {
		w.add("surcharged", discharge, "The discharge is more than the closed section carries with a free surface; under pressure its depth is governed from downstream.")
	}
	if len(d.Normal) > 1 {
		w.add("several_normal_depths", discharge, "The discharge flows uniformly at more than one depth; normal_depth is the lowest.")
	}
	if len(d.Critical) > 1 {
		w.add("several_critical_depths", discharge, "The specific energy has more than one minimum; critical_depth is the lowest of their depths.")
	}
}

// given describes the depth that a request says occurs there.
func given(c *flow.Channel, d *flow.Depths, depth, q float64, w *warnings) (wire.DepthsGiven, *wire.Problem) {
	s := c.State(depth, q)
	w.state(c, &s, "/depth")
	g := wire.DepthsGiven{
		Present: true, State: state(&s, members(c, true)), AlternateDepth: math.NaN(), SequentDepth: math.NaN(),
		Curve: c.CurveName(&s, d.Class, d.Normal),
	}
	if s.Regime == flow.FullFlow {
		w.add("no_conjugate_depths", "/depth", "The section is full at the depth given: it has no alternate or sequent depth there.")
		return g, nil
	}
	alternate, absent := c.Alternate(q, depth)
	if absent == flow.Unsolved {
		return g, wire.Internal("The search for the alternate depth did not converge; nothing is given rather than a guess.")
	}
	g.AlternateDepth = alternate
	if math.IsNaN(alternate) {
		w.add("alternate_depth_absent", "/depth", "There is no alternate depth. "+absent.String())
	}
	sequent, absent := c.Sequent(q, depth)
	if absent == flow.Unsolved {
		return g, wire.Internal("The search for the sequent depth did not converge; nothing is given rather than a guess.")
	}
	g.SequentDepth = sequent
	if math.IsNaN(sequent) {
		w.add("sequent_depth_absent", "/depth", "There is no sequent depth. "+absent.String())
	}
	return g, nil
}
