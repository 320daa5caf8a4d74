package profile

import (
	"errors"
	"math"
	"slices"
)

// A chain is a run under way.
type chain struct {
	run   *Run
	legs  []*leg
	notes notes

	segments []segment
	jumps    []Jump
	controls []Control
	turns    []turn

	memory memory
}

// A turn is a place where the specific forces balance.
type turn struct {
	force    float64 // above, of all barrels
	residual float64
}

// lay lays out the legs of the run.
func (c *chain) lay() error {
	if len(c.run.Stations) > 0 {
		return c.layStations()
	}
	return c.layReaches()
}

// layReaches makes a leg of every reach and the joints between them.
func (c *chain) layReaches() error {
	reaches := c.run.Reaches
	total, at := c.run.Discharge, 0.0
	for i := range reaches {
		r := &reaches[i]
		if err := c.check(); err != nil {
			return err
		}
		total += r.Inflow
		l := c.memory.leg()
		*l = leg{reach: i, start: at, length: r.Length, slope: r.Channel.Slope, prismatic: true, subs: l.subs}
		var err error
		if r.Lateral > 0 {
			l.stretch = newFed(&r.Channel, total, r.Lateral, r.Length, c.run.Checkpoint, &c.memory)
		} else if l.stretch, err = newPrismatic(&r.Channel, total, r.Length, c.run.Checkpoint, &c.memory); err != nil {
			return err
		}
		if l.inside, err = l.stretch.controls(parts); err != nil {
			return err
		}
		total += r.Lateral * r.Length
		at += r.Length
		c.legs = append(c.legs, l)
	}
	bed := c.run.Datum
	for i := len(c.legs) - 1; i >= 0; i-- {
		l := c.legs[i]
		if i < len(c.legs)-1 {
			bed += reaches[i].Drop
		}
		bed += l.slope * l.length
		l.bed = bed
		if i == len(c.legs)-1 {
			continue
		}
		next := &reaches[i+1]
		upper := l.side(l.length)
		before := l.total(l.length)
		l.joint = joint{upper: upper, lower: sideOf(&next.Channel, before), with: sideOf(&next.Channel, before+next.Inflow), inflow: next.Inflow > 0,
			drop: reaches[i].Drop, loss: reaches[i].Loss, entry: next.Entry}
	}
	return nil
}

// check calls the run's checkpoint.
func (c *chain) check() error {
	if c.run.Checkpoint == nil {
		return nil
	}
	return c.run.Checkpoint()
}

// sweepUp follows the subcritical flow from the downstream end to the upstream end, through every joint and from every control inside.
func (c *chain) sweepUp() error {
	last := c.legs[len(c.legs)-1]
	end, err := c.run.Downstream.downstreamHold(last.side(last.length), last.total(last.length), last.level(last.length), &c.notes)
	if err != nil {
		return c.at(last, downstream, err)
	}
	last.above = above{depth: end.depth}
	c.controls = append(c.controls, Control{Chainage: last.start + last.length, Kind: end.kind, Depth: end.depth})
	for i := len(c.legs) - 1; i >= 0; i-- {
		l := c.legs[i]
		if err := c.check(); err != nil {
			return err
		}
		if i < len(c.legs)-1 {
			lower := c.legs[i+1]
			below := math.NaN()
			if t := lower.sub(0); t != nil {
				below = t.depth(0)
			}
			if l.above, err = l.joint.above(below); err != nil {
				return c.at(l, downstream, err)
			}
		}
		t, err := l.sweep(l.length, l.above.depth, upstream, true)
		if err != nil {
			return c.at(l, l.lower(), err)
		}
		if len(t.panels) > 0 {
			l.subs = append(l.subs, t)
		}
		for k := len(l.inside) - 1; k >= 0; k-- {
			p := l.inside[k]
			if n := len(l.subs); n > 0 && l.subs[n-1].end <= p.x {
				continue // drowned
			}
			t, err := l.sweep(p.x, p.depth, upstream, true)
			if err != nil {
				return c.at(l, l.lower(), err)
			}
			if len(t.panels) > 0 {
				l.subs = append(l.subs, t)
			}
		}
	}
	return nil
}

