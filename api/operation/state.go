package operation

import (
	"leat/api/wire"
	"leat/compute/flow"
)

// members returns the groups of members that states of a channel have.
func members(c *flow.Channel, discharge bool) wire.StateMembers {
	var m wire.StateMembers
	if c.Law != nil {
		m |= wire.WithConveyance
		if c.Slope > 0 {
			m |= wire.WithUniform
		}
	}
	if discharge {
		m |= wire.WithFlow
		if c.Law != nil {
			m |= wire.WithFriction
		}
	}
	return m
}

// state returns a state in the contract's terms.
func state(s *flow.State, m wire.StateMembers) wire.State {
	g := s.Geometry
	return wire.State{
		Members: m,
		Depth:   g.Depth, Area: g.Area, WettedPerimeter: g.Perimeter, HydraulicRadius: s.Radius,
		TopWidth: g.TopWidth, HydraulicDepth: s.HydraulicDepth, CentroidDepth: s.CentroidDepth,
		Conveyance: s.Conveyance, UniformDischarge: s.UniformDischarge, Discharge: s.Discharge,
		Velocity: s.Velocity, VelocityHead: s.VelocityHead, FroudeNumber: s.FroudeNumber,
		SpecificEnergy: s.SpecificEnergy, SpecificForce: s.SpecificForce, Regime: s.Regime.String(),
		FrictionSlope: s.FrictionSlope, BedShearStress: s.BedShearStress, StreamPower: s.StreamPower,
	}
}

// states appends the states at some depths of one discharge (total; 0 for none).
func states(c *flow.Channel, depths []float64, discharge float64) []wire.State {
	if len(depths) == 0 {
		return nil
	}
	m := members(c, discharge > 0)
	out := make([]wire.State, len(depths))
	for i, depth := range depths {
		s := c.State(depth, discharge)
		out[i] = state(&s, m)
	}
	return out
}
