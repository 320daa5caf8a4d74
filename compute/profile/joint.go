package profile

import (
	"math"

	"leat/compute/flow"
	"leat/compute/section"
	"leat/compute/solve"
)

// A side is one side of a joint: a channel and the motion there.
type side struct {
	channel *flow.Channel
	motion  flow.Motion
}

func sideOf(c *flow.Channel, total float64) side { return side{c, c.Motion(total)} }

func (s *side) energy(depth float64) float64 { return s.motion.Energy(s.channel.Geometry(depth)) }
func (s *side) head(depth float64) float64   { return s.motion.VelocityHead(s.channel.Geometry(depth)) }
func (s *side) force(depth float64) float64  { return s.motion.Force(s.channel.Geometry(depth)) }

// critical returns the depth of least specific energy (exactly full where a closed section has no critical depth).
func (s *side) critical() (depth float64, err error) {
	depth, _, known := s.motion.LeastEnergy()
	if !known {
		return 0, noCriticalDepth
	}
	return depth, nil
}

// subcritical returns the deepest subcritical depth (or pressure line) at which E - share*|change of velocity head| is a value: the depth above a joint
// whose lower side has the velocity head other. ok is false where even the least energy is more. The error tells of water above the last row of a table.
func (s *side) subcritical(want, share, other float64) (depth float64, ok bool, err error) {
	excess := func(g section.Geometry) float64 {
		v := s.motion.VelocityHead(g)
		return g.Depth*s.channel.Cosine() + v - share*math.Abs(v-other) - want
	}
	if s.channel.Section.Closed() {
		height := s.channel.Section.Height()
		if short := -excess(s.channel.Geometry(height)); short >= 0 {
			return height + short/s.channel.Cosine(), true, nil
		}
	} else if height := s.channel.Section.Height(); !math.IsInf(height, 1) && excess(s.channel.Geometry(height)) < 0 {
		return 0, false, aboveLastRow
	}
	last := flow.Branch{}
	s.motion.EnergyBranches(func(b flow.Branch) bool {
		if !b.Rising {
			last = b
			return true
		}
		if last.Rising && s.inGap(b.Lo, excess, 1) {
			depth, ok = b.Lo, true
		}
		if y, found := s.highest(b, excess); found {
			depth, ok = y, true // branches come from the bed upward: the last is the deepest
		}
		last = b
		return true
	})
	return depth, ok, nil
}

// aboveLastRow is the reason of a run whose water stands above what a table says.
var aboveLastRow = &NoSolution{Code: "above_section", Detail: "The water rises above the last row of a tabulated section; give a table that goes on."}

// holds reports whether the section is defined at a depth: any for a closed one, where it is a pressure line.
func (s *side) holds(depth float64) bool {
	return s.channel.Section.Closed() || depth <= s.channel.Section.Height()
}

// supercritical returns the shallowest supercritical depth at which E + share*|change of velocity head| + entry*velocity head is a value.
func (s *side) supercritical(want, share, other, entry float64) (depth float64, ok bool) {
	excess := func(g section.Geometry) float64 {
		v := s.motion.VelocityHead(g)
		return g.Depth*s.channel.Cosine() + v + share*math.Abs(v-other) + entry*v - want
	}
	last := flow.Branch{Rising: true}
	s.motion.EnergyBranches(func(b flow.Branch) bool {
		if !b.Rising && !last.Rising && s.inGap(b.Lo, excess, -1) {
			depth, ok = b.Lo, true
			return false
		}
		last = b
		if b.Rising {
			return true
		}
		depth, ok = s.lowest(b, excess)
		return !ok
	})
	return depth, ok
}

// inGap reports whether a function of the energy passes zero at a break, from below it to above, up (sign 1) or down (sign -1): the energy asked for is one
// of those that no depth has, and the depth stands at the break.
func (s *side) inGap(b float64, f func(section.Geometry) float64, sign float64) bool {
	return sign*f(s.channel.Section.At(b)) < 0 && sign*f(s.channel.Section.At(justAbove(b))) > 0
}

// subcriticalAtForce returns the deepest depth on a rising branch of the specific force at which the force is a value.
func (s *side) subcriticalAtForce(want float64) (depth float64, ok bool) {
	if s.channel.Section.Closed() {
		height := s.channel.Section.Height()
		full := s.channel.Geometry(height)
		if more := want - s.motion.Force(full); more >= 0 {
			return height + more/(full.Area*s.channel.Cosine()), true
		}
	}
	s.motion.ForceBranches(func(b flow.Branch) bool {
		if b.Rising {
			if y, found := reach(s.channel, b, want, s.motion.Force, s.motion.ForceRate); found {
				depth, ok = y, true
			}
		}
		return true
	})
	return depth, ok
}

// supercriticalAtForce returns the shallowest depth on a falling branch of the specific force at which the force is a value.
func (s *side) supercriticalAtForce(want float64) (depth float64, ok bool) {
	s.motion.ForceBranches(func(b flow.Branch) bool {
		if !b.Rising {
			depth, ok = reach(s.channel, b, want, s.motion.Force, s.motion.ForceRate)
		}
		return !ok
	})
	return depth, ok
}

