package flow

import (
	"math"
	"math/rand/v2"

	"leat/compute/friction/frictiontest"
	"leat/compute/solve"
)

// randomChannel returns a channel and a discharge, of a kind by its index; an error where the dice made something impossible.
func randomChannel(r *rand.Rand, kind int) (Channel, float64, error) {
	s, err := frictiontest.Kinds[kind].Make(r)
	if err != nil {
		return Channel{}, 0, err
	}
	law, err := frictiontest.Law(r, s)
	if err != nil {
		return Channel{}, 0, err
	}
	c := Channel{Section: s, Law: law, Slope: solve.Exp(math.Log(1e-6) + r.Float64()*math.Log(9e5)), Gravity: 9.80665, Barrels: 1 + r.IntN(3)}
	switch r.IntN(20) {
	case 0:
		c.Slope = 0
	case 1:
		c.Slope = -c.Slope
	case 2:
		c.Gravity = 1.62
	case 3:
		c.EnergyCoefficient, c.MomentumCoefficient = 1.2, 1.07
	}
	q := solve.Exp(math.Log(1e-6) + r.Float64()*math.Log(1e9))
	if height := s.Height(); r.IntN(2) == 0 && c.Slope > 0 && !math.IsInf(height, 1) {
		// Near what the section carries, where things happen.
		q = c.UniformDischarge(s.At(height)) * (0.5 + 0.7*r.Float64())
		if !(q > 0) {
			q = 1
		}
	}
	return c, q, nil
}
