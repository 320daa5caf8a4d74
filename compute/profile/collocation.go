package profile

import (
	"math"
	"slices"

	"leat/compute/flow"
	"leat/compute/solve"
)

// collocation integrates a varying stretch panel by panel: on each the derivative is a polynomial that satisfies the equation at the Gauss points
// (Butcher 1964; Hairer and Wanner, Solving Ordinary Differential Equations II, section IV.5), so that the method is of high order and does not mind the
// strong attraction of normal depth. Near critical depth the chainage is taken as a function of the depth instead.
type collocation struct {
	v           *varying
	direction   float64
	subcritical bool
	x, y        float64
	far         float64
	trace       *trace
	width       float64 // of the last panel accepted
	overX       floor   // the tails of the panels over the chainage refused at this place
	overY       floor   // and of those over the depth
	slope       float64 // ddepth/dx to begin with, where the equation cannot tell it: at a control
	atPassage   float64 // the tail that is enough there
}

// integrate[j][k] is the integral from -1 to the j-th node of the polynomial that is 1 at the k-th node and 0 at the others.
var integrate = func() (m [order][order]float64) {
	for k := range order {
		var unit [order]float64
		unit[k] = 1
		s := newSeries(&unit)
		for j := range order {
			m[j][k], _ = s.integral(rule.node[j])
		}
	}
	return m
}()

// settled is the tail of a series below which a panel of a varying stretch counts as resolved.
const settled = 1e-12

// settledAtPassage are those of the first panel from a passage through critical depth, each one only if there is no other way.
var settledAtPassage = [3]float64{1e-10, 1e-9, 1e-8}

func (v *varying) sweep(x, depth, direction float64, subcritical bool) (*trace, error) {
	c := &collocation{v: v, direction: direction, subcritical: subcritical, x: x, y: depth, slope: math.NaN(), trace: v.memory.trace(direction == upstream)}
	if direction == downstream {
		c.far = v.length
	}
	if !subcritical && v.a.Section.Closed() && depth >= v.height {
		return c.done(), nil
	}
	if v.a.Section.Closed() && math.Abs(depth-v.height) <= 1e-12*v.height {
		c.y = v.height
	} else if c.startsAtCritical() {
		if x > 0 && x < v.length && !slices.Contains(v.corners, x) {
			slope, ok := v.throughCritical(x, depth)
			if !ok {
				return c.done(), nil
			}
			c.slope = slope
		} else if !c.leavesCritical() {
			return c.done(), nil
		}
	}
	if n, _ := v.rates(x, depth); math.IsInf(n, 0) {
		return nil, noConveyance
	}
	if err := c.run(); err != nil {
		return nil, err
	}
	return c.done(), nil
}

func (c *collocation) done() *trace {
	c.trace.end, c.trace.last, c.trace.whole = c.x, c.y, c.x == c.far
	c.v.memory.end(c.trace)
	return c.trace
}

// startsAtCritical reports whether the depth at the start is critical, as far as the last places tell.
func (c *collocation) startsAtCritical() bool {
	_, d := c.v.rates(c.x, c.y)
	if d*c.sign() > 1e-3*c.v.cosine {
		return false
	}
	if math.Abs(d) <= 1e-9*c.v.cosine {
		return true
	}
	s := c.v.side(c.x)
	depth, _, known := s.motion.LeastEnergy()
	return known && math.Abs(depth-c.y) <= 1e-9*c.y
}

// sign returns the sign of the denominator in the regime of the sweep.
func (c *collocation) sign() float64 {
	if c.subcritical {
		return 1
	}
	return -1
}

// leavesCritical reports whether the flow can leave critical depth at the end of a stretch the way of the sweep: the subcritical one upstream against a bed that
// falls too little, the supercritical one downstream on a bed that falls enough.
func (c *collocation) leavesCritical() bool {
	n, _ := c.v.rates(c.x, c.y)
	return n*c.direction > 0
}

