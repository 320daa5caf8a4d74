package profile

import (
	"math"

	"leat/compute/solve"
)

// balance recomputes the energy along a segment from depths alone, piece by piece: the fall of the energy level must be what friction takes, by a quadrature
// of its own along the chainage, or, where the depth changes fast, over the depth. Its error is the checkpoint's.
func (c *chain) balance(a *Answer, g *segment) error {
	l, t := g.leg, g.trace
	knots := g.knots()
	last := math.NaN() // the energy at the end of the piece before
	for i := 1; i < len(knots); i++ {
		if err := c.check(); err != nil {
			return err
		}
		from, to := knots[i-1], knots[i]
		p := t.at(from + (to-from)/2)
		s0, s1 := l.side(from), l.side(to)
		// At a break of the section the energy may jump: the piece's own side of it counts.
		y0, y1 := p.depth(from), p.depth(to)
		e0, e1 := s0.energy(math.Nextafter(y0, y1)), s1.energy(math.Nextafter(y1, y0))
		residual := math.Abs(e1 - e0 - l.workIn(p, from, to, 1e-12*max(e0, e1)))
		if !math.IsNaN(last) {
			residual = max(residual, math.Abs(e0-last)) // the depth may change between two pieces, at equal energy
		}
		if !(residual <= a.Balance.Energy) {
			a.Balance.Energy = residual
		}
		last = e1
	}
	return nil
}

// workIn returns the change of the specific energy between two chainages of one panel, by ever more parts until it stands.
func (l *leg) workIn(p *panel, from, to, tolerance float64) float64 {
	if p.held { // between two friction slopes any is possible, and the one that holds the depth is the true one
		s0, s1 := l.side(from), l.side(to)
		return s1.energy(p.y0) - s0.energy(p.y0)
	}
	work := math.Inf(1)
	for parts := 1; parts <= 64; parts *= 2 {
		sum := 0.0
		for k := range parts {
			x0 := from + (to-from)*float64(k)/float64(parts)
			x1 := from + (to-from)*float64(k+1)/float64(parts)
			sum += l.work(p, x0, x1)
		}
		if math.Abs(sum-work) <= tolerance {
			return sum
		}
		work = sum
	}
	return work
}

// work returns the change of the specific energy between two chainages of one panel by quadrature: of S0 - Sf, less what an inflow takes.
func (l *leg) work(p *panel, x0, x1 float64) float64 {
	y0, y1 := p.depth(x0), p.depth(x1)
	if p.form == overDepth && l.steep(x0, y0, x1, y1) {
		return l.workOverDepth(p, x0, y0, x1, y1)
	}
	half, middle := (x1-x0)/2, x0+(x1-x0)/2
	sum := 0.0
	for i, node := range solve.GaussNodes {
		for _, x := range [2]float64{middle - half*node, middle + half*node} {
			sum += solve.GaussWeights[i] * half * l.energySlope(x, p.depth(x))
		}
	}
	return sum
}

// steep reports whether the depth changes so much over a part of a panel that the chainage is the better function of the depth.
func (l *leg) steep(x0, y0, x1, y1 float64) bool {
	n0, d0 := l.rates(x0, y0)
	n1, d1 := l.rates(x1, y1)
	return min(math.Abs(n0/d0), math.Abs(n1/d1))*math.Abs(x1-x0) > 1e-4*y0
}

// workOverDepth returns the change of the specific energy between two ends of a part of a panel, and to it what friction would take over the distance by which they
// lie wrong: the distance is recomputed as the integral of dx/ddepth, in the variable of the panel.
func (l *leg) workOverDepth(p *panel, x0, y0, x1, y1 float64) float64 {
	u0, u1 := p.chart.of(y0), p.chart.of(y1)
	half, middle := (u1-u0)/2, u0+(u1-u0)/2
	distance := 0.0
	for i, node := range solve.GaussNodes {
		for _, u := range [2]float64{middle - half*node, middle + half*node} {
			y, _, rate := p.chart.depth(u)
			x := x0
			if p.chart.plain {
				run, _ := p.s.integral(2*(u-p.u0)/(p.u1-p.u0) - 1)
				x = p.x0 + run
			}
			numerator, denominator := l.rates(x, y)
			distance += solve.GaussWeights[i] * half * rate * denominator / numerator
		}
	}
	s0, s1 := l.side(x0), l.side(x1)
	friction := s0.motion.FrictionSlope(s0.channel.Geometry(y0))
	return s1.energy(math.Nextafter(y1, y0)) - s0.energy(math.Nextafter(y0, y1)) + friction*(x1-x0-distance)
}

// energySlope returns dE/dx: S0 - Sf, less (2*beta - alpha)*Q*q/(g A^2) for a lateral inflow that brings no momentum.
func (l *leg) energySlope(x, y float64) float64 {
	s := l.side(x)
	g := s.channel.Geometry(y)
	slope := l.slope - s.motion.FrictionSlope(g)
	if v, ok := l.stretch.(*varying); ok && v.fed {
		q := v.lateral / float64(max(v.a.Barrels, 1))
		k := coefficients(v.a, v.a.Wetted(g))
		slope -= (2*k.Momentum - k.Energy) * s.motion.Discharge() * q / (v.a.Gravity * g.Area * g.Area)
	}
	return slope
}
