package flow

import (
	"math"

	"leat/compute/solve"
)

// CriticalSlope returns the slope, with its own cosine, at which uniform flow of a discharge (total, m3/s) at the lowest critical depth is
// critical; known is false where no slope below 1 is. It does not allocate.
func (c *Channel) CriticalSlope(discharge float64) (slope float64, known bool) {
	trial := *c
	depth, exists := trial.lowestCritical(discharge, 0)
	if !exists {
		return 0, false
	}
	m := trial.Motion(discharge)
	slope = m.sine(depth)
	switch {
	case !(slope > 0):
		return 0, false
	case slope < 1e-9:
		return slope, true // its cosine is 1
	}
	// On a slope critical depth lies a little higher: look for the depth at which the cosine that makes it critical and the sine
	// that makes it normal belong to one angle.
	excess := func(depth float64) float64 {
		cosine, sine := m.froudeTerm(c.Section.At(depth)), m.sine(depth)
		return cosine*cosine + sine*sine - 1
	}
	onLevel, hi := slope, depth
	for widen := slope * slope; !(excess(hi) < 0) && hi < c.Section.Height() && widen < 1e6; widen *= 4 {
		hi = min(depth*(1+widen), c.Section.Height())
	}
	if at, _, ok := solve.RootSlopeless(excess, depth, hi); ok {
		slope = m.sine(at)
		if onLevel < 0.01 {
			return slope, true
		}
		if there, same := trial.lowestCritical(discharge, slope); same && slope < 0.5 && math.Abs(there-at) < 1e-9*at {
			return slope, true
		}
	}
	return trial.steepCriticalSlope(discharge)
}

// lowestCritical sets the channel's slope and returns its lowest critical depth, if there is one.
func (c *Channel) lowestCritical(discharge, slope float64) (depth float64, ok bool) {
	c.Slope = slope
	var room [8]float64
	m := c.Motion(discharge)
	depths, absent := m.critical(room[:0])
	if absent != Present {
		return 0, false
	}
	return depths[0], true
}

// sine returns the slope on which a depth is normal, (Q/K)^2.
func (m *Motion) sine(depth float64) float64 {
	ratio := m.discharge / m.channel.Law.AtDischarge(m.channel.Section.At(depth), m.discharge).K
	return ratio * ratio
}

// slopeExcess returns by how much a slope is more than uniform flow at its lowest critical depth needs; NaN where there is no critical depth.
func (c *Channel) slopeExcess(discharge, slope float64) float64 {
	depth, ok := c.lowestCritical(discharge, slope)
	if !ok {
		return math.NaN()
	}
	m := c.Motion(discharge)
	return slope - m.sine(depth)
}

// steepCriticalSlope brackets the critical slope itself: on steep slopes the sine hardly tells the cosine any more, and another critical depth may
// become the lowest.
func (c *Channel) steepCriticalSlope(discharge float64) (slope float64, known bool) {
	// A section may have no critical depth on the steepest slopes: look for the steepest that has one.
	hi := math.Nextafter(1, 0)
	for lo := 0.0; math.IsNaN(c.slopeExcess(discharge, hi)) && hi-lo > 1e-9; {
		middle := lo + (hi-lo)/2
		switch excess := c.slopeExcess(discharge, middle); {
		case excess > 0 || math.IsNaN(excess):
			hi = middle
		default:
			lo = middle
		}
	}
	if !(c.slopeExcess(discharge, hi) > 0) {
		return 0, false
	}
	slope, _, known = solve.RootSlopeless(func(slope float64) float64 { return c.slopeExcess(discharge, slope) }, 0, hi)
	// Where the lowest critical depth gives way to a higher one the excess may jump past zero: that is no root.
	known = known && math.Abs(c.slopeExcess(discharge, slope)) <= 1e-6*slope
	return slope, known && slope > 0 && slope < 1
}
