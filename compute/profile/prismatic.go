package profile

import (
	"math"
	"slices"

	"leat/compute/flow"
	"leat/compute/section"
	"leat/compute/solve"
)

// prismatic is a reach of one section, slope and discharge. There the depth's equation does not hold the chainage,
//
//	dx/ddepth = cos*(1 - F^2)/(S0 - Sf),
//
// so that a curve is an integral over depth, whose only singularities are the normal depths.
type prismatic struct {
	channel   *flow.Channel
	motion    flow.Motion
	discharge float64 // total, m3/s
	length    float64
	poles     []float64     // normal depths, rising
	branches  []flow.Branch // of the specific energy
	height    float64
	arched    bool
	check     func() error
	memory    *memory
	room      [8]float64 // for the normal depths
	naming    naming
}

func newPrismatic(c *flow.Channel, discharge, length float64, check func() error, memory *memory) (*prismatic, error) {
	p := memory.reach()
	*p = prismatic{branches: p.branches, memory: memory, channel: c, motion: c.Motion(discharge), discharge: discharge, length: length, height: c.Section.Height(),
		arched: c.Section.Closed() && c.Section.At(c.Section.Height()).TopWidth == 0, check: check}
	if c.Slope > 0 {
		normals, absent := c.Normal(discharge, p.room[:0])
		if absent == flow.Unsolved {
			return nil, unsolved("normal depth")
		}
		p.poles = normals
	}
	p.motion.EnergyBranches(func(b flow.Branch) bool {
		p.branches = append(p.branches, b)
		return true
	})
	return p, nil
}

// direction of a sweep along the chainage.
const (
	upstream   = -1.0
	downstream = 1.0
)

// steepness returns S0 - Sf, the numerator of ddepth/dx, at a geometry.
func (p *prismatic) steepness(g section.Geometry) float64 {
	return p.channel.Slope - p.motion.FrictionSlope(g)
}

// sweep follows the flow of one regime from a place and a depth to the end of the reach in a direction, or to where its branch of the specific
// energy ends.
func (p *prismatic) sweep(x, depth, direction float64, subcritical bool) (*trace, error) {
	s := &sweeper{p: p, direction: direction, subcritical: subcritical, x: x, y: depth, trace: p.memory.trace(direction == upstream)}
	if direction == downstream {
		s.far = p.length
	}
	s.snap()
	if math.IsInf(p.motion.FrictionSlope(p.channel.Geometry(depth)), 1) {
		return nil, noConveyance
	}
	if err := s.run(); err != nil {
		return nil, err
	}
	s.trace.end, s.trace.last = s.x, s.y
	s.trace.whole = s.x == s.far
	p.memory.end(s.trace)
	return s.trace, nil
}

// snap moves a beginning that is critical depth but for its last places to where its branch begins, so that it is on it.
func (s *sweeper) snap() {
	const places = 1e-11
	for _, b := range s.p.branches {
		edge := b.Lo
		if !s.subcritical {
			edge = b.Hi
		}
		if b.Rising == s.subcritical && math.Abs(s.y-edge) <= places*s.y {
			s.y = edge
		}
	}
}

// sweeper is a sweep under way.
type sweeper struct {
	p           *prismatic
	direction   float64
	subcritical bool
	x, y        float64
	far         float64 // chainage of the other end
	trace       *trace
	wider       float64 // by what factor the next panel may be wider than the last
	around      neighbourhood
	rise        float64 // 1 while the depth rises along the sweep, -1 while it falls
}

// mostPanels bounds a sweep along one stretch; smooth curves take about ten. Each break of the section, which ends a panel, adds panelsAtBreak.
const (
	mostPanels    = 4000
	panelsAtBreak = 8
)

func (s *sweeper) run() error {
	if s.p.length == 0 {
		s.straight(s.far, s.y)
		return nil
	}
	most := mostPanels + panelsAtBreak*len(s.p.branches)
	for len(s.trace.panels) < most {
		if s.p.check != nil {
			if err := s.p.check(); err != nil {
				return err
			}
		}
		if s.x == s.far {
			return nil
		}
		switch b, moves := s.where(); {
		case moves == pinned || moves == held:
			s.straight(s.far, s.y)
			s.trace.panels[len(s.trace.panels)-1].held = moves == held
			return nil
		case moves == ended:
			return nil
		case moves == aboveTable:
			return aboveLastRow
		case moves == fullFlow:
			s.pressure()
		default:
			on, err := s.along(b)
			if err != nil || !on {
				return err
			}
		}
	}
	return unsolved("the water surface")
}

