package flow

import (
	"math"

	"leat/compute/friction"
	"leat/compute/section"
	"leat/compute/solve"
)

// Normal appends to dst every depth, rising, at which the discharge (total, m3/s) flows uniformly: Q = K(depth)*sqrt(slope). Where there is
// none it returns the physical reason. A depth at which the conveyance jumps past the discharge (at a level bench, or at the roof of a box) is none.
// It allocates only where dst's capacity does not suffice.
func (c *Channel) Normal(discharge float64, dst []float64) (depths []float64, absent Absence) {
	switch {
	case c.Slope == 0:
		return dst, Horizontal
	case c.Slope < 0:
		return dst, Adverse
	}
	k := discharge / c.barrels() / math.Sqrt(c.Slope)
	if hi, ok := c.onlyBelow(k); ok {
		if c.Law.Form() == friction.Whole && !(c.conveyance(immense) > 0) {
			return dst, NoConveyance // the roughness outgrows the greatest hydraulic radius
		}
		depth, ok := c.normalBetween(k, Branch{Hi: hi, Rising: true})
		if !ok {
			return dst, Unsolved
		}
		return append(dst, depth), Present
	}
	return c.search(dst, k)
}

// immense is a depth in m at which the hydraulic radius has reached its limit.
const immense = 1e12

// onlyBelow returns a depth below which a conveyance k is reached exactly once and above which it is not reached, and whether one is known without a search:
// where the conveyance rises without end, and in an arch that carries more when full.
func (c *Channel) onlyBelow(k float64) (depth float64, known bool) {
	law := c.Law.Form()
	switch c.Section.Form() {
	case section.Rising:
		return math.Inf(1), law != friction.General
	case section.Arched:
		height := c.Section.Height()
		return height, (law == friction.Manning || law == friction.Chezy) && k < c.conveyance(height)
	}
	return 0, false
}

// normalBetween returns the depth on a branch at which the conveyance is k.
func (c *Channel) normalBetween(k float64, b Branch) (depth float64, ok bool) {
	return solve.UnitRoot(func(depth float64) (float64, float64) {
		return c.uniformRatio(k, c.Section.At(depth))
	}, b.Lo, above(b.Hi), b.inside(), b.Rising)
}

// search finds every normal depth on the branches of the uniform discharge.
func (c *Channel) search(dst []float64, k float64) (depths []float64, absent Absence) {
	none := len(dst)
	f := c.uniform()
	greatest, jump, failed, carries := 0.0, Present, false, false
	previous := 0.0 // the conveyance at the upper end of the branch before
	c.branches(&f, func(b Branch) bool {
		from, to := 0.0, math.Inf(1)
		if b.Lo > 0 {
			from = c.conveyance(above(b.Lo))
		}
		if !math.IsInf(b.Hi, 1) {
			to = c.conveyance(b.Hi)
		}
		if b.Lo > 0 && b.First && (previous-k)*(from-k) < 0 {
			if math.Abs(from-previous) <= seam*k {
				dst = append(dst, b.Lo)
			} else {
				jump = c.jump(b.Lo)
			}
		}
		greatest = max(greatest, from, to)
		carries = carries || greatest > 0
		previous = to
		if from == k && b.Lo > 0 && b.Rising && len(dst) > none && dst[len(dst)-1] == b.Lo {
			return true // the same turning point twice
		}
		if b.Rising && from < k && k <= to || !b.Rising && from > k && k >= to {
			depth, ok := c.normalBetween(k, b)
			failed = failed || !ok
			if n := len(dst); n == none || dst[n-1] != depth {
				dst = append(dst, min(depth, b.Hi))
			}
		}
		return true
	})
	switch {
	case failed:
		return dst[:none], Unsolved
	case len(dst) > none:
		return dst, Present
	case !carries:
		return dst, NoConveyance
	case jump != Present:
		return dst, jump
	case c.Section.Closed():
		return dst, BeyondCrown
	}
	return dst, BeyondTable
}

// jump returns why the conveyance jumps at a depth: the section adds perimeter there, or its law changes.
func (c *Channel) jump(depth float64) Absence {
	if below, above := c.Section.At(depth).Perimeter, c.Section.At(above(depth)).Perimeter; above-below > seam*below {
		return Jumped
	}
	return LawChanges
}

// seam is the relative difference below which the two values of a curve at a break count as one.
const seam = 1e-12
