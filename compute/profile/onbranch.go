package profile

import (
	"math"

	"leat/compute/flow"
	"leat/compute/section"
	"leat/compute/solve"
)

// onBranch returns the depth on a branch of the specific energy at which the energy has a value.
func onBranch(m *flow.Motion, c *flow.Channel, b flow.Branch, energy float64) (depth float64, ok bool) {
	return reach(c, b, energy, m.Energy, m.EnergyRate)
}

// reach returns the depth on a branch at which a monotone function has a value.
func reach(c *flow.Channel, b flow.Branch, want float64, value, rate func(section.Geometry) float64) (depth float64, ok bool) {
	from, to := math.Inf(1), math.Inf(1)
	if b.Lo > 0 {
		from = value(c.Section.At(math.Nextafter(b.Lo, math.Inf(1))))
	}
	if !math.IsInf(b.Hi, 1) {
		to = value(c.Section.At(b.Hi))
	}
	switch {
	case b.Rising && !(from <= want && want <= to), !b.Rising && !(from >= want && want >= to):
		return 0, false
	case want == to && !math.IsInf(b.Hi, 1):
		return b.Hi, true
	}
	guess := 2 * b.Lo
	switch {
	case math.IsInf(b.Hi, 1) && b.Lo == 0:
		guess = 1
	case !math.IsInf(b.Hi, 1):
		guess = b.Lo + (b.Hi-b.Lo)/2
	}
	depth, ok = solve.UnitRoot(func(y float64) (float64, float64) {
		g := c.Section.At(y)
		v := value(g)
		return v / want, y * rate(g) / v
	}, b.Lo, math.Nextafter(b.Hi, math.Inf(1)), guess, b.Rising)
	return min(max(depth, b.Lo), b.Hi), ok
}
