package profile

import (
	"math"

	"leat/compute/solve"
)

// A chart is the variable in which a curve is integrated, one in which it is smooth: the logarithm of the distance to a pole (a normal depth, or zero depth),
// or the square root of the distance to a crown that closes like an arch.
type chart struct {
	pole  float64
	side  float64 // 1 where depths lie above the pole, -1 below
	crown bool
	plain bool // the depth itself
}

// of returns the variable of a depth.
func (c chart) of(depth float64) float64 {
	if c.plain {
		return depth
	}
	d := c.side * (depth - c.pole)
	if c.crown {
		return math.Sqrt(d)
	}
	return math.Log(d)
}

// depth returns the depth of a variable, its distance to the pole with sign, and the derivative of the depth with the variable.
func (c chart) depth(u float64) (depth, distance, rate float64) {
	if c.plain {
		return u, u, 1
	}
	if c.crown {
		distance = c.side * u * u
		return c.pole + distance, distance, 2 * c.side * u
	}
	distance = c.side * solve.Exp(u)
	return c.pole + distance, distance, distance
}
