package flow

import (
	"leat/compute/section"
)

// motion is the discharge of one barrel with what its energy and force need.
type motion struct {
	channel   *Channel
	discharge float64 // of one barrel, m3/s
	head      float64 // discharge squared over gravity, m5
	cosine    float64
}

func (c *Channel) motion(discharge float64) motion {
	q := discharge / c.barrels()
	return motion{channel: c, discharge: q, head: q * q / c.Gravity, cosine: c.Cosine()}
}

// energy returns the specific energy E = depth*cos + alpha*Q^2/(2 g A^2) in m.
func (m *motion) energy(g section.Geometry) float64 {
	return g.Depth*m.cosine + m.channel.coefficients(g).Energy*m.head/(2*g.Area*g.Area)
}

// energyRate returns dE/ddepth = cos*(1 - F^2), with the change of alpha.
func (m *motion) energyRate(g section.Geometry) float64 {
	return m.cosine - m.froudeTerm(g)
}

// froudeTerm returns cos*F^2 = Q^2/g * (alpha*T/A^3 - (dalpha/ddepth)/(2 A^2)).
func (m *motion) froudeTerm(g section.Geometry) float64 {
	k := m.channel.coefficients(g)
	return m.head / (g.Area * g.Area) * (k.Energy*g.TopWidth/g.Area - k.EnergyRate/2)
}

// force returns the specific force M = beta*Q^2/(g A) + cos*A*(depth of the centroid) in m3.
func (m *motion) force(g section.Geometry) float64 {
	return m.channel.coefficients(g).Momentum*m.head/g.Area + m.cosine*g.Moment
}

// forceRate returns dM/ddepth in m2.
func (m *motion) forceRate(g section.Geometry) float64 {
	k := m.channel.coefficients(g)
	return m.cosine*g.Area + m.head/g.Area*(k.MomentumRate-k.Momentum*g.TopWidth/g.Area)
}