// run advances to the far end or to where the branch ends.
func (c *collocation) run() error {
	v := c.v
	for range mostPanels + panelsAtBreak*len(v.breaks) {
		if v.check != nil {
			if err := v.check(); err != nil {
				return err
			}
		}
		left := math.Abs(c.far - c.x)
		if left == 0 {
			return nil
		}
		if c.atEnd() {
			n, _ := c.ahead()
			if s := v.side(c.x); c.toNextBranch(c.y, c.rise(n) > 0, s.energy(c.y)) {
				continue
			}
			return nil
		}
		if !v.a.Section.Closed() && c.y >= v.height {
			return aboveLastRow
		}
		if !c.subcritical && v.a.Section.Closed() && c.y >= v.height*(1-1e-7) {
			return nil // filled: the supercritical branch ends
		}
		if c.subcritical && v.a.Section.Closed() && c.y == v.height {
			full, _ := v.rates(c.x, c.y)
			if _, d := v.rates(c.x, math.Nextafter(c.y, 0)); full*c.direction <= 0 && d <= 0 {
				return nil // it falls from full to where there is no subcritical depth
			}
		}
		if c.holds() || c.changeBranch() {
			continue
		}
		width := left
		if c.width > 0 {
			width = min(width, 2*c.width)
		}
		if !c.advance(width) {
			n, d := c.ahead()
			if math.IsInf(n, 0) {
				return noConveyance
			}
			if len(c.trace.panels) > 0 && math.Abs(d) <= 1e-5*v.cosine {
				// So near to critical depth, in a section that turns within a hair of depth, no panel can be had.
				if s := v.side(c.x); c.toNextBranch(c.y, c.rise(n) > 0, s.energy(c.y)) {
					continue
				}
				return nil
			}
			if _, here := c.breakAt(c.y); here && len(c.trace.panels) > 0 {
				return nil // its branch ends at the break, and there is none to go on
			}
			return unsolved("the water surface between two stations")
		}
	}
	return unsolved("the water surface between two stations")
}

// breakAt returns the break at which a depth stands.
func (c *collocation) breakAt(y float64) (depth float64, here bool) {
	const places = 1e-13
	i, _ := slices.BinarySearch(c.v.breaks, y*(1-places))
	if i < len(c.v.breaks) && c.v.breaks[i] <= y*(1+places) {
		return c.v.breaks[i], true
	}
	return 0, false
}

// ahead returns the numerator and the denominator of the equation where the sweep stands, at a break on the side to which the depth goes.
func (c *collocation) ahead() (numerator, denominator float64) {
	if b, here := c.breakAt(c.y); here {
		if up, _ := c.drift(c.x, b); up {
			return c.v.rates(c.x, justAbove(b))
		}
	}
	return c.v.rates(c.x, c.y)
}

// drift returns where the depth goes from a break at a chainage: up, down, or neither where it is pushed back from both sides.
func (c *collocation) drift(x, b float64) (up, down bool) {
	below, d1 := c.v.rates(x, b)
	beyond, d2 := c.v.rates(x, justAbove(b))
	return d2*c.sign() >= 0 && beyond*c.sign()*c.direction > 0, d1*c.sign() >= 0 && below*c.sign()*c.direction < 0
}

