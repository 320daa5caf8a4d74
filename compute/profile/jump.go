package profile

import (
	"math"
	"slices"

	"leat/compute/solve"
)

// meet follows a supercritical trace from a chainage of a leg to the first place where the subcritical flow has the larger specific force; jumps is false
// where it comes to its end without.
func (c *chain) meet(l *leg, t *trace, from float64) (to float64, jumps bool, err error) {
	if len(t.panels) == 0 {
		// It cannot even begin (critical depth on a slope that does not carry it): whatever is subcritical here holds.
		return from, l.sub(from) != nil, nil
	}
	for k := len(l.subs) - 1; k >= 0; k-- {
		s := l.subs[k]
		lo, hi := max(from, s.end), min(t.end, s.panels[0].x0)
		if !(hi-lo > leastMeeting*l.length) && !(lo == hi && l.length == 0) {
			continue
		}
		excess := func(x float64) float64 {
			side := l.side(x)
			return side.force(s.depth(x)) - side.force(t.depth(x))
		}
		if excess(lo) >= 0 {
			return lo, true, nil // drowned from the beginning, or where the subcritical sweep ends at a break
		}
		places := meetingPlaces(s, t, lo, hi)
		before, below := lo, true // the supercritical force is the larger
		for _, x := range places {
			holds := excess(x) < 0
			if below && !holds {
				at, _, ok := solve.RootSlopeless(excess, before, x)
				if !ok {
					return 0, false, unsolved("the place of a jump")
				}
				// A jump loses energy; where it would gain some, forces are equal for nothing.
				if side := l.side(at); side.energy(t.depth(at)) >= side.energy(s.depth(at))*(1-1e-12) {
					return at, true, nil
				}
			}
			before, below = x, holds
		}
	}
	return t.end, false, nil
}

// leastMeeting is the share of a leg over which two traces must stand side by side to meet. At the end of a leg where critical depth governs, the subcritical flow of a
// steep bed ends within the last places of where it begins; whatever its force, it holds nothing up.
const leastMeeting = 1e-12

// subdivisions is how many places of each panel the forces are compared at.
const subdivisions = 4

// meetingPlaces returns the chainages above lo and up to hi at which the forces of two traces are compared, rising.
func meetingPlaces(s, t *trace, lo, hi float64) []float64 {
	places := []float64{hi}
	for _, tr := range [2]*trace{s, t} {
		for i := range tr.panels {
			p := &tr.panels[i]
			for k := range subdivisions {
				x := p.x0 + (p.x1-p.x0)*float64(k+1)/subdivisions
				if x > lo && x < hi {
					places = append(places, x)
				}
			}
		}
	}
	slices.Sort(places)
	return places
}

// jump notes the jump from a supercritical trace to the subcritical flow at a chainage of a leg.
func (c *chain) jump(l *leg, t *trace, x float64) {
	s := l.side(x)
	up := t.depth(x)
	down := l.sub(x).depth(x)
	state := s.channel.State(up, l.total(x))
	before, after := s.force(up), s.force(down)
	if math.Abs(after-before) > 1e-6*before {
		// One of the two depths changes here to another branch of its energy, and the forces pass each other without being equal.
		c.notes.at("turns_at_break", l.start+x, "Supercritical flow turns subcritical where one of the two begins, ends or changes its depth, without the forces being equal.")
		return
	}
	c.turns = append(c.turns, turn{force: before, residual: math.Abs(before - after)})
	if !rectangularAt(s, up) || !rectangularAt(s, down) {
		c.notes.at("jump_length_for_rectangles", l.start+x, "The length of a jump is that of one in a rectangular channel; this section is none, and its jumps may be longer.")
	}
	c.jumps = append(c.jumps, Jump{Chainage: l.start + x, Reach: l.reach, UpstreamDepth: up, DownstreamDepth: down,
		FroudeNumber: state.FroudeNumber, EnergyLoss: s.energy(up) - s.energy(down), Length: jumpLength(up, state.FroudeNumber), Form: jumpForm(state.FroudeNumber)})
}

// rectangularAt reports whether the water below a depth is a rectangle.
func rectangularAt(s side, depth float64) bool {
	g := s.channel.Geometry(depth)
	return g.TopWidthRate == 0 && math.Abs(g.Area-g.TopWidth*depth) <= 1e-12*g.Area
}

// jumpLength returns the length in m that a jump needs downstream, 220*depth*tanh((F - 1)/22) of the depth and Froude number upstream (W. H. Hager,
// Energy Dissipators and Hydraulic Jump, 1992, for rectangular channels).
func jumpLength(depth, froude float64) float64 {
	e := solve.Exp(-2 * (froude - 1) / 22)
	return 220 * depth * (1 - e) / (1 + e)
}

// jumpForm names the form of a jump by its upstream Froude number (USBR, Peterka 1958, Engineering Monograph 25).
func jumpForm(froude float64) string {
	switch {
	case froude < 1.7:
		return "undular"
	case froude < 2.5:
		return "weak"
	case froude < 4.5:
		return "oscillating"
	case froude < 9:
		return "steady"
	}
	return "strong"
}
