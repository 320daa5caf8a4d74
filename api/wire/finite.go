package wire

import "math"

// The last look at an answer. Bounds on requests make every number finite that is given at all; a number that came out otherwise is a fault of ours, and
// an answer with it would be told as if that number did not apply.

// finite reports whether none of some numbers is infinite or NaN. Sums of what requests may lead to are far from overflowing.
func finite(values ...float64) bool {
	sum := 0.0
	for _, v := range values {
		sum += v * 0
	}
	return sum == 0
}

// finiteOrNaN reports whether none of some numbers is infinite: NaN is what cannot be given.
func finiteOrNaN(values ...float64) bool {
	for _, v := range values {
		if math.IsInf(v, 0) {
			return false
		}
	}
	return true
}

// nonFinite names a group of members of which one should be a number and is none; empty where all is well. A state without a depth is told by its discharge alone.
func (s *State) nonFinite() string {
	switch {
	case math.IsNaN(s.Depth) && math.IsNaN(s.Area):
	case !finite(s.Depth, s.Area, s.WettedPerimeter, s.HydraulicRadius, s.TopWidth, s.CentroidDepth) || !finiteOrNaN(s.HydraulicDepth):
		return "the geometry at a depth"
	case s.Members&WithFlow != 0 && !math.IsNaN(s.Discharge) && (!finite(s.Discharge, s.Velocity, s.VelocityHead, s.SpecificEnergy, s.SpecificForce) || !finiteOrNaN(s.FroudeNumber)):
		return "the flow at a depth"
	case !finiteOrNaN(s.Conveyance, s.UniformDischarge, s.FrictionSlope, s.BedShearStress, s.StreamPower):
		return "the friction at a depth"
	}
	return ""
}

func nonFiniteStates(states []State) string {
	for i := range states {
		if what := states[i].nonFinite(); what != "" {
			return what
		}
	}
	return ""
}

// NonFinite says what of the answer should be a number and is none.
func (a *SectionAnswer) NonFinite() string { return nonFiniteStates(a.States) }

// NonFinite says what of the answer should be a number and is none.
func (a *RatingAnswer) NonFinite() string { return nonFiniteStates(a.States) }

// NonFinite says what of the answer should be a number and is none.
func (a *DepthsAnswer) NonFinite() string {
	switch {
	case a.NormalAbsent == "" && (!finite(a.NormalDepth, a.NormalVelocity, a.NormalBedShearStress) || !finiteOrNaN(a.NormalFroudeNumber)):
		return "normal_depth and what goes with it"
	case a.CriticalAbsent == "" && !finite(a.CriticalDepth):
		return "critical_depth"
	case a.Capacity.Known && !finite(a.Capacity.Discharge, a.Capacity.Depth):
		return "capacity"
	case !finiteOrNaN(a.Fill, a.Freeboard, a.CriticalSlope, a.FullFrictionSlope, a.Capacity.FullDischarge, a.Capacity.Ratio):
		return "fill, freeboard or a slope"
	case a.Given.Present && !finiteOrNaN(a.Given.AlternateDepth, a.Given.SequentDepth):
		return "alternate_depth or sequent_depth"
	}
	if what := nonFiniteStates(a.Normal); what != "" {
		return what
	}
	if what := nonFiniteStates(a.Critical); what != "" || !a.Given.Present {
		return what
	}
	return a.Given.State.nonFinite()
}

// NonFinite says what of the answer should be a number and is none.
func (a *AppraisalAnswer) NonFinite() string {
	for i := range a.Flows {
		f := &a.Flows[i]
		if what := f.Depths.NonFinite(); what != "" {
			return what
		}
		for j := range f.Findings {
			if v := &f.Findings[j]; !finiteOrNaN(v.Value, v.Limit) {
				return "a finding"
			}
		}
	}
	return ""
}

// NonFinite says what of the answer should be a number and is none.
func (a *ProfileAnswer) NonFinite() string {
	for i := range a.Stations {
		s := &a.Stations[i]
		if !finite(s.Chainage, s.BedLevel, s.WaterLevel, s.EnergyLevel, s.State.Depth) {
			return "a level"
		}
		if what := s.State.nonFinite(); what != "" {
			return what
		}
	}
	for i := range a.Jumps {
		if j := &a.Jumps[i]; !finite(j.Chainage, j.UpstreamDepth, j.DownstreamDepth) || !finiteOrNaN(j.FroudeNumber, j.EnergyLoss, j.Length) {
			return "a jump"
		}
	}
	for i := range a.Controls {
		if c := &a.Controls[i]; !finite(c.Chainage, c.Depth) {
			return "a control"
		}
	}
	if !finiteOrNaN(a.Balance.Energy, a.Balance.Momentum, a.Extent) {
		return "balance or extent"
	}
	return ""
}
