package flow

import (
	"math"

	"leat/compute/section"
	"leat/compute/solve"
)

// Critical appends to dst every critical depth of a discharge (total, m3/s), rising: the depths at which the specific energy has a smooth
// minimum, F = 1. Maxima and kinks of the energy are none. Where there is none it returns the physical reason. It allocates only where
// dst's capacity does not suffice.
func (c *Channel) Critical(discharge float64, dst []float64) (depths []float64, absent Absence) {
	m := c.Motion(discharge)
	depths, absent, _ = m.critical(dst)
	return depths, absent
}

// critical is Channel.Critical. margin is the greatest negative dE/ddepth that the search has met at an end of a stretch: were the cosine greater by less than
// its size, the search would have taken the same way. It is -Inf where no search was needed.
func (m *Motion) critical(dst []float64) (depths []float64, absent Absence, margin float64) {
	if m.onceCritical() {
		hi := m.channel.Section.Height()
		depth, ok := m.criticalBetween(0, hi)
		if !ok {
			return dst, Unsolved, math.Inf(-1)
		}
		return append(dst, depth), Present, math.Inf(-1)
	}
	none := len(dst)
	f := m.hollow(specificEnergy)
	kinked, before := false, false
	edge := 0.0 // dE/ddepth at the upper end of the branch before
	m.channel.branches(&f, func(b Branch) bool {
		switch {
		case !before: // the first branch: the energy falls from the bed
		case !b.First && b.Rising:
			dst = append(dst, b.Lo)
		case b.First && b.Rising && edge < 0:
			// A minimum where two pieces meet: smooth if the derivative does not jump.
			if m.EnergyRate(m.channel.Section.At(above(b.Lo)))-edge <= seam*m.cosine {
				dst = append(dst, b.Lo)
			} else {
				kinked = true
			}
		}
		before = true
		if b.Last && !math.IsInf(b.Hi, 1) {
			edge = m.EnergyRate(m.channel.Section.At(b.Hi))
		}
		return true
	})
	switch {
	case len(dst) > none:
		return dst, Present, f.margin
	case kinked:
		return dst, Kinked, f.margin
	}
	return dst, FillsFirst, f.margin
}

// onceCritical reports whether exactly one depth is known to be critical: alpha is constant, and A^3/T rises throughout.
func (m *Motion) onceCritical() bool {
	form := m.channel.Section.Form()
	return m.fixed && (form == section.Rising || form == section.Arched)
}

// criticalBetween returns the depth between two others at which F^2 falls through one, where alpha is constant.
func (m *Motion) criticalBetween(lo, hi float64) (depth float64, ok bool) {
	guess := 1.0
	if !math.IsInf(hi, 1) {
		guess = lo + (hi-lo)/2
	}
	c := m.given.Energy * m.head / m.cosine
	depth, ok = solve.UnitRoot(func(depth float64) (float64, float64) {
		g := m.channel.Section.At(depth)
		return g.Area * g.Area * g.Area / (c * g.TopWidth), depth * (3*g.TopWidth/g.Area - g.TopWidthRate/g.TopWidth)
	}, lo, hi, guess, true)
	return min(depth, math.Nextafter(hi, 0)), ok // a depth that rounds to the crown still has a surface
}

// CriticalAt returns the discharge (total, m3/s) for which a depth is critical, or the reason why there is none: Filled for a section filled to its
// crown, NoMinimum where the specific energy of the discharge for which F = 1 has a maximum there, or F is 1 for none.
func (c *Channel) CriticalAt(depth float64) (discharge float64, absent Absence) {
	if c.Full(depth) {
		return 0, Filled
	}
	g := c.Section.At(depth)
	unit := c.motion(1)
	term := unit.froudeTerm(g)
	if !(term > 0) {
		return 0, NoMinimum
	}
	q := math.Sqrt(unit.cosine / term)
	m := c.motion(q)
	// The energy must rise above: a little below the depth its derivative is negative.
	step := depth * 1e-6
	if !(m.EnergyRate(c.Section.At(depth-step)) < 0) {
		return 0, NoMinimum
	}
	return q * c.barrels(), Present
}
