package profile

import (
	"cmp"
	"math"
	"slices"

	"leat/compute"
	"leat/compute/flow"
	"leat/compute/solve"
)

// straightness is how far, relative to the depth, a straight line between two stations may lie off the depth where no report is asked for.
const straightness = 1e-3

// answer describes the flow that the walk found.
func (c *chain) answer() (*Answer, error) {
	a := &Answer{Jumps: append([]Jump{}, c.jumps...), Extent: math.NaN()}
	a.Controls = append(a.Controls, c.controls...)
	slices.SortStableFunc(a.Controls, func(x, y Control) int { return cmp.Compare(x.Chainage, y.Chainage) })
	for i := range c.segments {
		c.memory.cut(&c.segments[i])
	}
	if err := c.summaries(a); err != nil {
		return nil, err
	}
	if err := c.points(a); err != nil {
		return nil, err
	}
	if err := c.curves(a); err != nil {
		return nil, err
	}
	if err := c.extent(a); err != nil {
		return nil, err
	}
	a.Notes = c.notes.list
	return a, nil
}

// summaries describes every reach by the discharge at its downstream end, and every interval by its downstream station's.
func (c *chain) summaries(a *Answer) error {
	a.Reaches = make([]ReachSummary, len(c.legs))
	for i, l := range c.legs {
		if err := c.check(); err != nil {
			return err
		}
		n, err := c.names(l, l.length)
		if err != nil {
			return err
		}
		r := &a.Reaches[i]
		*r = ReachSummary{NormalDepth: math.NaN(), CriticalDepth: math.NaN(), Class: n.class}
		if len(n.normal) > 0 {
			r.NormalDepth = n.normal[0]
		}
		if len(n.critical) > 0 {
			r.CriticalDepth = n.critical[0]
		}
	}
	return nil
}

// naming is what a curve's name depends on.
type naming struct {
	known            bool
	normal, critical []float64
	class            flow.SlopeClass
	room             [2][8]float64
}

// of sets what the names of curves on a side depend on.
func (n *naming) of(s *side, total float64) error {
	var a, b flow.Absence
	n.normal, a = s.channel.Normal(total, n.room[0][:0])
	n.critical, b = s.channel.Critical(total, n.room[1][:0])
	if a == flow.Unsolved || b == flow.Unsolved {
		return unsolved("normal and critical depth")
	}
	n.class = s.channel.Class(total, n.normal, n.critical)
	n.known = true
	return nil
}

// names returns the naming at a chainage of a leg: the leg's own where the discharge does not vary. It holds until the next call.
func (c *chain) names(l *leg, x float64) (*naming, error) {
	n := &c.memory.naming
	if p, ok := l.stretch.(*prismatic); ok {
		if p.naming.known {
			return &p.naming, nil
		}
		n = &p.naming
	}
	s := l.side(x)
	return n, n.of(&s, l.total(x))
}

// point describes the flow at a chainage of a leg where the depth is known.
func (c *chain) point(l *leg, x, depth float64, p *Point) error {
	total := l.total(x)
	p.Reach, p.BedLevel, p.Curve = l.reach, l.level(x), ""
	var channel *flow.Channel
	if v, ok := l.stretch.(*prismatic); ok {
		channel = v.channel
		v.motion.Describe(depth, total, &p.State)
		p.WaterLevel = p.BedLevel + depth*v.motion.Cosine()
	} else {
		s := l.side(x)
		channel = s.channel
		s.motion.Describe(depth, total, &p.State)
		p.WaterLevel = p.BedLevel + depth*s.motion.Cosine()
	}
	p.EnergyLevel = p.BedLevel + p.State.SpecificEnergy
	if !l.prismatic {
		return nil
	}
	n, err := c.names(l, x)
	if err != nil {
		return err
	}
	p.Curve = channel.CurveName(&p.State, n.class, n.normal)
	return nil
}

