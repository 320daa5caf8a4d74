package flow

import (
	"math"

	"leat/compute/friction"
	"leat/compute/section"
)

// UniformDischarge returns the total discharge in m3/s that flows uniformly at a geometry of this channel: K*sqrt(slope), and 0
// where the slope is not positive or the law gives no conveyance.
func (c *Channel) UniformDischarge(g section.Geometry) float64 {
	if !(c.Slope > 0) {
		return 0
	}
	return c.barrels() * c.Law.AtSlope(c.Wetted(g), c.Slope).K * math.Sqrt(c.Slope)
}

// conveyance returns the conveyance of one barrel at a depth, at the channel's slope.
func (c *Channel) conveyance(depth float64) float64 {
	return c.Law.AtSlope(c.Section.At(depth), c.Slope).K
}

// uniformRatio returns the function whose unit root is the depth at which one barrel carries the conveyance k uniformly: A^5/P^2 or
// A^3/P over what they have to be for the power laws, so that no root is taken; else the conveyance over k.
func (c *Channel) uniformRatio(k float64, g section.Geometry) (ratio, power float64) {
	switch law := c.Law.(type) {
	case friction.Power:
		t := g.Depth * g.TopWidth / g.Area
		p := g.Depth * g.PerimeterRate / g.Perimeter
		x := k / law.C
		if law.Form() == friction.Manning {
			a := g.Area / x
			r := g.Area / g.Perimeter
			return a * a * a * r * r, 5*t - 2*p
		}
		a := g.Area / x
		return a * a * (g.Area / g.Perimeter), 3*t - p
	}
	here := c.Law.AtSlope(g, c.Slope)
	if !(here.K > 0) {
		return 0, math.NaN()
	}
	return here.K / k, g.Depth * here.Rate / here.K
}

// UniformAt returns the discharge (total, m3/s) that flows uniformly at a depth, or the reason why there is none.
func (c *Channel) UniformAt(depth float64) (discharge float64, absent Absence) {
	switch {
	case c.Slope == 0:
		return 0, Horizontal
	case c.Slope < 0:
		return 0, Adverse
	}
	discharge = c.UniformDischarge(c.Geometry(depth))
	if !(discharge > 0) {
		return 0, NoConveyance
	}
	return discharge, Present
}