// changeBranch takes the sweep on, at equal energy, to the next branch of its regime in the direction in which the depth was moving, where its own ends at a
// break: there the width jumps, and F past one, or the coefficient alpha jumps, and the energy with it. It reports whether it did.
func (c *collocation) changeBranch() bool {
	b, here := c.breakAt(c.y)
	n := len(c.trace.panels)
	if !here || n == 0 {
		return false
	}
	was := c.trace.panels[n-1]
	rising := was.y1 > was.y0
	s := c.v.side(c.x)
	if was.held && was.y0 != was.y1 { // it has left the break's other side behind
		to := b
		if rising {
			to = justAbove(b)
		}
		if _, d := c.v.rates(c.x, to); d*c.sign() > 0 {
			return false
		}
		return c.toNextBranch(b, rising, s.energy(to))
	}
	if was.held {
		n, _ := c.v.rates(c.x, b)
		rising = n*c.sign()*c.direction > 0
	}
	own, beyond := b, justAbove(b)
	if !rising { // it came from above the break
		own, beyond = beyond, own
	}
	energy := s.motion.Energy(s.channel.Section.At(own))
	if up, down := c.drift(c.x, b); up || down {
		there := s.motion.Energy(s.channel.Section.At(beyond))
		if up != rising || math.Abs(there-energy) <= 1e-12*energy {
			return false
		}
	}
	return c.toNextBranch(b, rising, energy)
}

// toNextBranch takes the sweep to the nearest depth beyond another, up or down, that has an energy on a branch of the regime. It reports whether there is one.
func (c *collocation) toNextBranch(from float64, up bool, energy float64) bool {
	s, found := c.v.side(c.x), math.NaN()
	s.motion.EnergyBranches(func(e flow.Branch) bool {
		if e.Rising != c.subcritical || up && (e.Hi <= from || e.Lo < from) || !up && (e.Lo >= from || e.Hi > from) {
			return true // of the other regime, not in this direction, or the one that ends here
		}
		if depth, ok := onBranch(&s.motion, s.channel, e, energy); ok && depth != from && (depth > from) == up {
			found = depth
			return !up // going down, the last found is the nearest
		}
		return true
	})
	if math.IsNaN(found) {
		return false
	}
	c.y, c.width = found, 0
	return true
}

// advance adds the longest panel of at most a width that can be had, over the chainage or, near critical depth, over the depth.
func (c *collocation) advance(width float64) bool {
	if math.IsNaN(c.slope) {
		return c.onward(width)
	}
	for _, c.atPassage = range settledAtPassage {
		if c.onward(width) {
			return true
		}
	}
	return false
}

// onward adds the longest panel of at most a width that meets its tolerance.
func (c *collocation) onward(width float64) bool {
	v := c.v
	n, d := c.ahead()
	c.overX, c.overY = newFloor(), newFloor()
	steep := math.IsNaN(c.slope) && math.Abs(d) < 0.3*v.cosine
	whole := width
	for range 60 {
		if p, ok := c.overChainage(width); ok {
			if p, ok = c.stopAtBreak(p); ok {
				c.accept(p)
				return true
			}
		}
		if steep {
			if p, ok := c.overDepth(n, d, width, width/whole); ok {
				c.accept(p)
				return true
			}
		}
		width /= 2
	}
	return false
}

// rise returns the sign with which the depth goes as the chainage goes the way of the sweep.
func (c *collocation) rise(numerator float64) float64 {
	return c.direction * math.Copysign(1, numerator) * c.sign()
}

// atCritical is the size of 1 - F^2 below which a sweep has come to critical depth: what is left of the way is of the second order in it.
const atCritical = 1e-7

// atEnd reports whether the sweep has come to critical depth, where its branch ends.
func (c *collocation) atEnd() bool {
	if !math.IsNaN(c.slope) || len(c.trace.panels) == 0 {
		return false
	}
	n, d := c.ahead()
	if d *= c.sign(); d > 1e-3*c.v.cosine {
		return false
	}
	// It is on its way to where 1 - F^2 vanishes if that shrinks ahead: downward on a branch above critical depth, upward on one below a maximum of the
	// energy.
	_, near := c.v.rates(c.x, c.y*(1+1e-7*c.rise(n)))
	shrinks := d - near*c.sign()
	if d <= atCritical*c.v.cosine && (shrinks > 0 || math.Abs(n) <= atCritical) {
		return true
	}
	// Where the numerator vanishes too, as flow turns from supercritical to subcritical without a jump, it comes nearer only in the last places.
	if d <= 10*atCritical*c.v.cosine && math.Abs(n) <= 1e-3*atCritical {
		last := &c.trace.panels[len(c.trace.panels)-1]
		if _, before := c.v.rates(last.x0, last.y0); before*c.sign() >= d {
			return true
		}
	}
	// Next to a crown the last places of the depth are coarse against F.
	return shrinks > 0 && d < 0.1*shrinks
}

