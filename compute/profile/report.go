package profile

import (
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
	a := &Answer{Jumps: c.jumps, Controls: c.controls, Extent: math.NaN()}
	if a.Jumps == nil {
		a.Jumps = []Jump{}
	}
	slices.SortStableFunc(a.Controls, func(x, y Control) int {
		switch {
		case x.Chainage < y.Chainage:
			return -1
		case x.Chainage > y.Chainage:
			return 1
		}
		return 0
	})
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
	for _, l := range c.legs {
		if err := c.check(); err != nil {
			return err
		}
		s := l.side(l.length)
		n, err := newNaming(s, l.total(l.length))
		if err != nil {
			return err
		}
		r := ReachSummary{NormalDepth: math.NaN(), CriticalDepth: math.NaN(), Class: n.class}
		if len(n.normal) > 0 {
			r.NormalDepth = n.normal[0]
		}
		if len(n.critical) > 0 {
			r.CriticalDepth = n.critical[0]
		}
		a.Reaches = append(a.Reaches, r)
	}
	return nil
}

// naming is what a curve's name depends on.
type naming struct {
	normal, critical []float64
	class            flow.SlopeClass
}

func newNaming(s side, total float64) (naming, error) {
	var n naming
	var a, b flow.Absence
	n.normal, a = s.channel.Normal(total, nil)
	n.critical, b = s.channel.Critical(total, nil)
	if a == flow.Unsolved || b == flow.Unsolved {
		return n, unsolved("normal and critical depth")
	}
	n.class = s.channel.Class(total, n.normal, n.critical)
	return n, nil
}

// names returns the naming at a chainage of a leg: the leg's own where the discharge does not vary.
func (c *chain) names(l *leg, x float64) (naming, error) {
	if _, ok := l.stretch.(*prismatic); ok {
		if l.naming == nil {
			n, err := newNaming(l.side(0), l.total(0))
			if err != nil {
				return naming{}, err
			}
			l.naming = &n
		}
		return *l.naming, nil
	}
	return newNaming(l.side(x), l.total(x))
}

// point describes the flow at a chainage of a segment.
func (c *chain) point(g *segment, x float64) (Point, error) {
	l := g.leg
	depth := g.trace.depth(x)
	s := l.side(x)
	total := l.total(x)
	state := s.channel.State(depth, total)
	p := Point{Chainage: l.start + x, Reach: l.reach, BedLevel: l.level(x), State: state}
	p.WaterLevel = p.BedLevel + depth*s.channel.Cosine()
	p.EnergyLevel = p.BedLevel + state.SpecificEnergy
	if !l.prismatic {
		return p, nil
	}
	n, err := c.names(l, x)
	if err != nil {
		return p, err
	}
	p.Curve = s.channel.CurveName(&state, n.class, n.normal)
	return p, nil
}

// points reports the stations: at the chainages asked for, or as many as straight lines need. At a jump, a drop or a break two may stand at one chainage.
func (c *chain) points(a *Answer) error {
	for i := range c.segments {
		g := &c.segments[i]
		places, err := c.places(g)
		if err != nil {
			return err
		}
		a.Stations = slices.Grow(a.Stations, len(places))
		for _, place := range places {
			if err := c.check(); err != nil {
				return err
			}
			p, err := c.point(g, place.x)
			if err != nil {
				return err
			}
			p.Chainage = place.chainage
			if n := len(a.Stations); n > 0 {
				last := &a.Stations[n-1]
				if last.Chainage == p.Chainage && last.Reach == p.Reach && last.State.Geometry.Depth == p.State.Geometry.Depth {
					continue
				}
			}
			a.Stations = append(a.Stations, p)
			if c.run.Report.Most > 0 && len(a.Stations) > c.run.Report.Most {
				return compute.Faults{{Member: "report", Code: "too_many_stations",
					Detail: "The water surface needs more stations than the limit report_points; ask for fewer by report."}}
			}
		}
		if err := c.balance(a, g); err != nil {
			return err
		}
	}
	for _, t := range c.turns {
		a.Balance.Momentum = max(a.Balance.Momentum, t.residual)
	}
	return nil
}

// A place is a chainage of a leg and what it is in the run, as it was asked for.
type place struct{ x, chainage float64 }