// A segment is a stretch of the flow as it is: a trace between two chainages of a leg.
type segment struct {
	leg         *leg
	trace       *trace
	from, to    float64 // chainages within the leg
	subcritical bool
	pieces      []piece // once the walk is over
	places      int     // how many of it are reported
}

// walk goes downstream and decides what flows: the supercritical branch where its specific force is the larger, else the subcritical one.
func (c *chain) walk() error {
	first := c.legs[0]
	begin, err := c.run.Upstream.upstreamHold(first.side(0), first.total(0), first.level(0), &c.notes)
	if err != nil {
		return c.at(first, upstream, err)
	}
	shooting, depth := begin.governs, begin.depth
	fromBoundary := begin.governs
	for i, l := range c.legs {
		if err := c.check(); err != nil {
			return err
		}
		x := 0.0
		for x < l.length || l.length == 0 {
			if !shooting {
				t := l.sub(x)
				if t == nil || t.panels[0].x0 <= x && l.length > 0 {
					// Nothing downstream governs here: the flow enters from a pool, or from what is above, at critical depth.
					s := l.side(x)
					if depth, err = s.critical(); err != nil {
						return c.at(l, upstream, err)
					}
					c.control(l, x, "critical", depth)
					shooting = true
					continue
				}
				end := t.panels[0].x0
				c.segments = append(c.segments, segment{leg: l, trace: t, from: x, to: end, subcritical: true})
				x = end
				if x < l.length {
					depth = t.panels[0].y0
					c.control(l, x, "critical", depth)
					if p, ok := l.passage(x); ok {
						depth = p.below
					}
					shooting = true
				}
				if l.length == 0 {
					break
				}
				continue
			}
			t, err := l.sweep(x, depth, downstream, false)
			if err != nil {
				return c.at(l, l.lower(), err)
			}
			to, jumps, err := c.meet(l, t, x)
			if err != nil {
				return err
			}
			if fromBoundary {
				if to > x || !jumps {
					c.control(l, 0, begin.kind, begin.depth)
				} else {
					c.notes.end("boundary_drowned", "upstream", "The subcritical force at the upstream end is greater than that of what the boundary sends in; it is drowned and does not govern.")
				}
				fromBoundary = false
			}
			if to > x || !jumps {
				c.segments = append(c.segments, segment{leg: l, trace: t, from: x, to: to})
			}
			switch {
			case jumps && to > x:
				c.jump(l, t, to)
				shooting = false
			case jumps:
				if i > 0 && x == 0 && c.arrived(i) {
					c.notes.at("turns_at_joint", l.start, "Supercritical flow turns subcritical at this joint, where its force is the larger above and the smaller below.")
				}
				shooting = false
			case !t.whole:
				// Where both come to critical depth at one place, the flow passes through it without a jump.
				if s := l.sub(t.end); s != nil && math.Abs(s.depth(t.end)-t.last) <= 1e-3*t.last {
					shooting = false
					break
				}
				meets := l.subBelow(t.end)
				if meets == nil || meets.end-t.end > 1e-4*l.length {
					return &stuck{l, c.outweighed(l, t)}
				}
				to, shooting = meets.end, false
			default:
				depth = t.last
			}
			x = to
			if l.length == 0 {
				break
			}
		}
		if i == len(c.legs)-1 {
			c.finish(l, shooting)
			break
		}
		if shooting, depth, err = c.cross(i, shooting, depth); err != nil {
			return err
		}
	}
	return nil
}

// outweighed reports whether subcritical flow has the larger force where a supercritical trace ends.
func (c *chain) outweighed(l *leg, t *trace) bool {
	s, side := l.sub(t.end), l.side(t.end)
	return s != nil && side.force(s.depth(t.end)) >= side.force(t.last)
}

// arrived reports whether the flow at the end of the leg before is supercritical.
func (c *chain) arrived(i int) bool {
	n := len(c.segments)
	return n > 0 && c.segments[n-1].leg == c.legs[i-1] && !c.segments[n-1].subcritical
}

