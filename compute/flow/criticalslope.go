package flow

import (
	"math"

	"leat/compute/section"
	"leat/compute/solve"
)

// gentle is a slope up to which repeating the critical slope with its own cosine converges at once: the error falls by the square of the slope
// each time.
const gentle = 1e-3

// CriticalSlope returns the slope, with its own cosine, at which uniform flow of a discharge (total, m3/s) at the lowest critical depth is
// critical; known is false where no slope below 1 is. It does not allocate.
func (c *Channel) CriticalSlope(discharge float64) (slope float64, known bool) {
	if form := c.Section.Form(); c.constantCoefficients() && (form == section.Rising || form == section.Arched) {
		// Steep slopes of an arch are left to the bracket below: its conveyance falls again near the crown.
		if slope, ok := c.directCriticalSlope(discharge); ok && (form == section.Rising || slope < 0.5) {
			return slope, true
		}
	}
	trial := *c
	slope = -trial.slopeExcess(discharge, 0)
	if !(slope > 0) {
		return 0, false
	}
	if slope < gentle {
		for range 8 {
			next := slope - trial.slopeExcess(discharge, slope)
			if math.Abs(next-slope) <= 1e-16*slope {
				break
			}
			slope = next
		}
		return slope, slope > 0
	}
	// A section may have no critical depth on the steepest slopes: look for the steepest that has one.
	hi := math.Nextafter(1, 0)
	for lo := 0.0; math.IsNaN(trial.slopeExcess(discharge, hi)) && hi-lo > 1e-9; {
		middle := lo + (hi-lo)/2
		switch excess := trial.slopeExcess(discharge, middle); {
		case excess > 0 || math.IsNaN(excess):
			hi = middle
		default:
			lo = middle
		}
	}
	if !(trial.slopeExcess(discharge, hi) > 0) {
		return 0, false
	}
	slope, _, known = solve.RootSlopeless(func(slope float64) float64 { return trial.slopeExcess(discharge, slope) }, 0, hi)
	return slope, known && slope > 0 && slope < 1
}

// slopeExcess sets the channel's slope and returns by how much it is more than uniform flow at its lowest critical depth needs; NaN where there is no
// critical depth.
func (c *Channel) slopeExcess(discharge, slope float64) float64 {
	c.Slope = slope
	var room [8]float64
	m := c.motion(discharge)
	depths, absent := m.critical(room[:0])
	if absent != Present {
		return math.NaN()
	}
	ratio := m.discharge / c.Law.AtDischarge(c.Section.At(depths[0]), m.discharge).K
	return slope - ratio*ratio
}

// directCriticalSlope solves for the one depth at which the cosine that makes it critical, alpha*Q^2*T/(g*A^3), and the sine that makes
// it normal, (Q/K)^2, belong to one angle.
func (c *Channel) directCriticalSlope(discharge float64) (slope float64, ok bool) {
	m := c.motion(discharge)
	alpha := c.coefficients(section.Geometry{}).Energy
	sine := func(g section.Geometry) (value, power float64) {
		k := c.Law.AtDischarge(g, m.discharge)
		ratio := m.discharge / k.K
		return ratio * ratio, -2 * g.Depth * k.Rate / k.K
	}
	b := branch{hi: c.Section.Height()}
	depth, ok := solve.UnitRoot(func(depth float64) (float64, float64) {
		g := c.Section.At(depth)
		cosine := alpha * m.head * g.TopWidth / (g.Area * g.Area * g.Area)
		cosine *= cosine
		s, power := sine(g)
		s *= s
		sum := cosine + s
		return sum, 2 * (cosine*depth*(g.TopWidthRate/g.TopWidth-3*g.TopWidth/g.Area) + s*power) / sum
	}, b.lo, b.hi, b.inside(), false)
	if !ok {
		return 0, false
	}
	slope, _ = sine(c.Section.At(depth))
	return slope, slope > 0 && slope < 1
}