// curve names the curve at a chainage of a leg where the depth is known.
func (c *chain) curve(l *leg, x, depth float64) (string, error) {
	if !l.prismatic {
		return "", nil
	}
	n, err := c.names(l, x)
	if err != nil {
		return "", err
	}
	if v, ok := l.stretch.(*prismatic); ok {
		return v.motion.CurveName(depth, n.class, n.normal), nil
	}
	s := l.side(x)
	return s.motion.CurveName(depth, n.class, n.normal), nil
}

// points reports the stations: at the chainages asked for, or as many as straight lines need. At a jump, a drop or a break two may stand at one chainage.
func (c *chain) points(a *Answer) error {
	for i := range c.segments {
		if err := c.places(&c.segments[i]); err != nil {
			return err
		}
	}
	a.Stations = make([]Point, 0, len(c.memory.places))
	asked := c.memory.places
	for i := range c.segments {
		g := &c.segments[i]
		depths := reader{trace: g.trace}
		for _, place := range asked[:g.places] {
			if err := c.check(); err != nil {
				return err
			}
			n := len(a.Stations)
			a.Stations = a.Stations[:n+1]
			p := &a.Stations[n]
			if err := c.point(g.leg, place.x, depths.depth(place.x), p); err != nil {
				return err
			}
			p.Chainage = place.chainage
			if n > 0 {
				last := &a.Stations[n-1]
				if last.Chainage == p.Chainage && last.Reach == p.Reach && last.State.Geometry.Depth == p.State.Geometry.Depth {
					a.Stations = a.Stations[:n]
					continue
				}
			}
			if c.run.Report.Most > 0 && n+1 > c.run.Report.Most {
				return tooManyStations()
			}
		}
		asked = asked[g.places:]
		if err := c.balance(a, g); err != nil {
			return err
		}
	}
	for _, t := range c.turns {
		a.Balance.Momentum = max(a.Balance.Momentum, t.residual)
	}
	return nil
}

func tooManyStations() error {
	return compute.Faults{{Member: "report", Code: "too_many_stations",
		Detail: "The water surface needs more stations than the limit report_points; ask for fewer by report."}}
}

// A place is a chainage of a leg and what it is in the run, as it was asked for.
type place struct{ x, chainage float64 }

// ask notes a place of a segment. It fails where there are more than an answer may have: two at the ends of each segment may be one.
func (c *chain) ask(g *segment, x, chainage float64) error {
	m := &c.memory
	m.places = append(m.places, place{x, chainage})
	g.places++
	if most := c.run.Report.Most; most > 0 && len(m.places) > most+len(c.segments) {
		return tooManyStations()
	}
	return nil
}

// places lists the places of a segment that are reported. Its error is ask's or the checkpoint's.
func (c *chain) places(g *segment) error {
	r := &c.run.Report
	start := g.leg.start
	asked := func(chainage float64) error { return c.ask(g, min(max(chainage-start, g.from), g.to), chainage) }
	switch {
	case r.At != nil:
		i, _ := slices.BinarySearch(r.At, start+g.from)
		for ; i < len(r.At) && r.At[i] <= start+g.to; i++ {
			if err := asked(r.At[i]); err != nil {
				return err
			}
		}
		return nil
	case r.Spacing > 0:
		end := c.legs[len(c.legs)-1]
		whole := end.start + end.length
		for k := math.Ceil((start + g.from) / r.Spacing); ; k++ {
			x := min(k*r.Spacing, whole)
			if x > start+g.to {
				return nil
			}
			if err := asked(x); err != nil || x == whole {
				return err
			}
		}
	}
	if err := c.ask(g, g.from, start+g.from); err != nil {
		return err
	}
	for i := range g.pieces {
		p := &g.pieces[i]
		if err := c.straighten(g, p.from, p.to, 0); err != nil {
			return err
		}
		if err := c.ask(g, p.to, start+p.to); err != nil {
			return err
		}
	}
	return nil
}