func (s *sweeper) full() bool { return s.p.channel.Section.Closed() && s.y >= s.p.height }

// straight adds a panel on which the depth is linear.
func (s *sweeper) straight(x, y float64) {
	s.trace.panels = append(s.trace.panels, panel{x0: s.x, x1: x, y0: s.y, y1: y, form: straight})
	s.x, s.y = x, y
}

// moves says how a sweep goes on.
type moves uint8

const (
	alongBranch moves = iota
	pinned            // the depth stays at a normal depth
	held              // it stays at a break towards which it moves from both sides
	fullFlow          // the closed section flows full
	ended             // the sweep has no way to go
	aboveTable        // the water stands above the last row of a table
)

// where looks at the depth from below and above and says on which branch the sweep goes on.
func (s *sweeper) where() (flow.Branch, moves) {
	p := s.p
	for _, n := range p.poles {
		if math.Abs(s.y-n) <= 4e-16*n {
			return flow.Branch{}, pinned
		}
	}
	switch open := !p.channel.Section.Closed(); {
	case open && s.subcritical && s.y >= p.height:
		return flow.Branch{}, aboveTable
	case s.y > p.height && s.subcritical:
		return flow.Branch{}, fullFlow
	case s.y > p.height:
		return flow.Branch{}, ended
	}
	// A branch of the regime that ends at this depth or holds it, and one that begins at or holds it.
	below, above := -1, -1
	for i, b := range p.branches {
		if b.Rising != s.subcritical {
			continue
		}
		if b.Lo < s.y && s.y <= b.Hi {
			below = i
		}
		if b.Lo <= s.y && s.y < b.Hi {
			above = i
		}
	}
	sign := 1.0
	if !s.subcritical {
		sign = -1
	}
	falls := below >= 0 && s.p.steepness(p.channel.Section.At(s.y))*sign*s.direction < 0
	rises := false
	switch {
	case above >= 0:
		rises = s.p.steepness(p.channel.Section.At(math.Nextafter(s.y, math.Inf(1))))*sign*s.direction > 0
	case s.full() && s.subcritical:
		if s.p.steepness(p.channel.Geometry(s.y))*s.direction > 0 {
			s.rise = 1
			return flow.Branch{}, fullFlow
		}
	}
	switch {
	case rises && (!falls || s.rise > 0):
		s.rise = 1
		return p.branches[above], alongBranch
	case falls:
		s.rise = -1
		return p.branches[below], alongBranch
	case below >= 0 && (above >= 0 || s.full()):
		return flow.Branch{}, held // it is pushed back from both sides, or stands still
	case s.full() && s.subcritical:
		return flow.Branch{}, ended
	}
	return flow.Branch{}, ended
}

// pressure follows a full section: the pressure line is straight.
func (s *sweeper) pressure() {
	p := s.p
	slope := p.steepness(p.channel.Geometry(s.y)) / p.channel.Cosine()
	y := s.y + slope*(s.far-s.x)
	if y >= p.height {
		s.straight(s.far, y)
		return
	}
	x := s.x + (p.height-s.y)/slope
	if s.direction*(s.far-x) < 0 {
		x = s.far
	}
	s.rise = -1
	s.straight(x, p.height)
}

// along integrates the curve on a branch until the stretch or the branch ends. It reports whether the sweep may go on.
func (s *sweeper) along(b flow.Branch) (on bool, err error) {
	p := s.p
	ahead := s.y
	if s.rise > 0 {
		ahead = justAbove(ahead)
	}
	if math.IsInf(p.motion.FrictionSlope(p.channel.Section.At(ahead)), 1) {
		return false, noConveyance // just above a bench, perhaps
	}
	stop := b.Hi
	if s.rise < 0 {
		stop = b.Lo
	}
	// Normal depths on the way are asymptotes.
	pole := math.NaN()
	for _, n := range p.poles {
		if s.rise > 0 && n > s.y && n <= stop {
			stop, pole = n, n
			break
		}
		if s.rise < 0 && n < s.y && n >= stop {
			stop, pole = n, n
		}
	}
	for s.x != s.far {
		if p.check != nil {
			if err := p.check(); err != nil {
				return false, err
			}
		}
		if !math.IsNaN(pole) && (math.Abs(s.y-pole) <= 2e-16*pole || s.criticallyNear(pole)) {
			s.y = pole
			s.straight(s.far, pole)
			return false, nil
		}
		reached := s.step(b, stop, !math.IsNaN(pole))
		if reached {
			break
		}
		if len(s.trace.panels) >= mostPanels+panelsAtBreak*len(p.branches) {
			return false, unsolved("the water surface")
		}
	}
	if s.x == s.far {
		return false, nil
	}
	return s.beyond(b), nil
}

