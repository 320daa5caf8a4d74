package profile

import (
	"math"

	"leat/compute/flow"
	"leat/compute/structure"
)

// hold is what a boundary makes of the flow at its end.
type hold struct {
	depth   float64
	kind    string
	governs bool // else it is a free overfall (downstream), or left out (upstream)
}

// kindNames are the names of boundaries as controls.
var kindNames = map[BoundaryKind]string{Depth: "depth", Level: "level", Normal: "normal", CriticalFlow: "critical", FreeOverfall: "free_overfall",
	Gate: "gate", SharpCrested: "sharp_crested", BroadCrested: "broad_crested", Rating: "rating"}

// downstreamHold returns the subcritical depth that the downstream boundary holds. One that asks less than critical acts as a free overfall: critical depth at the
// brink.
func (b *Boundary) downstreamHold(s side, total, bed float64, notes *notes) (hold, error) {
	critical, err := s.critical()
	if err != nil {
		return hold{}, err
	}
	brink := hold{depth: critical, kind: kindNames[FreeOverfall]}
	cosine, gravity := s.channel.Cosine(), s.channel.Gravity
	h := hold{kind: kindNames[b.Kind], governs: true}
	asks := func(energy float64) (hold, error) {
		depth, ok, err := s.subcritical(energy, 0, 0)
		if err != nil {
			return h, &NoSolution{Code: aboveLastRow.Code, Detail: aboveLastRow.Detail, Member: "downstream"}
		}
		if !ok {
			depth = 0 // less than the least energy
		}
		h.depth = depth
		return h.atLeast(critical, brink, notes), nil
	}
	switch b.Kind {
	case FreeOverfall:
		brink.governs = true
		return brink, nil
	case CriticalFlow:
		return hold{depth: critical, kind: h.kind, governs: true}, nil
	case Depth:
		h.depth = b.Value
	case Level:
		h.depth = (b.Value - bed) / cosine
	case Normal:
		depth, err := normalAt(s, total, "downstream")
		if err != nil {
			return h, err
		}
		h.depth = depth
	case Gate:
		jet := b.Opening * b.Contraction
		if jet >= critical || jet >= s.channel.Section.Height() {
			notes.end("gate_does_not_govern", "downstream", "The jet below the gate is not shallower than critical depth, so that the gate does not hold the flow; it acts as a free overfall.")
			return brink, nil
		}
		return asks(s.energy(jet))
	case BroadCrested:
		return asks(structure.BroadCrestedEnergy(total, b.CrestHeight, b.CrestWidth, orOne(b.Coefficient), gravity))
	case SharpCrested:
		var head float64
		if b.Coefficient > 0 {
			head = structure.SharpCrestedHead(total, b.CrestWidth, b.Coefficient, gravity)
		} else {
			var ok bool
			if head, ok = structure.RehbockHead(total, b.CrestHeight, b.CrestWidth, gravity); !ok {
				return h, &NoSolution{Code: "weir_head", Detail: "The discharge over the weir is so small that the formula gives no head; give a discharge_coefficient, or a narrower crest.", Member: "downstream"}
			}
			if !structure.WithinRehbock(head, b.CrestHeight, b.CrestWidth) {
				notes.end("weir_outside_limits", "downstream", "Head or crest lies outside the limits of ISO 1438 for Rehbock's formula, by which the weir was computed.")
			}
		}
		h.depth = (b.CrestHeight + head) / cosine
	case Rating:
		depth, ok := rated(b.Curve, total)
		if !ok {
			return h, &NoSolution{Code: "outside_rating", Detail: "The discharge lies outside the rating; give a rating that covers it.", Member: "downstream/rating"}
		}
		h.depth = depth
	}
	if !s.holds(h.depth) {
		return h, &NoSolution{Code: aboveLastRow.Code, Detail: aboveLastRow.Detail, Member: "downstream"}
	}
	return h.atLeast(critical, brink, notes), nil
}

// atLeast returns the hold, or the brink where it asks less than critical depth.
func (h hold) atLeast(critical float64, brink hold, notes *notes) hold {
	if h.depth >= critical {
		return h
	}
	notes.end("boundary_below_critical", "downstream", "The boundary asks less than critical depth; it acts as a free overfall.")
	return brink
}

// upstreamHold returns the supercritical depth that the upstream boundary sends in; governs is false where it is left out or counts as left out.
func (b *Boundary) upstreamHold(s side, total, bed float64, notes *notes) (hold, error) {
	h := hold{kind: kindNames[b.Kind], governs: true}
	critical, err := s.critical()
	if err != nil {
		return h, err
	}
	switch b.Kind {
	case LeftOut:
		return hold{}, nil
	case CriticalFlow:
		h.depth = critical
		return h, nil
	case Depth:
		h.depth = b.Value
	case Level:
		h.depth = (b.Value - bed) / s.channel.Cosine()
		if !(h.depth > 0) {
			return h, &NoSolution{Code: "level_below_bed", Detail: "The level at the upstream end does not lie above the bed there; give a higher one, or leave upstream out.", Member: "upstream/level"}
		}
	case Normal:
		if h.depth, err = normalAt(s, total, "upstream"); err != nil {
			return h, err
		}
	case Gate:
		h.depth = b.Opening * b.Contraction
	}
	detail := ""
	switch {
	case !(h.depth < critical):
		detail = "The upstream boundary is not below critical depth, and subcritical flow is governed from downstream; it counts as left out."
	case s.motion.EnergyRate(s.channel.Geometry(h.depth)) >= 0: // of several critical depths that of least energy counts, and this depth lies above another
		detail = "The upstream boundary is subcritical, though below the critical depth of least energy, and subcritical flow is governed from downstream; it counts as left out."
	}
	if detail != "" {
		notes.end("boundary_does_not_govern", "upstream", detail)
		return hold{}, nil
	}
	return h, nil
}

// normalAt returns the lowest normal depth at an end.
func normalAt(s side, total float64, end string) (float64, error) {
	var room [8]float64
	depths, absent := s.channel.Normal(total, room[:0])
	switch {
	case absent == flow.Unsolved:
		return 0, unsolved("normal depth")
	case absent != flow.Present:
		return 0, &NoSolution{Code: absent.Code(), Detail: "There is no normal depth at this end. " + absent.String(), Member: end + "/control"}
	}
	return depths[0], nil
}

// rated returns the depth of a discharge in a rating of depths and discharges, both rising, linear between.
func rated(curve [][2]float64, discharge float64) (depth float64, ok bool) {
	for i := 1; i < len(curve); i++ {
		a, b := curve[i-1], curve[i]
		if a[1] <= discharge && discharge <= b[1] {
			return a[0] + (b[0]-a[0])*((discharge-a[1])/(b[1]-a[1])), true
		}
	}
	return 0, false
}

func orOne(x float64) float64 {
	if x == 0 {
		return 1
	}
	return x
}

// notes gathers what callers should know.
type notes struct{ list []Note }

func (n *notes) end(code, end, detail string) {
	n.list = append(n.list, Note{Code: code, Detail: detail, Chainage: math.NaN(), End: end})
}

func (n *notes) at(code string, chainage float64, detail string) {
	n.list = append(n.list, Note{Code: code, Detail: detail, Chainage: chainage})
}