func (c *collocation) accept(p panel) {
	if b, here := c.breakAt(p.y1); here {
		p.y1 = b
	}
	c.trace.panels = append(c.trace.panels, p)
	c.width = math.Abs(p.x1 - p.x0)
	c.x, c.y, c.slope = p.x1, p.y1, math.NaN()
	if c.direction*(p.x1-c.far) > 0 { // the stretch ends inside
		c.x, c.y = c.far, p.depth(c.far)
		return
	}
	if math.Abs(c.far-c.x) <= 1e-13*c.v.length {
		c.x = c.far
		c.trace.panels[len(c.trace.panels)-1].x1 = c.far
	}
}

// overChainage solves one panel of a width in chainage. ok is false where it does not converge, is not resolved, or leaves the regime.
func (c *collocation) overChainage(width float64) (p panel, ok bool) {
	v := c.v
	half := c.direction * width / 2
	begin := c.slope
	if math.IsNaN(begin) {
		n, d := c.ahead()
		begin = n / d
	}
	var y, f [order]float64
	for j, t := range rule.node {
		y[j] = c.y + begin*half*(t+1)
		if !(y[j] > 0.2*c.y && y[j] < 5*c.y) {
			y[j] = c.y
		}
	}
	// Beyond the next break the equation stays as it is there, so that nothing jumps while the panel is sought; what lies beyond is cut off after.
	low, high := c.piece(begin * half)
	slopeAt := func(j int, depth float64) (float64, bool) {
		n, d := v.rates(c.x+half*(rule.node[j]+1), min(max(depth, low), high))
		return n / d, d*c.sign() > 0
	}
	converged := false
	for range 12 {
		var jacobian [order][order]float64
		var residual [order]float64
		var rate [order]float64
		for j := range order {
			if !(y[j] > 0) {
				return p, false
			}
			var inside bool
			f[j], inside = slopeAt(j, y[j])
			if !inside || math.IsNaN(f[j]) || math.IsInf(f[j], 0) {
				return p, false
			}
			step := 1e-7 * y[j]
			other, _ := slopeAt(j, y[j]+step)
			rate[j] = (other - f[j]) / step
		}
		for j := range order {
			sum := 0.0
			for k := range order {
				sum += integrate[j][k] * f[k]
				jacobian[j][k] = -half * integrate[j][k] * rate[k]
			}
			jacobian[j][j]++
			residual[j] = c.y + half*sum - y[j]
		}
		if !eliminate(&jacobian, &residual) {
			return p, false
		}
		largest := 0.0
		for j := range order {
			change := residual[j]
			if math.Abs(change) > 0.5*y[j] {
				change = math.Copysign(0.5*y[j], change)
			}
			y[j] += change
			largest = max(largest, math.Abs(change)/y[j])
		}
		if largest < 1e-13 {
			converged = true
			break
		}
	}
	if !converged {
		return p, false
	}
	for j := range order {
		var inside bool
		if f[j], inside = slopeAt(j, y[j]); !inside {
			return p, false
		}
		f[j] *= half
	}
	s := newSeries(&f)
	rise, _ := s.integral(1)
	tail := (math.Abs(s[order-1]) + math.Abs(s[order-2])) / (math.Abs(rise) + 0.1*c.y)
	// Next to a passage through critical depth shorter panels are only noisier, since numerator and denominator vanish there together.
	if !(tail < settled || !math.IsNaN(c.slope) && tail < c.atPassage || c.overX.reached(tail, noisyOverChainage)) {
		return p, false
	}
	y1 := c.y + rise
	x1 := c.x + c.direction*width
	if width == math.Abs(c.far-c.x) {
		x1 = c.far
	}
	if _, d := v.rates(x1, y1); !(y1 > 0) || !(d*c.sign() > 0) {
		return p, false
	}
	return panel{x0: c.x, x1: x1, y0: c.y, y1: y1, form: overChainage, s: s.antiderivative()}, true
}

