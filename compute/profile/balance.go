package profile

import "math"

// balance recomputes the energy along a segment from depths alone, piece by piece: the fall of the energy level must be what friction takes, by a quadrature
// of its own. Its error is the checkpoint's.
func (c *chain) balance(a *Answer, g *segment) error {
	l := g.leg
	last := math.NaN() // the energy at the end of the piece before
	for i := range g.pieces {
		if err := c.check(); err != nil {
			return err
		}
		p := &g.pieces[i]
		s0, s1 := l.side(p.from), l.side(p.to)
		// At a break of the section the energy may jump: the piece's own side of it counts.
		y0, y1 := p.edges()
		e0, e1 := s0.energy(math.Nextafter(y0, y1)), s1.energy(math.Nextafter(y1, y0))
		residual := math.Abs(e1 - e0 - l.workIn(p, e1-e0, 1e-12*max(e0, e1)))
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

// workIn returns the change of the specific energy along a piece, of which its ends say what it is, by ever more parts until it stands.
func (l *leg) workIn(p *piece, change, tolerance float64) float64 {
	if p.panel.held { // between two friction slopes any is possible, and the one that holds the depth is the true one
		return change
	}
	if p.panel.form != straight {
		// The pieces are resolved by fewer points than the finer rule has, and smooth ones by far fewer.
		if once := l.work(p.panel, p.from, p.to, &quick); math.Abs(once-change) <= tolerance {
			return once
		}
		if once := l.work(p.panel, p.from, p.to, &checking); math.Abs(once-change) <= 100*tolerance {
			return once
		}
	}
	work := math.Inf(1)
	for parts := 2; parts <= 64; parts *= 2 {
		sum := 0.0
		for k := range parts {
			x0 := p.from + (p.to-p.from)*float64(k)/float64(parts)
			x1 := p.from + (p.to-p.from)*float64(k+1)/float64(parts)
			sum += l.work(p.panel, x0, x1, &checking)
		}
		if math.Abs(sum-work) <= tolerance {
			return sum
		}
		work = sum
	}
	return work
}

// work returns the change of the specific energy between two chainages of one panel by quadrature: of S0 - Sf, less what an inflow takes. Where the
// panel gives the chainage over the depth, the quadrature is over the depth too: there the depth may change without end over no distance.
func (l *leg) work(p *panel, x0, x1 float64, rule *gauss) float64 {
	if p.form == overDepth {
		return l.workOverDepth(p, p.variable(x0), p.variable(x1), rule)
	}
	half, middle := (x1-x0)/2, x0+(x1-x0)/2
	sum := 0.0
	for i, node := range rule.node {
		at := middle + half*node
		sum += rule.weight[i] * l.energySlope(at, p.depth(at))
	}
	return sum * half
}

func (l *leg) workOverDepth(p *panel, from, to float64, rule *gauss) float64 {
	half, middle := (to-from)/2, from+(to-from)/2
	reach, uniform := l.stretch.(*prismatic)
	sum := 0.0
	for i, node := range rule.node {
		at := middle + half*node
		run, slope := p.s.at(at)
		y := p.depthAt(at)
		if uniform {
			sum += rule.weight[i] * slope * reach.steepness(reach.channel.Geometry(y))
		} else {
			sum += rule.weight[i] * slope * l.energySlope(p.x0+run, y)
		}
	}
	return sum * half
}

// checking is the rule of the balances, of more points than the solver's; quick is tried before it, and holds where it finds what the ends say.
var checking, quick = newGauss(24), newGauss(12)

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