// highest returns the deepest zero on a branch of a function that is positive at its upper end; the function may dip once.
func (s *side) highest(b flow.Branch, f func(section.Geometry) float64) (depth float64, ok bool) {
	at := func(y float64) float64 { return f(s.channel.Section.At(y)) }
	lo := math.Nextafter(b.Lo, math.Inf(1))
	hi := b.Hi
	if math.IsInf(hi, 1) {
		for hi = 2 * lo; !(at(hi) > 0); hi *= 2 {
			if hi > 1e15 {
				return 0, false
			}
		}
	}
	switch high := at(hi); {
	case high == 0:
		return hi, true
	case high < 0:
		return 0, false
	}
	// Next to zero at its lower end, the last places must not decide whether the function dips.
	low, touching := at(lo), touches*s.energy(lo)
	if low > -touching {
		switch dip := solve.Dip(at, lo, lo+(hi-lo)/2, hi); {
		case at(dip) <= 0:
			lo = dip
		case low <= touching:
			return lo, true
		default:
			return 0, false
		}
	}
	depth, _, ok = solve.RootSlopeless(at, lo, hi)
	return depth, ok
}

// touches is the share of the energy below which an excess of energy may be nothing but its last places.
const touches = 1e-14

// lowest returns the shallowest zero on a falling branch of a function that is positive at its lower end; the function may dip once.
func (s *side) lowest(b flow.Branch, f func(section.Geometry) float64) (depth float64, ok bool) {
	at := func(y float64) float64 { return f(s.channel.Section.At(y)) }
	hi, lo := b.Hi, math.Nextafter(b.Lo, math.Inf(1))
	if b.Lo == 0 {
		for lo = hi / 2; !(at(lo) > 0); lo /= 2 {
			if lo < 1e-200 {
				return 0, false
			}
		}
	}
	switch low := at(lo); {
	case low == 0:
		return lo, true
	case low < 0:
		return 0, false
	}
	if at(hi) > 0 {
		if hi = solve.Dip(at, lo, lo+(hi-lo)/2, hi); !(at(hi) <= 0) {
			return 0, false
		}
	}
	depth, _, ok = solve.RootSlopeless(at, lo, hi)
	return depth, ok
}

// A joint is where one stretch ends and the next begins.
type joint struct {
	upper, lower side // both without the inflow
	with         side // the lower side with the inflow; the same as lower without one
	inflow       bool
	drop         float64 // fall of the bed, m
	loss, entry  float64
}

// above is what a joint makes of the subcritical flow below it.
type above struct {
	depth        float64 // at the end of the upper stretch
	upperControl bool    // the upper section's least energy governs: critical there
	lowerControl bool    // the lower section's least energy governs: critical there
}

// above returns the subcritical depth at the end of the upper stretch: its energy level is the greatest of what the lower stretch's sweep asks and
// the lower section's least energy, both with the losses, and the upper section's least energy. below is the depth of the lower stretch's sweep at the joint,
// NaN where it does not come so far.
func (j *joint) above(below float64) (above, error) {
	var a above
	critical, err := j.with.critical()
	if err != nil {
		return a, err
	}
	a.depth, a.upperControl = math.Inf(-1), true
	best := math.Inf(-1)
	for i, y := range [2]float64{below, critical} {
		if math.IsNaN(y) {
			continue
		}
		if j.inflow {
			// Inflow brings no momentum along the channel.
			without, ok := j.lower.subcriticalAtForce(j.with.force(y))
			if !ok {
				continue
			}
			y = without
		}
		head := j.lower.head(y)
		depth, ok, err := j.upper.subcritical(j.lower.energy(y)-j.drop+j.entry*head, j.loss, head)
		if err != nil {
			return a, err
		}
		if !ok {
			continue
		}
		if energy := j.upper.energy(depth); energy > best {
			best = energy
			a.depth, a.upperControl, a.lowerControl = depth, false, i == 1
		}
	}
	least, err := j.upper.critical()
	if err != nil {
		return a, err
	}
	if a.upperControl || best < j.upper.energy(least) {
		a = above{depth: least, upperControl: true}
	}
	return a, nil
}

// pass returns the supercritical depth at the beginning of the lower stretch, with the inflow, of a flow that arrives at a depth; ok is false where its energy, less the
// losses, or at an inflow its force, does not suffice.
func (j *joint) pass(depth float64) (lower float64, ok bool) {
	head := j.upper.head(depth)
	if lower, ok = depth, j.unchanged(depth); !ok {
		lower, ok = j.lower.supercritical(j.upper.energy(depth)+j.drop, j.loss, head, j.entry)
	}
	if ok && j.inflow {
		lower, ok = j.with.supercriticalAtForce(j.lower.force(lower))
	}
	return lower, ok
}

// unchanged reports whether supercritical flow goes on below the joint at the depth at which it arrives: there neither its energy nor its velocity head changes
// beyond the last places. With a loss every depth beside it asks for more energy, so that no search would find it.
func (j *joint) unchanged(depth float64) bool {
	if j.drop != 0 || j.entry != 0 {
		return false
	}
	above, below := j.upper.channel.Geometry(depth), j.lower.channel.Geometry(depth)
	energy, head := j.upper.motion.Energy(above), j.upper.motion.VelocityHead(above)
	return math.Abs(j.lower.motion.Energy(below)-energy) <= touches*energy && math.Abs(j.lower.motion.VelocityHead(below)-head) <= touches*head &&
		j.lower.motion.EnergyRate(below) < 0
}
