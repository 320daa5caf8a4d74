package profile

import (
	"math"

	"leat/compute/solve"
)

// balance recomputes the energy between neighbouring stations of a segment from depths alone: the fall of the energy level must be what friction takes,
// by a quadrature of its own along the chainage, or, next to critical depth where the depth has no slope, over the depth.
func (c *chain) balance(a *Answer, g *segment, places []float64) {
	for i := 1; i < len(places); i++ {
		residual := g.energyResidual(places[i-1], places[i])
		if !(residual <= a.Balance.Energy) {
			a.Balance.Energy = residual
		}
	}
}

// energyResidual returns by how much the energy levels at two chainages of a segment differ from what the slope and friction between make of them.
func (g *segment) energyResidual(from, to float64) float64 {
	if from == to {
		return 0
	}
	l, t := g.leg, g.trace
	sum := 0.0
	before := from
	for _, knot := range g.knots() {
		if knot <= from {
			continue
		}
		end := min(knot, to)
		p := t.at(before + (end-before)/2)
		const parts = 3
		for k := range parts {
			x0 := before + (end-before)*float64(k)/parts
			x1 := before + (end-before)*float64(k+1)/parts
			sum += l.work(p, x0, x1)
		}
		before = end
		if before >= to {
			break
		}
	}
	s0, s1 := l.side(from), l.side(to)
	return math.Abs(s1.energy(t.depth(to)) - s0.energy(t.depth(from)) - sum)
}

// work returns the change of the specific energy between two chainages of one panel by quadrature: of S0 - Sf, less what an inflow takes.
func (l *leg) work(p *panel, x0, x1 float64) float64 {
	y0, y1 := p.depth(x0), p.depth(x1)
	if p.form == overDepth && l.shallow(x0, y0, x1, y1) {
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

// shallow reports whether a part of a panel is so near critical depth that the chainage is a smooth function of the depth rather than the other way round.
func (l *leg) shallow(x0, y0, x1, y1 float64) bool {
	a, b := l.side(x0), l.side(x1)
	da := math.Abs(a.motion.EnergyRate(a.channel.Geometry(y0)))
	db := math.Abs(b.motion.EnergyRate(b.channel.Geometry(y1)))
	return min(da, db) < 0.3*a.channel.Cosine() && math.Abs(y1-y0) > 1e-3*y0
}

// workOverDepth returns the change of the specific energy between two ends of a part of a panel, and to it what friction would take over the distance by which they
// lie wrong: the distance is recomputed as the integral of dx/ddepth.
func (l *leg) workOverDepth(p *panel, x0, y0, x1, y1 float64) float64 {
	half, middle := (y1-y0)/2, y0+(y1-y0)/2
	distance := 0.0
	for i, node := range solve.GaussNodes {
		for _, y := range [2]float64{middle - half*node, middle + half*node} {
			x := x0
			if p.chart.plain {
				run, _ := p.s.integral(2*(p.chart.of(y)-p.u0)/(p.u1-p.u0) - 1)
				x = p.x0 + run
			}
			numerator, denominator := l.rates(x, y)
			distance += solve.GaussWeights[i] * half * denominator / numerator
		}
	}
	s0, s1 := l.side(x0), l.side(x1)
	friction := s0.motion.FrictionSlope(s0.channel.Geometry(y0))
	return s1.energy(y1) - s0.energy(y0) + friction*(x1-x0-distance)
}

// energySlope returns dE/dx by the equation of energy: S0 - Sf, less beta*Q*q/(g A^2) for a lateral inflow that brings no momentum.
func (l *leg) energySlope(x, y float64) float64 {
	s := l.side(x)
	g := s.channel.Geometry(y)
	slope := l.slope - s.motion.FrictionSlope(g)
	if v, ok := l.stretch.(*varying); ok && v.fed {
		q := v.lateral / float64(max(v.a.Barrels, 1))
		slope -= s.motion.Discharge() * q / (v.a.Gravity * g.Area * g.Area)
	}
	return slope
}
