package flow

import (
	"math"
	"slices"

	"leat/compute/solve"
)

// CriticalSlope returns the slope, with its own cosine, at which uniform flow of a discharge (total, m3/s) at the lowest critical depth is
// critical; known is false where no slope below 1 is. It does not allocate.
func (c *Channel) CriticalSlope(discharge float64) (slope float64, known bool) {
	trial := *c
	trial.Slope = 0
	var room [8]float64
	m := trial.Motion(discharge)
	depths, absent, _ := m.critical(room[:0])
	if absent != Present {
		return 0, false
	}
	depth := depths[0]
	slope = m.sine(depth)
	switch {
	case !(slope > 0):
		return 0, false
	case slope < 1e-9:
		return slope, true // its cosine is 1
	}
	if m.fixed {
		if slope, known := m.criticalSlopeFrom(depth); known {
			return slope, true
		}
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
		if onLevel < gentle {
			return slope, true
		}
		if there, same := trial.lowestCritical(discharge, slope); same && slope < 0.5 && math.Abs(there-at) < 1e-9*at {
			return slope, true
		}
	}
	return trial.steepCriticalSlope(discharge)
}

// gentle is the slope up to which another critical depth is not looked for on it: its cosine differs from 1 by less than 1e-4.
const gentle = 0.01

// criticalSlopeBeside is CriticalSlope where the critical depths on the channel's own gentle slope are known, with the margin of their search: it
// begins at the lowest of them. It gives up (known is false) where on a level bed there might be others.
func (m *Motion) criticalSlopeBeside(critical []float64, margin float64) (slope float64, known bool) {
	s := m.channel.Slope
	if !m.fixed || len(critical) == 0 || !(math.Abs(s) < gentle) || !(margin < -s*s/(1+m.cosine)) {
		return 0, false
	}
	return m.criticalSlopeFrom(critical[0])
}

// criticalSlopeFrom finds the critical slope, where alpha is constant, from a critical depth on a gentle slope, by Newton's iteration for the depth at which the
// cosine that makes it critical and the sine that makes it normal belong to one angle. From so near it takes one step or two. It gives up (known is
// false) where the slope is not gentle, or a break of the section lies on the way.
func (m *Motion) criticalSlopeFrom(start float64) (slope float64, known bool) {
	steepest := gentle
	if m.onceCritical() {
		steepest = 0.1 // there is no other critical depth on any slope
	}
	depth := start
	for range 8 {
		g := m.channel.Section.At(depth)
		k := m.channel.Law.AtDischarge(g, m.discharge)
		ratio := m.discharge / k.K
		sine := ratio * ratio
		if !(sine < steepest) {
			return 0, false
		}
		widening := 1 / g.Area
		cosine := m.given.Energy * m.head * widening * widening * widening * g.TopWidth
		fall := 3*g.TopWidth*widening - g.TopWidthRate/g.TopWidth // of the cosine, a fraction in 1 m of depth
		easing := 2 * k.Rate / k.K                                // of the sine
		square, low := cosine*cosine, sine*sine
		step := ((cosine-1)*(cosine+1) + low) / (2 * (square*fall + low*easing))
		next := depth + step
		if !(next > 0 && next < m.channel.Section.Height() && math.Abs(step) < 0.1*depth) || m.channel.breaksBetween(start, next) {
			return 0, false
		}
		if math.Abs(step)*(math.Abs(fall)+math.Abs(easing)) < 1e-9 {
			sine -= sine * easing * step // what is left out is the square of that change
			return sine, sine > 0
		}
		depth = next
	}
	return 0, false
}

// breaksBetween reports whether the channel's curves may break between two depths or at one of them.
func (c *Channel) breaksBetween(a, b float64) bool {
	lo, hi := min(a, b), max(a, b)
	return within(c.Section.Breaks(), lo, hi) || within(c.Law.Breaks(), lo, hi)
}

// within reports whether one of rising depths lies from lo to hi.
func within(depths []float64, lo, hi float64) bool {
	at, _ := slices.BinarySearch(depths, lo)
	return at < len(depths) && depths[at] <= hi
}

// lowestCritical sets the channel's slope and returns its lowest critical depth, if there is one.
func (c *Channel) lowestCritical(discharge, slope float64) (depth float64, ok bool) {
	c.Slope = slope
	var room [8]float64
	m := c.Motion(discharge)
	depths, absent, _ := m.critical(room[:0])
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
