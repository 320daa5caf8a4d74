package section

import (
	"math"

	"leat/compute"
)

// Bounds of sizes in metres and of side slopes. They are far beyond any channel; within them no product that a
// section or a solver forms can overflow or lose its digits to underflow.
const (
	leastSize     = 1e-9
	greatestSize  = 1e9
	greatestSlope = 1e6
	leastOrdinate = 1e-100 // of levels and offsets, which may also be zero
)

// Codes that several rules share.
const (
	notANumber  = "not_a_number"
	notPositive = "not_positive"
	negative    = "negative"
	outOfRange  = "out_of_range"
)

// check collects the faults of one constructor.
type check struct{ faults compute.Faults }

func (c *check) add(member, code, detail string) {
	c.faults = append(c.faults, compute.Fault{Member: member, Code: code, Detail: detail})
}

// err returns the faults as an error, nil if there are none.
func (c *check) err() error {
	if len(c.faults) == 0 {
		return nil
	}
	return c.faults
}

// finite reports a member that is not a number or infinite, and returns false for it.
func (c *check) finite(member string, value float64) bool {
	if math.IsNaN(value) || math.IsInf(value, 0) {
		c.add(member, notANumber, "This is not a finite number; give one.")
		return false
	}
	return true
}

// size reports a length that is not positive or outside the bounds.
func (c *check) size(member string, value float64) bool {
	switch {
	case !c.finite(member, value):
	case value <= 0:
		c.add(member, notPositive, "This must be greater than 0.")
	case value < leastSize || value > greatestSize:
		c.add(member, outOfRange, "This is out of range; lengths from a nanometre to a million kilometres are accepted.")
	default:
		return true
	}
	return false
}

// isSize, isArea and isOrdinate say what the reports of the same name would find no fault in, for long lists, of which most members are sound
// and need no name.
func isSize(value float64) bool { return value >= leastSize && value <= greatestSize }

func isArea(value float64) bool {
	return value >= leastSize*leastSize && value <= greatestSize*greatestSize
}

func isOrdinate(value float64) bool {
	size := math.Abs(value)
	return size == 0 || size >= leastOrdinate && size <= greatestSize
}

// sizeOrZero reports a length that is negative or beyond the bounds; it may be zero or as small as it likes.
func (c *check) sizeOrZero(member string, value float64) bool {
	switch {
	case !c.finite(member, value):
	case value < 0:
		c.add(member, negative, "This must not be negative.")
	case value > greatestSize:
		c.add(member, outOfRange, "This is out of range; 0 and lengths up to a million kilometres are accepted.")
	default:
		return true
	}
	return false
}

// slope reports a side slope that is negative or beyond the bounds.
func (c *check) slope(member string, value float64) bool {
	switch {
	case !c.finite(member, value):
	case value < 0:
		c.add(member, negative, "A side slope must not be negative: the side would lean over the water.")
	case value > greatestSlope:
		c.add(member, outOfRange, "This is out of range; side slopes from 0 to 1e6 (horizontal per unit vertical) are accepted.")
	default:
		return true
	}
	return false
}

// gradient reports a gradient (vertical per horizontal) that is not positive or so flat or steep that the side slope is beyond the bounds.
func (c *check) gradient(member string, value float64) bool {
	switch {
	case !c.finite(member, value):
	case value <= 0:
		c.add(member, notPositive, "This must be greater than 0.")
	case value < 1/greatestSlope || value > greatestSlope:
		c.add(member, outOfRange, "This is out of range; slopes from 1e-6 to 1e6 (vertical per unit horizontal) are accepted.")
	default:
		return true
	}
	return false
}

// area reports an area that is not positive or outside the bounds of sizes squared.
func (c *check) area(member string, value float64) bool {
	switch {
	case !c.finite(member, value):
	case value <= 0:
		c.add(member, notPositive, "This must be greater than 0.")
	case value < leastSize*leastSize || value > greatestSize*greatestSize:
		c.add(member, outOfRange, "This is out of range; areas from a square nanometre to that of a square with sides of a million kilometres are accepted.")
	default:
		return true
	}
	return false
}

// ordinate reports an offset or level that is not finite or so large or small that lengths would lose their digits.
func (c *check) ordinate(member string, value float64) {
	if !c.finite(member, value) {
		return
	}
	if size := math.Abs(value); size > greatestSize || size != 0 && size < leastOrdinate {
		c.add(member, outOfRange, "This is out of range; 0 and values up to a million kilometres in size, but none below 1e-100, are accepted.")
	}
}
