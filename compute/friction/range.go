package friction

import (
	"math"

	"leat/compute"
)

// The accepted ranges are far wider than any wall, bed or liquid, and narrow enough that nothing computed from
// them overflows.
const (
	leastManning, greatestManning     = 1e-6, 1e3  // s/m^(1/3)
	leastStrickler, greatestStrickler = 1e-3, 1e6  // m^(1/3)/s, the reciprocals of the same
	leastChezy, greatestChezy         = 1e-3, 1e6  // m^(1/2)/s
	leastSand, greatestSand           = 1e-12, 1e4 // m
	leastViscosity, greatestViscosity = 1e-9, 1.0  // m2/s
	leastGravity, greatestGravity     = 1e-3, 1e4  // m/s2
	greatestDepth                     = 1e100      // m
)

// within appends the fault of a value that is not a positive number from least to greatest.
func within(faults compute.Faults, member, name string, value, least, greatest float64) compute.Faults {
	switch {
	case math.IsNaN(value) || math.IsInf(value, 0):
		return append(faults, compute.Fault{Member: member, Code: "not_finite", Detail: "The " + name + " must be a finite number."})
	case value <= 0:
		return append(faults, compute.Fault{Member: member, Code: "not_positive", Detail: "The " + name + " must be greater than 0."})
	case value < least:
		return append(faults, compute.Fault{Member: member, Code: "out_of_range", Detail: "The " + name + " is smaller than any that occurs; check its unit."})
	case value > greatest:
		return append(faults, compute.Fault{Member: member, Code: "out_of_range", Detail: "The " + name + " is greater than any that occurs; check its unit."})
	}
	return faults
}

// withinManning is within for a Manning coefficient.
func withinManning(faults compute.Faults, member string, n float64) compute.Faults {
	return within(faults, member, "Manning coefficient", n, leastManning, greatestManning)
}
