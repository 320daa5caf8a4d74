package flow

import (
	"math"

	"leat/compute/solve"
)

// Alternate returns the alternate depth of a depth at a discharge (total, m3/s): the nearest one of equal specific energy on a branch on
// which the energy runs the other way. It does not allocate.
func (c *Channel) Alternate(discharge, depth float64) (alternate float64, absent Absence) {
	m := c.Motion(discharge)
	f := m.hollow(specificEnergy)
	return f.conjugate(depth)
}

// Sequent returns the sequent depth of a depth at a discharge (total, m3/s): the nearest one of equal specific force on a branch on which
// the force runs the other way. It does not allocate.
func (c *Channel) Sequent(discharge, depth float64) (sequent float64, absent Absence) {
	m := c.Motion(discharge)
	f := m.hollow(specificForce)
	return f.conjugate(depth)
}

// conjugate returns the nearest depth at which the quantity is the same as at a depth, on a branch of the opposite direction.
func (f *curve) conjugate(depth float64) (other float64, absent Absence) {
	s := f.motion.channel.Section
	here := s.At(depth)
	want := f.value(here)
	direction := f.rate(here)
	if direction == 0 {
		return depth, Coincides
	}
	nearest, failed := math.Inf(1), false
	touch := max(mirror*min(depth, s.Height()-depth), 8*(above(depth)-depth))
	f.motion.channel.branches(f, func(b Branch) bool {
		if !b.Last && math.Abs(b.Hi-depth) <= touch {
			nearest, failed = min(max(b.Hi+(b.Hi-depth), above(b.Lo)), s.Height()), false
			return false
		}
		if b.Lo > depth && b.Lo-depth > math.Abs(nearest-depth) {
			return false
		}
		if b.Rising == (direction > 0) {
			return true
		}
		from, to := math.Inf(1), math.Inf(1)
		if b.Lo > 0 {
			from = f.value(s.At(above(b.Lo)))
		}
		if !math.IsInf(b.Hi, 1) {
			to = f.value(s.At(b.Hi))
		}
		// At a turning point that both branches share the value counts as passed, whatever its last place says.
		touchesBelow := depth < b.Lo && !b.First && from < want*(1+seam) && b.Rising
		touchesAbove := depth > b.Hi && !b.Last && to < want*(1+seam) && !b.Rising
		if !(b.Rising && (from < want || touchesBelow) && want <= to || !b.Rising && from > want && (want >= to || touchesAbove)) {
			return true
		}
		x, ok := f.same(b, depth, want)
		failed = failed || !ok
		if math.Abs(x-depth) < math.Abs(nearest-depth) {
			nearest = x
		}
		return true
	})
	switch {
	case failed:
		return math.NaN(), Unsolved
	case math.IsInf(nearest, 1):
		return math.NaN(), Above
	}
	return nearest, Present
}

// same returns the depth on a branch at which a curve has the value that it has at another depth, off the branch.
func (f *curve) same(b Branch, depth, want float64) (x float64, ok bool) {
	s := f.motion.channel.Section
	x, ok = solve.UnitRoot(func(x float64) (float64, float64) {
		g := s.At(x)
		v := f.value(g)
		return v / want, x * f.slope(g) / v
	}, b.Lo, above(b.Hi), b.inside(), b.Rising)
	if apart := math.Abs(x - depth); ok && apart < near*depth && max(x, depth)+4*apart < s.Height() {
		return f.close(b, depth, x)
	}
	return x, ok
}

// mirror is the relative distance to a turning point below which a depth and its conjugate are taken as each other's mirror images in it: what
// this leaves out is the square of that, while on which side a depth so near lies is itself in doubt.
const mirror = 1e-9

// near is the relative distance of two depths below which equality of their values is judged by the mean of the derivative between them: there
// the difference of the values themselves would drown in rounding.
const near = 0.01

// close returns the depth near another one, on a branch, such that the mean of the rate between the two is zero.
func (f *curve) close(b Branch, depth, guess float64) (x float64, ok bool) {
	c := f.motion.channel
	mean := func(x float64) float64 {
		lo, hi := min(depth, x), max(depth, x)
		sum, breaks := 0.0, newBreaks(c)
		for from := lo; from < hi; {
			to := breaks.next()
			for to <= from {
				to = breaks.next()
			}
			to = min(to, hi)
			half, middle := (to-from)/2, from+(to-from)/2
			for i, node := range solve.GaussNodes {
				sum += solve.GaussWeights[i] * half * (f.slope(c.Section.At(middle-half*node)) + f.slope(c.Section.At(middle+half*node)))
			}
			from = to
		}
		return sum / (hi - lo)
	}
	// A bracket round the guess, inside the branch.
	width := max(1e-7*depth, 0.01*math.Abs(guess-depth))
	lo, hi := guess, guess
	low, high := mean(lo), 0.0
	high = low
	for range 60 {
		lo, hi = max(guess-width, b.Lo), min(guess+width, b.Hi)
		if depth < guess {
			lo = max(lo, above(depth))
		} else {
			hi = min(hi, math.Nextafter(depth, 0))
		}
		if lo > 0 {
			low = mean(lo)
		}
		high = mean(hi)
		if low <= 0 && high >= 0 || low >= 0 && high <= 0 {
			x, _, ok = solve.RootSlopeless(mean, lo, hi)
			return x, ok
		}
		width *= 4
	}
	return guess, false
}
