package profile

import (
	"math"

	"leat/compute/flow"
)

// A neighbourhood is what stands for S0 - Sf near a normal depth, where their difference would drown in rounding: the conveyance's derivative
// as a polynomial in the distance, from which the conveyance's difference to the normal one follows without cancellation.
type neighbourhood struct {
	normal float64
	reach  float64 // how far it holds on both sides, m; 0 for nowhere
	known  bool    // what follows is
	slope  float64
	k      float64             // the conveyance at normal depth
	c      [neighbours]float64 // the conveyance's difference is distance*(c0 + c1*t + ...) with t = distance/reach
}

// neighbours is the number of points, the zeros of a Chebyshev polynomial, at which the derivative is taken.
const neighbours = 6

// near returns the neighbourhood of a chart's pole, if that is a normal depth of the branch; it reaches only so far as nothing breaks near by.
func (s *sweeper) near(c chart, b flow.Branch) *neighbourhood {
	n := &s.around
	if c.pole == 0 || c.crown || !(b.Lo <= c.pole && c.pole <= b.Hi) {
		n.reach, n.normal = 0, 0
		return n
	}
	reach := min(1e-2*c.pole, 0.2*(c.pole-b.Lo), 0.2*(b.Hi-c.pole))
	if n.normal == c.pole && n.reach == reach || !(reach > 0) {
		n.reach = reach
		return n
	}
	*n = neighbourhood{normal: c.pole, reach: reach}
	return n
}

// learn looks at the conveyance round the normal depth.
func (n *neighbourhood) learn(p *prismatic) {
	n.known, n.slope = true, p.channel.Slope
	q := p.motion.Discharge()
	at := func(depth float64) (k, rate float64) {
		v := p.channel.Law.AtDischarge(p.channel.Section.At(depth), q)
		return v.K, v.Rate
	}
	n.k, _ = at(n.normal)
	// Newton's divided differences, then the monomials.
	var t, d [neighbours]float64
	for i := range t {
		t[i] = math.Cos(math.Pi * (float64(i) + 0.5) / neighbours)
		_, d[i] = at(n.normal + n.reach*t[i])
	}
	for j := 1; j < neighbours; j++ {
		for i := neighbours - 1; i >= j; i-- {
			d[i] = (d[i] - d[i-1]) / (t[i] - t[i-j])
		}
	}
	n.c[0] = d[neighbours-1]
	for i := neighbours - 2; i >= 0; i-- {
		for k := neighbours - 1; k > 0; k-- {
			n.c[k] = n.c[k-1] - t[i]*n.c[k]
		}
		n.c[0] = d[i] - t[i]*n.c[0]
	}
	for k := range n.c {
		n.c[k] /= float64(k + 1)
	}
}

// steepness returns S0 - Sf at a distance from normal depth.
func (n *neighbourhood) steepness(p *prismatic, distance float64) float64 {
	if !n.known {
		n.learn(p)
	}
	t := distance / n.reach
	more := distance * (n.c[0] + t*(n.c[1]+t*(n.c[2]+t*(n.c[3]+t*(n.c[4]+t*n.c[5])))))
	k := n.k + more
	return n.slope * more * (k + n.k) / (k * k)
}