// criticallyNear reports whether the depth is as good as a normal depth that is critical too: there numerator and denominator vanish together, the curve
// runs straight into it, and nearer by the last places are noise.
func (s *sweeper) criticallyNear(pole float64) bool {
	return math.Abs(s.y-pole) <= 1e-10*pole && math.Abs(s.p.motion.EnergyRate(s.p.channel.Section.At(s.y))) <= 1e-8*s.p.channel.Cosine()
}

// chartAt chooses the chart at a depth on the way to a stop: the nearer of the poles on both sides, or the crown.
func (s *sweeper) chartAt(stop float64) (c chart, until float64) {
	p := s.p
	lower, upper := 0.0, math.Inf(1)
	for _, n := range p.poles {
		if n < s.y || n == s.y && s.rise > 0 {
			lower = max(lower, n)
		}
		if n > s.y || n == s.y && s.rise < 0 {
			upper = min(upper, n)
		}
	}
	crown := p.arched && p.height < upper
	if crown {
		upper = p.height
	}
	middle := lower + (upper-lower)/2
	c, until = chart{pole: lower, side: 1}, stop
	high := s.y > middle || s.y == middle && s.rise > 0
	if high {
		c = chart{pole: upper, side: -1, crown: crown}
	}
	if high && s.rise < 0 {
		until = max(stop, middle)
	} else if !high && s.rise > 0 {
		until = min(stop, middle)
	}
	return c, until
}

// resolved is the tail of a function below which its panel counts as resolved, and noise what it may be by the last places of the function's values.
const (
	resolved = 1e-12
	noise    = 1e-14
)

// firstWidth is the width in the logarithm of a distance that is tried first.
const firstWidth = 2

// tooFar is how many times longer than what is left of the stretch a panel may be, unless it is narrower than leastFitted.
const (
	tooFar      = 100
	leastFitted = 1e-6
)

// stretched returns by what factor a panel could be wider for its tail to be just resolved: of an analytic function the tail goes with the power of the width that
// is the number of terms. Of a tail that is noise nothing is known but that it could be much wider.
func stretched(tail float64) float64 {
	if tail < noise {
		return 2.5
	}
	return 0.9 * solve.Power(resolved/tail, 1./terms)
}

// hop goes over a rise of the depth so small that its last places are all there is of it, with one value of dx/ddepth. It reports whether the stop was reached.
func (s *sweeper) hop(stop float64) bool {
	p := s.p
	g := p.channel.Section.At(s.y + (stop-s.y)/2)
	run := math.Abs(p.motion.EnergyRate(g) / p.steepness(g) * (stop - s.y))
	x := s.x + s.direction*run
	if !(s.direction*(x-s.far) < 0) {
		s.straight(s.far, s.y)
		return true
	}
	s.straight(x, stop)
	return true
}

