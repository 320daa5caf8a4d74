package flow

import (
	"math"

	"leat/compute"
	"leat/compute/section"
)

// Regime is the kind of flow at a depth.
type Regime uint8

const (
	Subcritical   Regime = iota + 1 // the energy rises with depth, F < 1: tranquil
	CriticalFlow                    // |F - 1| <= 1e-6
	Supercritical                   // F > 1: shooting
	FullFlow                        // a closed section filled to its crown
)

var regimeNames = [...]string{"", "subcritical", "critical", "supercritical", "full"}

func (r Regime) String() string { return regimeNames[r] }

// State is everything that is said of one depth in a channel. A number that cannot be given is NaN.
type State struct {
	Geometry       section.Geometry
	Radius         float64 // hydraulic radius, m
	HydraulicDepth float64 // A/T, m; NaN where full
	CentroidDepth  float64 // depth of the centroid of the wetted area below the surface, measured normal to the bed, m

	// With a law:
	Conveyance       float64 // of one barrel, m3/s: at the discharge where there is one, else at the channel's slope
	UniformDischarge float64 // total, m3/s, where the slope is positive

	// With a discharge:
	Discharge      float64 // total, m3/s
	Velocity       float64 // m/s
	VelocityHead   float64 // alpha*V^2/2g, m
	FroudeNumber   float64 // NaN where full, or where alpha rises so fast that F^2 is negative
	SpecificEnergy float64 // m
	SpecificForce  float64 // of one barrel, m3
	Regime         Regime

	// With both:
	FrictionSlope  float64 // (Q/K)^2
	BedShearStress float64 // rho*g*R*friction slope: the mean over the wetted perimeter, N/m2
	StreamPower    float64 // bed shear stress times velocity, W/m2
}

// State describes a depth, 0 < depth <= the section's height. A discharge of 0 stands for none.
func (c *Channel) State(depth, discharge float64) State {
	var s State
	m := c.Motion(discharge)
	m.Describe(depth, discharge, &s)
	return s
}

// Describe writes into s the state of a depth, 0 < depth <= the section's height, under this motion, whose total discharge in m3/s is told again; one of 0
// stands for none. It is State for callers who describe many depths.
func (m *Motion) Describe(depth, discharge float64, s *State) {
	c, nan := m.channel, math.NaN()
	s.Geometry = m.geometry(depth)
	g := &s.Geometry
	over := 1 / g.Area
	s.Radius, s.HydraulicDepth, s.CentroidDepth = g.Radius(), nan, g.Moment/g.Area
	full := depth >= m.crown
	if !full {
		s.HydraulicDepth = g.Area / g.TopWidth
	}
	s.Conveyance, s.UniformDischarge = nan, nan
	s.Discharge, s.Velocity, s.VelocityHead, s.FroudeNumber, s.SpecificEnergy, s.SpecificForce, s.Regime = 0, 0, 0, nan, 0, 0, 0
	s.FrictionSlope, s.BedShearStress, s.StreamPower = nan, nan, nan
	if c.Law != nil && c.Slope > 0 {
		if m.byPower {
			s.Conveyance = m.power.Conveyance(g.Area, s.Radius)
		} else {
			s.Conveyance = c.Law.AtSlope(c.Wetted(*g), c.Slope).K
		}
		s.UniformDischarge = c.barrels() * s.Conveyance * math.Sqrt(c.Slope)
	}
	if discharge > 0 {
		m.move(s, discharge, over, full)
	} else if c.Law != nil && !(c.Slope > 0) {
		s.Conveyance = c.restingConveyance(*g)
	}
}

// restingConveyance returns the conveyance where there is neither a discharge nor a positive slope: known for laws
// that need none, else NaN.
func (c *Channel) restingConveyance(g section.Geometry) float64 {
	if gentle, steep := c.Law.AtSlope(c.Wetted(g), 1e-6).K, c.Law.AtSlope(c.Wetted(g), 1e-3).K; gentle == steep {
		return gentle
	}
	return math.NaN()
}

// move fills in what a discharge adds to a state.
func (m *Motion) move(s *State, discharge, over float64, full bool) {
	g, c := &s.Geometry, m.channel
	k := m.coefficients(*g)
	s.Discharge = discharge
	s.Velocity = m.discharge / g.Area
	s.VelocityHead = m.velocityHead(&k, over)
	s.SpecificEnergy = g.Depth*m.cosine + s.VelocityHead
	s.SpecificForce = m.force(&k, over, g.Moment)
	s.FroudeNumber, s.Regime = m.regime(m.froudeOver(&k, g.TopWidth, over), full)
	if c.Law == nil {
		return
	}
	if !m.byPower || math.IsNaN(s.Conveyance) { // a power law's conveyance is one at every slope and discharge
		s.Conveyance = m.conveyance(*g)
	}
	if !(s.Conveyance > 0) {
		s.Conveyance = math.NaN()
		return
	}
	ratio := m.discharge / s.Conveyance
	s.FrictionSlope = ratio * ratio
	s.BedShearStress = compute.WaterDensity * c.Gravity * s.Radius * s.FrictionSlope
	s.StreamPower = s.BedShearStress * s.Velocity
}

// regime returns the Froude number (NaN where there is none) and the regime where cos*F^2 is known.
func (m *Motion) regime(term float64, full bool) (froude float64, regime Regime) {
	if full {
		return math.NaN(), FullFlow
	}
	square := term / m.cosine
	froude = math.NaN()
	if square >= 0 {
		froude = math.Sqrt(square)
	}
	switch {
	case math.Abs(froude-1) <= same:
		return froude, CriticalFlow
	case square > 1:
		return froude, Supercritical
	}
	return froude, Subcritical
}
