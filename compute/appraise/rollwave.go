package appraise

import (
	"math"

	"leat/compute/flow"
)

// VedernikovNumber returns the Vedernikov number of uniform flow at a state: the speed of a flood wave over that of the water, less one, times the Froude
// number with an energy coefficient of 1,
//
//	(A/K dK/dA - 1) * V/sqrt(g A/T cos)
//
// with dK/dA at the bed slope (V. V. Vedernikov 1945; V. T. Chow 1959, section 8-8). Above 1 uniform flow breaks up into roll waves. NaN where there is no free surface.
func VedernikovNumber(c *flow.Channel, s *flow.State) float64 {
	g := s.Geometry
	if !(g.TopWidth > 0 && c.Slope > 0) {
		return math.NaN()
	}
	k := c.Law.AtSlope(c.Wetted(g), c.Slope)
	froude := s.Velocity / math.Sqrt(c.Gravity*c.Cosine()*g.Area/g.TopWidth)
	return (g.Area/g.TopWidth*k.Rate/k.K - 1) * froude
}
