package operation

import (
	"math"
	"strconv"

	"leat/api/wire"
	"leat/compute/flow"
	"leat/compute/friction"
	"leat/compute/section"
)

// leastTurbulent is the Reynolds number 4RV/nu below which Colebrook and White's law is used outside what it was measured for.
const leastTurbulent = 4000

// warnings gathers what callers should know of an answer: each thing once, at the first place where it holds.
type warnings struct {
	list   []wire.Warning
	others []int // at how many further places it holds
}

// add notes a warning.
func (w *warnings) add(code, pointer, detail string) {
	for i := range w.list {
		if w.list[i].Code == code && w.list[i].Detail == detail {
			w.others[i]++
			return
		}
	}
	w.list = append(w.list, wire.Warning{Code: code, Pointer: pointer, Detail: detail})
	w.others = append(w.others, 0)
}

// done returns the warnings in the order in which they came up, saying how often each holds.
func (w *warnings) done() []wire.Warning {
	for i, n := range w.others {
		if n > 0 {
			w.list[i].Detail += alsoAt(n)
		}
	}
	return w.list
}

// alsoAt says, as a further sentence, at how many other places of an answer something holds.
func alsoAt(n int) string {
	if n == 1 {
		return " The same holds at 1 other place of this answer."
	}
	return " The same holds at " + strconv.Itoa(n) + " other places of this answer."
}

// state adds what is to be said of a state; pointer is the member of the request that the depth comes from.
func (w *warnings) state(c *flow.Channel, s *flow.State, pointer string) {
	depth := s.Geometry.Depth
	if surveyed, ok := c.Section.(section.Surveyed); ok {
		ends := surveyed.Ends(depth)
		if ends.AboveLeft || ends.AboveRight {
			w.add("above_survey", pointer, "The water stands above "+endsAbove(ends)+" of the surveyed line; there the wall is taken to go straight up and adds no perimeter.")
		}
		if ends.Troughs > 1 {
			w.add("separate_troughs", pointer, "The water lies in separate troughs; all are taken to fill to one level and to share the flow.")
		}
	}
	if bank, known := c.BankHeight(); known && !c.Section.Closed() && depth > bank {
		w.add("overtopped", pointer, "The water stands above the bank: the section overtops there.")
	}
	if s.Discharge > 0 && s.Regime != flow.FullFlow && math.IsNaN(s.FroudeNumber) {
		w.add("froude_number_absent", pointer, "The energy coefficient rises so fast with depth that the square of the Froude number is negative; the regime is told by the sign of the energy's derivative.")
	}
	if c.Law == nil {
		return
	}
	if math.IsNaN(s.Conveyance) || s.Conveyance == 0 {
		if _, sand := c.Law.(friction.SandRoughness); sand && !(s.Discharge > 0) && !(c.Slope > 0) {
			w.add("conveyance_absent", pointer, "The conveyance of sand roughness depends on the flow; give a discharge or a positive bed_slope.")
		} else {
			w.add("conveyance_absent", pointer, "The roughness is so large against the hydraulic radius that the friction law gives no conveyance at this depth.")
		}
	}
	if sand, ok := c.Law.(friction.SandRoughness); ok && s.Discharge > 0 && sand.Reynolds(s.Geometry, s.Velocity*s.Geometry.Area) < leastTurbulent {
		w.add("low_reynolds_number", pointer, "The Reynolds number is below 4000, where the flow may not be turbulent and the Colebrook-White law was not measured.")
	}
}

// endsAbove names the ends of a surveyed line that the water stands above.
func endsAbove(ends section.Ends) string {
	switch {
	case ends.AboveLeft && ends.AboveRight:
		return "both ends"
	case ends.AboveLeft:
		return "the left end"
	}
	return "the right end"
}