// cross takes the flow over the joint below a leg.
func (c *chain) cross(i int, shooting bool, depth float64) (bool, float64, error) {
	l, next := c.legs[i], c.legs[i+1]
	a := l.above
	if shooting {
		if below, ok := l.joint.pass(depth); ok {
			return true, below, nil
		}
		c.notes.at("turns_at_joint", next.start, "Supercritical flow has too little energy or force to pass this joint and turns subcritical there.")
	}
	sweeps := next.sub(0) != nil && !(next.length > 0 && next.sub(0).panels[0].x0 == 0)
	switch {
	case a.upperControl && !shooting:
		c.control(l, l.length, "critical", a.depth)
		below, ok := l.joint.pass(a.depth)
		if ok {
			return true, below, nil
		}
		if sweeps {
			return false, 0, nil
		}
	case a.lowerControl || !sweeps:
	default:
		return false, 0, nil
	}
	below, err := l.joint.with.critical()
	if err != nil {
		return false, 0, c.at(next, upstream, err)
	}
	c.control(next, 0, "critical", below)
	return true, below, nil
}

// control notes a place that governs.
func (c *chain) control(l *leg, x float64, kind string, depth float64) {
	c.controls = append(c.controls, Control{Chainage: l.start + x, Kind: kind, Depth: depth})
}

// finish decides whether the downstream boundary, noted first, governs.
func (c *chain) finish(l *leg, shooting bool) {
	end := c.controls[0]
	c.controls = slices.Delete(c.controls, 0, 1)
	if shooting {
		if c.run.Downstream.Kind != FreeOverfall {
			c.notes.end("boundary_does_not_govern", "downstream", "Supercritical flow arrives at the downstream end with the larger force, so that the boundary there does not govern.")
		}
		return
	}
	c.controls = append(c.controls, end)
}

// Solve computes a run. The error is compute.Faults for inputs that break a rule, a *NoSolution with the physical reason, an *Unsolved where a search
// did not converge, or what the checkpoint returned.
func Solve(run *Run) (*Answer, error) { return new(Solver).Solve(run) }

func (c *chain) solve() (*Answer, error) {
	if err := c.lay(); err != nil {
		return nil, err
	}
	if err := c.sweepUp(); err != nil {
		return nil, err
	}
	err := c.walk()
	for more := 64 * parts; err != nil; more *= 16 {
		var stuck *stuck
		if !errors.As(err, &stuck) {
			return nil, err
		}
		// A control inside was passed over: look closer, and begin again.
		if more > 1024 {
			return nil, c.at(stuck.leg, upstream, stuck.reason())
		}
		if stuck.leg.inside, err = stuck.leg.controls(more); err != nil {
			return nil, err
		}
		c.restart()
		if err = c.sweepUp(); err != nil {
			return nil, err
		}
		err = c.walk()
	}
	return c.answer()
}

// parts is how many parts of a varying stretch are looked at for a control inside.
const parts = 1

// restart forgets what the sweeps and the walk found, and keeps the legs.
func (c *chain) restart() {
	for _, l := range c.legs {
		l.subs = l.subs[:0]
	}
	c.notes, c.segments, c.jumps, c.controls, c.turns = notes{}, c.segments[:0], c.jumps[:0], c.controls[:0], c.turns[:0]
}

// stuck tells that supercritical flow came to critical depth in a leg where no subcritical flow meets it, or where one meets it but forces are equal only
// where a jump would gain energy.
type stuck struct {
	leg  *leg
	meet bool // the latter
}

func (s *stuck) Error() string { return noSteadyFlow.Detail }

// reason tells why nothing helps.
func (s *stuck) reason() error {
	if s.meet {
		return noJump
	}
	// Somewhere on the way the energy may be least at a break of the section, which is no critical depth.
	const places = 64
	for i := range places + 1 {
		side := s.leg.side(s.leg.length * float64(i) / places)
		if _, err := side.critical(); err != nil {
			return err
		}
	}
	return noSteadyFlow
}

// NoSolution is the physical reason why a run has no answer.
type NoSolution struct {
	Code   string
	Detail string
	Member string // path of the input to change, as in compute.Fault
}

func (n *NoSolution) Error() string { return n.Detail }
