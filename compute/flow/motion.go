package flow

import (
	"math"

	"leat/compute/friction"
	"leat/compute/section"
)

// Motion is a discharge in a channel, with what its energy and force need. It belongs to one barrel.
type Motion struct {
	channel   *Channel
	discharge float64 // of one barrel, m3/s
	head      float64 // discharge squared over gravity, m5
	cosine    float64
	crown     float64 // the height of a closed section, +Inf for an open one

	// What would else be asked of the channel and its law again at every depth:
	fixed   bool                  // alpha and beta do not vary with depth:
	given   friction.Coefficients // then these
	byPower bool                  // the law is a power law:
	power   friction.Power        // then this
}

// Motion returns the motion of a discharge (total, m3/s). The channel must outlive it and stay as it is.
func (c *Channel) Motion(discharge float64) Motion { return c.motion(discharge / c.barrels()) }

// motion returns the motion of a discharge of one barrel.
func (c *Channel) motion(discharge float64) Motion {
	m := Motion{channel: c, discharge: discharge, head: discharge * discharge / c.Gravity, cosine: c.Cosine(), crown: math.Inf(1)}
	if c.Section.Closed() {
		m.crown = c.Section.Height()
	}
	m.power, m.byPower = c.Law.(friction.Power)
	if m.fixed = m.byPower || c.constantCoefficients(); m.fixed {
		m.given = friction.Coefficients{Energy: orOne(c.EnergyCoefficient), Momentum: orOne(c.MomentumCoefficient)}
	}
	return m
}

func orOne(coefficient float64) float64 {
	if coefficient == 0 {
		return 1
	}
	return coefficient
}

// coefficients returns alpha and beta and their rates at a geometry.
func (m *Motion) coefficients(g section.Geometry) friction.Coefficients {
	if m.fixed {
		return m.given
	}
	return m.channel.coefficients(g)
}

// geometry is Channel.Geometry, and asks the section no more than it must.
func (m *Motion) geometry(depth float64) section.Geometry {
	if depth < m.crown {
		return m.channel.Section.At(depth)
	}
	return m.channel.Geometry(depth)
}

// conveyance returns the conveyance at a geometry; 0 where the law gives none.
func (m *Motion) conveyance(g section.Geometry) float64 {
	if m.byPower {
		return m.power.Conveyance(g.Area, g.Radius())
	}
	return m.channel.Law.AtDischarge(m.channel.Wetted(g), m.discharge).K
}

// Discharge returns the discharge of one barrel in m3/s.
func (m *Motion) Discharge() float64 { return m.discharge }

// Cosine returns the cosine of the bed's angle.
func (m *Motion) Cosine() float64 { return m.cosine }

// Energy returns the specific energy E = depth*cos + alpha*Q^2/(2 g A^2) in m.
func (m *Motion) Energy(g section.Geometry) float64 {
	return g.Depth*m.cosine + m.VelocityHead(g)
}

// VelocityHead returns alpha*V^2/2g in m.
func (m *Motion) VelocityHead(g section.Geometry) float64 {
	k := m.coefficients(g)
	return m.velocityHead(&k, 1/g.Area)
}

// velocityHead returns it from the coefficients and the reciprocal of the area, which describing a depth asks for more than once.
func (m *Motion) velocityHead(k *friction.Coefficients, over float64) float64 {
	return k.Energy * m.head * 0.5 * over * over
}

// EnergyRate returns dE/ddepth = cos*(1 - F^2), with the change of alpha.
func (m *Motion) EnergyRate(g section.Geometry) float64 {
	return m.cosine - m.froudeTerm(g)
}

// froudeTerm returns cos*F^2 = Q^2/g * (alpha*T/A^3 - (dalpha/ddepth)/(2 A^2)).
func (m *Motion) froudeTerm(g section.Geometry) float64 {
	k := m.coefficients(g)
	return m.froudeOver(&k, g.TopWidth, 1/g.Area)
}

// froudeOver returns it from the reciprocal of the area.
func (m *Motion) froudeOver(k *friction.Coefficients, width, over float64) float64 {
	return m.head * over * over * (k.Energy*width*over - k.EnergyRate*0.5)
}

// Force returns the specific force M = beta*Q^2/(g A) + cos*A*(depth of the centroid) in m3.
func (m *Motion) Force(g section.Geometry) float64 {
	k := m.coefficients(g)
	return m.force(&k, 1/g.Area, g.Moment)
}

// force returns it from the reciprocal of the area.
func (m *Motion) force(k *friction.Coefficients, over, moment float64) float64 {
	return k.Momentum*m.head*over + m.cosine*moment
}

// ForceRate returns dM/ddepth in m2.
func (m *Motion) ForceRate(g section.Geometry) float64 {
	k := m.coefficients(g)
	return m.cosine*g.Area + m.head/g.Area*(k.MomentumRate-k.Momentum*g.TopWidth/g.Area)
}

// FrictionSlope returns (Q/K)^2 at a geometry; +Inf where the law gives no conveyance.
func (m *Motion) FrictionSlope(g section.Geometry) float64 {
	if m.byPower {
		return m.power.FrictionSlope(g, m.discharge)
	}
	ratio := m.discharge / m.conveyance(g)
	return ratio * ratio
}