// piece returns the depths of the breaks below and above the depth of the sweep, as it sets out to rise or to fall.
func (c *collocation) piece(rise float64) (low, high float64) {
	breaks := c.v.breaks
	const places = 1e-13
	low, high = 0, c.v.height
	if c.y >= high*(1-places) && (rise > 0 || c.y > high) {
		return high, math.Inf(1)
	}
	high = math.Nextafter(high, 0) // at the crown itself the section is full
	for _, b := range breaks {
		at := math.Abs(b-c.y) <= places*b
		switch {
		case b < c.y && !at || at && rise > 0:
			low = justAbove(b)
		case b > c.y && !at || at:
			return low, min(high, b)
		}
	}
	return low, high
}

// justAbove returns the next depth above another.
func justAbove(depth float64) float64 { return math.Nextafter(depth, math.Inf(1)) }

// stopAtBreak shortens a panel that crosses a break of the section or the roughness, or the crown, so that it ends there: nothing is smooth across. It is ok
// where nothing is crossed.
func (c *collocation) stopAtBreak(p panel) (panel, bool) {
	b, crosses := c.crossed(p)
	if !crosses {
		return p, true
	}
	lo, hi := 0.0, math.Abs(p.x1-p.x0)
	guess := p
	for range 60 {
		// The chainage at which the depth of the last panel passes the break.
		width := lo + (hi-lo)/2
		if t := guess.crossing(b); t > lo && t < hi {
			width = t
		}
		q, ok := c.overChainage(width)
		if !ok {
			hi = width
			continue
		}
		if math.Abs(q.y1-b) <= 1e-13*b {
			q.y1 = b
			if _, again := c.crossed(q); !again {
				return q, true
			}
		}
		if (q.y1-b)*(p.y1-b) > 0 {
			hi, guess = width, q
		} else {
			lo = width
		}
		if hi-lo <= 1e-14*c.v.length && math.Abs(q.y1-b) <= 1e-9*b {
			q.y1 = b
			return q, true
		}
	}
	return p, false
}

// crossing returns the distance from its start at which a panel over chainage passes a depth.
func (p *panel) crossing(depth float64) float64 {
	before, _ := solve.Turn(func(t float64) bool {
		rise, _ := p.s.at(t)
		return !((p.y0+rise-depth)*(p.y1-depth) > 0)
	}, -1, 1)
	return math.Abs(p.x1-p.x0) * (before + 1) / 2
}

// crossed returns the first break that a panel passes on its way.
func (c *collocation) crossed(p panel) (depth float64, crosses bool) {
	lo, hi := min(p.y0, p.y1), max(p.y0, p.y1)
	breaks := c.v.breaks
	i, _ := slices.BinarySearch(breaks, lo)
	for i < len(breaks) && breaks[i] <= lo*(1+1e-13) {
		i++
	}
	j := i
	for j < len(breaks) && breaks[j] < hi*(1-1e-13) {
		j++
	}
	crown := c.v.height > lo*(1+1e-13) && c.v.height < hi*(1-1e-13)
	switch {
	case i == j && !crown:
		return 0, false
	case i == j:
		return c.v.height, true
	case p.y1 > p.y0:
		return breaks[i], true
	case crown:
		return c.v.height, true
	}
	return breaks[j-1], true
}

