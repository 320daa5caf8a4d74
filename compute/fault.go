package compute

import "strings"

// A Fault says which input breaks which rule.
type Fault struct {
	// Member is the path of the input inside the object that was being built, its parts joined by "/",
	// in the names of the trade: "side_slope", "points/3/0". Empty means the object as a whole.
	Member string
	// Code is a stable name of the rule in snake_case: "not_positive", "lines_cross".
	Code string
	// Detail is one sentence: what is wrong and what would be accepted. It holds no numbers with units,
	// since the caller's units are not known here.
	Detail string
}

// Faults is the error of a constructor: every fault found, never empty.
type Faults []Fault

func (f Faults) Error() string {
	var b strings.Builder
	for i, fault := range f {
		if i > 0 {
			b.WriteString("; ")
		}
		if fault.Member != "" {
			b.WriteString(fault.Member)
			b.WriteString(": ")
		}
		b.WriteString(fault.Detail)
	}
	return b.String()
}
