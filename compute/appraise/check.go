package appraise

import (
	"math"
	"strings"

	"leat/compute"
)

// check gathers the faults of a lining's values. A missing one (NaN) is no fault here.
type check struct{ faults compute.Faults }

func (c *check) add(member, code, detail string) {
	c.faults = append(c.faults, compute.Fault{Member: member, Code: code, Detail: detail})
}

// size checks a value that has to be positive and finite.
func (c *check) size(member string, value float64) {
	switch {
	case math.IsInf(value, 0):
		c.add(member, "not_finite", member+" must be a finite number.")
	case value <= 0:
		c.add(member, "not_positive", member+" must be greater than 0.")
	}
}

// needed checks a value without which there is no roughness.
func (c *check) needed(member string, value float64) {
	if math.IsNaN(value) {
		c.add(member, "missing", member+" is missing: the lining's roughness follows from it.")
		return
	}
	c.size(member, value)
}

func (c *check) err() error {
	if len(c.faults) > 0 {
		return c.faults
	}
	return nil
}

// missing returns the reason that members of the lining are missing.
func missing(members ...string) Reason {
	detail := "The lining's " + members[0] + " is missing."
	if last := len(members) - 1; last > 0 {
		detail = "The lining's " + strings.Join(members[:last], ", ") + " and " + members[last] + " are missing."
	}
	return Reason{"missing_" + members[0], detail}
}
