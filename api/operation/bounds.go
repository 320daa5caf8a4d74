package operation

import (
	"leat/api/wire"
	"leat/compute/flow"
)

// aboveSection returns the fault of a depth above what the section is defined for, and whether it is one.
func aboveSection(c *flow.Channel, depth float64, pointer string) (wire.Fault, bool) {
	if depth <= c.Section.Height() {
		return wire.Fault{}, false
	}
	detail := "The depth lies above the last row of the table; give one within it, or a table that goes on."
	if c.Section.Closed() {
		detail = "The depth lies above the crown of the closed section; give one not above its height, at which it is full."
	}
	return wire.Fault{Pointer: pointer, Code: "above_section", Detail: detail}, true
}
