package profile

import (
	"math"

	"leat/compute/solve"
)

// At a break where the perimeter jumps, a level bench perhaps, friction jumps, and alpha with it where it comes from zones. Such a break stands for
// one that rises a little: in it friction and energy pass through all values between those just below and just above, while the depth stands still.
// So it does here:
//
//   - Where friction below the break takes less than the bed gives, and above it more, the depth is pushed back from both sides and stays.
//   - Where the energy has a gap that no depth has, more above the break than below for subcritical flow, less for supercritical one, the depth
//     stays until the energy has crossed the gap. How friction goes with the energy meanwhile depends on which edge of the bench is wetted first; it is
//     taken as linear.
//
// Where the energies on both sides overlap instead, the branch ends at the break, as in any section whose energy turns.

// A ledge is such a break at one chainage. Where the energy is a share of the way from below to above the break, so is friction.
type ledge struct {
	gap          float64 // energy above less energy below
	below, above float64 // numerators of the equation, S0 - Sf and what the section's change takes
}

// leastGap is the share of the energy that a gap must have to be one.
const leastGap = 1e-12

// gaping reports whether the energy has a gap for flow whose energy goes with the depth (sign 1, subcritical) or against it (sign -1).
func (l *ledge) gaping(sign, energy float64) bool { return sign*l.gap > leastGap*energy }

// after returns the share after a distance at which nothing changes but the share.
func (l *ledge) after(share, distance float64) float64 {
	rate := (l.above - l.below) / l.gap
	way := distance // the integral of exp(rate*s) from 0 to the distance
	if z := rate * distance; math.Abs(z) > 1e-5 {
		way = (solve.Exp(z) - 1) / rate
	} else {
		way *= 1 + z/2*(1+z/3)
	}
	return share + (l.below/l.gap+rate*share)*way
}

// leaves returns the distance after which the share comes to 0 or 1, if that is not beyond another.
func (l *ledge) leaves(share, distance float64) (at float64, out bool) {
	inside := func(d float64) bool { s := l.after(share, d); return s > 0 && s < 1 }
	if inside(distance) {
		return 0, false
	}
	_, at = solve.Turn(inside, 0, distance)
	return at, true
}

// edge returns the depth that stands for a side of a break, by its last places: such that the next depth towards the break's other side is still on this one.
func edge(b, share float64) float64 {
	switch share {
	case 0:
		return math.Nextafter(b, 0)
	case 1:
		return justAbove(justAbove(b))
	}
	return b
}

// ledge returns what a break is at a chainage.
func (c *collocation) ledge(x, b float64) (l ledge, energy float64) {
	s := c.v.side(x)
	energy = s.energy(b)
	l.gap = s.energy(justAbove(b)) - energy
	l.below, _ = c.v.rates(x, b)
	l.above, _ = c.v.rates(x, justAbove(b))
	return l, energy
}

// holds adds a panel on which the depth stands at a break, as far as it cannot leave it; it reports whether it did.
func (c *collocation) holds() bool {
	b, here := c.breakAt(c.y)
	if !here {
		return false
	}
	share := 0.0 // the value just below a break holds
	if n := len(c.trace.panels); n > 0 {
		last := &c.trace.panels[n-1]
		if last.held && last.x1 == c.x {
			return false
		}
		if last.y1 < last.y0 {
			share = 1
		}
	}
	if l, energy := c.ledge(c.x, b); l.gaping(c.sign(), energy) {
		return c.crosses(b, share)
	}
	return c.pushedBack(b)
}

// pushedBack holds the depth at a break without a gap. Where one side is of the other regime, the branch ends there instead.
func (c *collocation) pushedBack(b float64) bool {
	free := func(x float64) bool {
		below, d1 := c.v.rates(x, b)
		above, d2 := c.v.rates(x, justAbove(b))
		toward := c.sign() * c.direction
		return !(d1*c.sign() > 0 && d2*c.sign() > 0 && below*toward >= 0 && above*toward <= 0)
	}
	if free(c.x) {
		return false
	}
	const parts = 64
	last, to := c.x, c.far
	for i := 1; i <= parts; i++ {
		x := c.x + (c.far-c.x)*float64(i)/parts
		if free(x) {
			_, to = solve.Turn(func(x float64) bool { return !free(x) }, last, x)
			break
		}
		last = x
	}
	if to == c.x {
		return false
	}
	c.trace.panels = append(c.trace.panels, panel{x0: c.x, x1: to, y0: b, y1: b, form: straight, held: true})
	c.x, c.y, c.width = to, b, 0
	return true
}

// gapParts is how many parts of the gap, and of what is left of the stretch, are crossed at a time.
const gapParts = 64

// crosses holds the depth at a break while the energy crosses its gap, from one side of it.
func (c *collocation) crosses(b, share float64) bool {
	own := b
	if share == 1 {
		own = justAbove(b)
	}
	n, d := c.v.rates(c.x, own)
	if toward := n * c.sign() * c.direction; !(d*c.sign() >= 0) || share == 1 && !(toward < 0) || share == 0 && !(toward > 0) {
		return false // it leaves the break on the side on which it is
	}
	l, _ := c.ledge(c.x, b)
	most := math.Abs(c.far-c.x) / gapParts
	width := min(most, math.Abs(l.gap/n)/gapParts)
	x, from := c.x, edge(b, share)
	for x != c.far {
		width = min(width, math.Abs(c.far-x))
		l, _ = c.ledge(x+c.direction*width/2, b)
		if at, out := l.leaves(share, c.direction*width); out {
			x += at
			share = math.Round(l.after(share, at))
			break
		}
		share = l.after(share, c.direction*width)
		if x += c.direction * width; math.Abs(c.far-x) <= 1e-13*c.v.length {
			x = c.far
		}
		width = min(most, 1.1*width)
	}
	if x == c.x {
		return false
	}
	c.trace.panels = append(c.trace.panels, panel{x0: c.x, x1: x, y0: from, y1: edge(b, share), form: straight, held: true})
	c.x, c.y, c.width = x, b, 0
	return true
}

// crosses holds the depth of a prismatic sweep at a break while the energy goes over the gap there, from that on its own side to that beyond. It reports
// whether there is a gap; where the energy cannot cross it, the depth stands to the end of the reach.
func (s *sweeper) crosses(b, own, beyond float64) bool {
	p := s.p
	sign, share := 1.0, 0.0
	if !s.subcritical {
		sign = -1
	}
	l := ledge{gap: beyond - own}
	if s.rise < 0 {
		l.gap, share = -l.gap, 1
	}
	if !l.gaping(sign, own) {
		return false
	}
	l.below = p.steepness(p.channel.Section.At(b))
	l.above = p.steepness(p.channel.Section.At(justAbove(b)))
	from, x := edge(b, share), s.far
	if at, out := l.leaves(share, s.far-s.x); out {
		x = s.x + at
		share = math.Round(l.after(share, at))
	} else {
		share = math.NaN() // in the gap
	}
	s.trace.panels = append(s.trace.panels, panel{x0: s.x, x1: x, y0: from, y1: edge(b, share), form: straight, held: true})
	s.x, s.y = x, b
	return true
}