// overDepth solves one panel with the chainage as a function of the depth, of the rise that belongs to a width and at most a share of the
// depth, and no further than to a break or most of the way to critical depth.
func (c *collocation) overDepth(n, d, width, share float64) (p panel, ok bool) {
	rise := c.rise(n)
	step := min(0.05*share*c.y, math.Abs(n/d)*width)
	_, near := c.v.rates(c.x, c.y*(1+1e-7*rise))
	if shrinks := (d - near) * c.sign() / (1e-7 * c.y); shrinks > 0 { // towards where 1 - F^2 vanishes
		step = min(step, 0.9*math.Abs(d)/shrinks)
	}
	to := c.y + rise*step
	if b, crosses := c.crossed(panel{y0: c.y, y1: to}); crosses {
		to = b
	}
	if dy := math.Abs(to - c.y); to == c.v.height && (dy < 1e-8*c.y || dy < 1e-9*c.v.length*math.Abs(n)) {
		return c.hop(to)
	}
	return c.panelOverDepth(to)
}

// hop is a panel over a rise of the depth so small that its last places are all there is of it.
func (c *collocation) hop(to float64) (p panel, ok bool) {
	n, d := c.v.rates(c.x, c.y+(to-c.y)/2)
	x := c.x + c.direction*math.Abs(d/n*(to-c.y))
	return panel{x0: c.x, x1: x, y0: c.y, y1: to, form: straight}, true
}

// panelOverDepth solves one panel up to a depth.
func (c *collocation) panelOverDepth(to float64) (p panel, ok bool) {
	v := c.v
	rise := to - c.y
	half := rise / 2
	var x, f [order]float64
	for j := range x {
		x[j] = c.x
	}
	at := func(j int, chainage float64) (float64, bool) {
		n, d := v.rates(chainage, c.y+half*(rule.node[j]+1))
		return d / n, d*c.sign() > 0 && n/d*c.direction*rise > 0
	}
	for round := 0; ; round++ {
		for j := range order {
			var inside bool
			if f[j], inside = at(j, x[j]); !inside {
				return p, false
			}
		}
		largest := 0.0
		for j := range order {
			sum := 0.0
			for k := range order {
				sum += integrate[j][k] * f[k]
			}
			next := c.x + half*sum
			largest = max(largest, math.Abs(next-x[j]))
			x[j] = next
		}
		if largest <= 1e-15*v.length {
			break
		}
		if round > 60 {
			return p, false
		}
	}
	for j := range f {
		f[j] *= half
	}
	s := newSeries(&f)
	if tail := s.tail(); !(tail < settled || c.overY.reached(tail, noisyOverDepth)) {
		return p, false
	}
	whole, _ := s.integral(1)
	if _, d := v.rates(c.x+whole, to); d*c.sign() < 0 {
		return p, false // past critical depth
	}
	return panel{x0: c.x, x1: c.x + whole, y0: c.y, y1: to, form: overDepth, chart: chart{plain: true}, u0: c.y, u1: to, s: s.antiderivative()}, whole != 0
}

// eliminate solves a linear system in place by Gauss's elimination with pivots; the solution stands in b.
func eliminate(a *[order][order]float64, b *[order]float64) bool {
	for i := range order {
		pivot := i
		for j := i + 1; j < order; j++ {
			if math.Abs(a[j][i]) > math.Abs(a[pivot][i]) {
				pivot = j
			}
		}
		if !(math.Abs(a[pivot][i]) > 0) {
			return false
		}
		a[i], a[pivot] = a[pivot], a[i]
		b[i], b[pivot] = b[pivot], b[i]
		for j := i + 1; j < order; j++ {
			w := a[j][i] / a[i][i]
			if w == 0 {
				continue
			}
			for k := i; k < order; k++ {
				a[j][k] -= w * a[i][k]
			}
			b[j] -= w * b[i]
		}
	}
	for i := order - 1; i >= 0; i-- {
		for k := i + 1; k < order; k++ {
			b[i] -= a[i][k] * b[k]
		}
		b[i] /= a[i][i]
	}
	return true
}