// straighten lists the places between two chainages, rising, that straight lines need. Its error is ask's or the checkpoint's.
func (c *chain) straighten(g *segment, from, to float64, level int) error {
	if err := c.check(); err != nil {
		return err
	}
	a, b := g.trace.depth(from), g.trace.depth(to)
	off := false
	for _, w := range [3]float64{0.25, 0.5, 0.75} {
		y := g.trace.depth(from + (to-from)*w)
		off = off || math.Abs(a+(b-a)*w-y) > straightness*y
	}
	if !off || level > 30 {
		return nil
	}
	middle := from + (to-from)/2
	if err := c.straighten(g, from, middle, level+1); err != nil {
		return err
	}
	if err := c.ask(g, middle, g.leg.start+middle); err != nil {
		return err
	}
	return c.straighten(g, middle, to, level+1)
}

// curves lists the stretches of one curve.
func (c *chain) curves(a *Answer) error {
	for i := range c.segments {
		g := &c.segments[i]
		name := func(x float64) (string, error) {
			if err := c.check(); err != nil {
				return "", err
			}
			return c.curve(g.leg, x, g.trace.depth(x))
		}
		at := g.from
		here, err := name(at)
		if err != nil {
			return err
		}
		for k := range g.pieces {
			p := &g.pieces[k]
			for _, x := range [2]float64{p.from + (p.to-p.from)/2, p.to} {
				end, err := name(x)
				if err != nil {
					return err
				}
				// The name may change between, more than once: a normal depth is come within reach of, or passed.
				for changes := 0; end != here && changes < 8; changes++ {
					lo, hi, next := at, x, end
					for range 60 {
						middle := lo + (hi-lo)/2
						if n, err := name(middle); err != nil {
							return err
						} else if n == here {
							lo = middle
						} else {
							hi, next = middle, n
						}
					}
					c.span(g.leg, at, hi, here)
					at = hi
					here = next
				}
				c.span(g.leg, at, x, here)
				at = x
			}
		}
	}
	a.Curves = append(a.Curves, c.memory.curves...)
	return nil
}

// span adds a stretch of a curve to the one before it, where that has the same name.
func (c *chain) span(l *leg, from, to float64, curve string) {
	from, to = l.start+from, l.start+to
	curves := c.memory.curves
	if n := len(curves); n > 0 {
		last := &curves[n-1]
		if last.Reach == l.reach && last.Curve == curve && last.To == from {
			last.To = to
			return
		}
	}
	if from < to || len(curves) == 0 {
		c.memory.curves = append(curves, CurveSpan{From: from, To: to, Reach: l.reach, Curve: curve})
	}
}

// extent looks from the downstream end for the first place within 1 % of its own reach's normal depth.
// Its error is the checkpoint's.
func (c *chain) extent(a *Answer) error {
	const band = 0.01
	end := c.legs[len(c.legs)-1]
	whole := end.start + end.length
	for i := len(c.segments) - 1; i >= 0; i-- {
		g := &c.segments[i]
		normal := a.Reaches[g.leg.reach].NormalDepth
		if math.IsNaN(normal) {
			continue
		}
		off := func(depth float64) float64 { return math.Abs(depth-normal) - band*normal }
		if len(g.pieces) == 0 && off(g.trace.depth(g.from)) <= 0 {
			a.Extent = whole - (g.leg.start + g.from)
			return nil
		}
		for k := len(g.pieces) - 1; k >= 0; k-- {
			if err := c.check(); err != nil {
				return err
			}
			p := &g.pieces[k]
			upper, lower := p.edges()
			x := p.to
			switch {
			case off(lower) <= 0:
			case off(upper) > 0:
				continue
			case p.panel.form == overChainage: // it comes into the band between, perhaps not the straight way
				edge, _, ok := solve.RootSlopeless(func(x float64) float64 { return off(p.panel.depth(x)) }, p.from, p.to)
				if !ok {
					return unsolved("the extent of the backwater")
				}
				x = edge
			default:
				x = min(max(p.panel.chainage(normal+math.Copysign(band*normal, lower-normal)), p.from), p.to)
			}
			a.Extent = whole - (g.leg.start + x)
			return nil
		}
	}
	return nil
}