// places returns the places of a segment that are reported. Its error is the checkpoint's.
func (c *chain) places(g *segment) ([]place, error) {
	r := &c.run.Report
	start := g.leg.start
	var out []place
	ask := func(chainage float64) { out = append(out, place{min(max(chainage-start, g.from), g.to), chainage}) }
	switch {
	case r.At != nil:
		i, _ := slices.BinarySearch(r.At, start+g.from)
		for ; i < len(r.At) && r.At[i] <= start+g.to; i++ {
			ask(r.At[i])
		}
		return out, nil
	case r.Spacing > 0:
		end := c.legs[len(c.legs)-1]
		whole := end.start + end.length
		for k := math.Ceil((start + g.from) / r.Spacing); ; k++ {
			x := min(k*r.Spacing, whole)
			if x > start+g.to {
				return out, nil
			}
			ask(x)
			if x == whole {
				return out, nil
			}
		}
	}
	knots := g.knots()
	xs := []float64{g.from}
	for i := 1; i < len(knots); i++ {
		var err error
		if xs, err = c.straighten(g, xs, knots[i-1], knots[i], 0); err != nil {
			return nil, err
		}
		xs = append(xs, knots[i])
	}
	for _, x := range xs {
		out = append(out, place{x, start + x})
	}
	return out, nil
}

// straighten appends the chainages between two others, rising, that straight lines need. Its error is the checkpoint's.
func (c *chain) straighten(g *segment, out []float64, from, to float64, level int) ([]float64, error) {
	if err := c.check(); err != nil {
		return nil, err
	}
	a, b := g.trace.depth(from), g.trace.depth(to)
	off := false
	for _, w := range [3]float64{0.25, 0.5, 0.75} {
		y := g.trace.depth(from + (to-from)*w)
		off = off || math.Abs(a+(b-a)*w-y) > straightness*y
	}
	if !off || level > 30 {
		return out, nil
	}
	middle := from + (to-from)/2
	out, err := c.straighten(g, out, from, middle, level+1)
	if err != nil {
		return nil, err
	}
	out = append(out, middle)
	return c.straighten(g, out, middle, to, level+1)
}

// knots returns the chainages at which the panels of a segment begin and end, rising, both ends of the segment included.
func (g *segment) knots() []float64 {
	out := []float64{g.from, g.to}
	for i := range g.trace.panels {
		if x := g.trace.panels[i].x1; x > g.from && x < g.to {
			out = append(out, x)
		}
	}
	slices.Sort(out)
	return slices.Compact(out)
}

// curves lists the stretches of one curve.
func (c *chain) curves(a *Answer) error {
	for i := range c.segments {
		g := &c.segments[i]
		name := func(x float64) (string, error) {
			if err := c.check(); err != nil {
				return "", err
			}
			p, err := c.point(g, x)
			return p.Curve, err
		}
		knots := g.knots()
		at := knots[0]
		here, err := name(at)
		if err != nil {
			return err
		}
		for k := 1; k < len(knots); k++ {
			for _, x := range [2]float64{knots[k-1] + (knots[k]-knots[k-1])/2, knots[k]} {
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
					a.span(g.leg, at, hi, here)
					at = hi
					here = next
				}
				a.span(g.leg, at, x, here)
				at = x
			}
		}
	}
	return nil
}

// span adds a stretch of a curve to the one before it, where that has the same name.
func (a *Answer) span(l *leg, from, to float64, curve string) {
	from, to = l.start+from, l.start+to
	if n := len(a.Curves); n > 0 {
		last := &a.Curves[n-1]
		if last.Reach == l.reach && last.Curve == curve && last.To == from {
			last.To = to
			return
		}
	}
	if from < to || len(a.Curves) == 0 {
		a.Curves = append(a.Curves, CurveSpan{From: from, To: to, Reach: l.reach, Curve: curve})
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
		off := func(x float64) float64 { return math.Abs(g.trace.depth(x)-normal) - band*normal }
		knots := g.knots()
		for k := len(knots) - 1; k >= 0; k-- {
			if err := c.check(); err != nil {
				return err
			}
			if off(knots[k]) > 0 {
				continue
			}
			x := knots[k]
			if k < len(knots)-1 { // it came into the band between this knot and the one before
				edge, _, ok := solve.RootSlopeless(off, knots[k], knots[k+1])
				if !ok {
					return unsolved("the extent of the backwater")
				}
				x = edge
			}
			a.Extent = whole - (g.leg.start + x)
			return nil
		}
	}
	return nil
}