// step adds one panel on a branch, at most to the stop. asymptote tells that the stop is a normal depth that is never reached. It reports whether the stop was reached.
func (s *sweeper) step(b flow.Branch, stop float64, asymptote bool) bool {
	p := s.p
	c, until := s.chartAt(stop)
	u0 := c.of(s.y)
	toPole := asymptote && until == c.pole
	end := math.Inf(-1)
	if !toPole {
		if until == c.pole {
			end = 0 // the crown
		} else {
			end = c.of(until)
		}
	}
	width := float64(firstWidth)
	if c.crown {
		width = math.Abs(end - u0)
	}
	if n := len(s.trace.panels); n > 0 {
		if last := &s.trace.panels[n-1]; last.form == overDepth && last.chart == c {
			width = s.wider * math.Abs(last.u1-last.u0)
		}
	}
	toward := math.Copysign(1, s.rise*c.side)
	near := s.near(c, b)
	if !toPole && math.Abs(stop-s.y) < 1e-8*s.y {
		return s.hop(stop)
	}
	tails, fitted := newFloor(), false
	for {
		u1 := u0 + toward*width
		y1 := 0.0
		clipped := !math.IsInf(end, 0) && toward*(end-u1) <= width*0.1
		if clipped {
			u1, y1 = end, until
		} else {
			y1, _, _ = c.depth(u1)
		}
		pn := s.trace.grow()
		*pn = panel{x0: s.x, y0: s.y, y1: y1, form: overDepth, chart: c, u0: u0, u1: u1}
		tail, good := s.integrate(pn, near)
		whole := pn.s.whole()
		settled := tail < resolved || tail*math.Abs(whole) < 1e-13*p.length || tails.reached(tail, noisyOverDepth)
		if width > 1e-9 && (!settled || !good) && math.Abs(u1-u0) > 1e-9*math.Abs(u0) {
			width = math.Min(width, math.Abs(u1-u0)) * min(max(stretched(tail), 0.25), 0.5)
			s.trace.shrink()
			continue
		}
		left := s.far - s.x
		if math.Abs(whole) > tooFar*math.Abs(left) && math.Abs(u1-u0) > leastFitted && !fitted {
			// The last places of the whole would tell in what is left of the stretch.
			pn.x1 = s.x + whole
			width, fitted = max(1.1*math.Abs(u1-u0)*(pn.variable(s.far)+1)/2, leastFitted), true
			s.trace.shrink()
			continue
		}
		s.wider = 2
		if tail < resolved {
			s.wider = stretched(tail)
		}
		pn.x1 = s.x + whole
		if s.direction*(pn.x1-s.far) >= 0 {
			// The stretch ends inside the panel.
			y := pn.depth(s.far)
			s.x, s.y = s.far, y
			return true
		}
		s.x, s.y = pn.x1, y1
		return clipped && until == stop
	}
}

// integrate takes dx/ddepth at the points of a panel and sets its chainage. It returns the tail and whether the chainage goes the way of the sweep at
// every point.
func (s *sweeper) integrate(pn *panel, near *neighbourhood) (tail float64, good bool) {
	p := s.p
	c, u0, half := pn.chart, pn.u0, (pn.u1-pn.u0)/2
	var values [terms]float64
	good = true
	for j, t := range points {
		y, distance, rate := c.depth(u0 + half*(t+1))
		g := p.channel.Section.At(y)
		steepness := 0.0
		if math.Abs(distance) <= near.reach {
			steepness = near.steepness(p, distance)
		} else {
			steepness = p.steepness(g)
		}
		values[j] = p.motion.EnergyRate(g) / steepness * rate * half
		good = good && values[j]*s.direction > 0
	}
	return pn.s.integrate(&values), good
}

// beyond decides what becomes of a sweep that has reached the end of its branch; it reports whether it goes on.
func (s *sweeper) beyond(b flow.Branch) bool {
	p := s.p
	i := slices.Index(p.branches, b)
	if s.rise > 0 && s.y == p.height {
		return s.subcritical // full from here (or above a table), or the end of a supercritical flow that fills the section
	}
	j := i + int(s.rise)
	if j < 0 || j >= len(p.branches) {
		return false
	}
	at := s.y
	next := p.branches[j]
	energy, there := p.motion.Energy(p.channel.Section.At(at)), p.motion.Energy(p.channel.Section.At(math.Nextafter(at, math.Inf(1))))
	if s.rise < 0 {
		energy, there = there, energy
	}
	onward := next.Rising == s.subcritical
	switch {
	case onward && math.Abs(there-energy) <= 1e-12*energy:
		return true // a break of the section only
	case s.crosses(at, energy, there):
		if onward || s.x == s.far {
			return true
		}
		energy = there
	}
	// On, at equal energy, on the next branch of the regime in the direction in which the depth was moving.
	for ; j >= 0 && j < len(p.branches); j += int(s.rise) {
		next := p.branches[j]
		if next.Rising != s.subcritical {
			continue
		}
		if y, ok := onBranch(&p.motion, p.channel, next, energy); ok && (y-at)*s.rise > 0 {
			s.y = y
			return true
		}
	}
	return false
}
