package mapping

import (
	"bytes"
	"math"
	"slices"
	"strings"

	"leat/api/wire"
)

// A scale is a unit of a quantity: one of it is num/den in SI. Both are exact as float64, so that a value converts with one
// rounding or two: 300 mm are the float64 nearest to 0.3.
type scale struct {
	name     string
	num, den float64
}

// Exact by definition: the international foot and inch are 0.3048 m and 0.0254 m, the pound 0.45359237 kg, standard gravity 9.80665 m/s2.
var scales = map[wire.Quantity][]scale{
	wire.QuantityLength: {
		{"m", 1, 1}, {"mm", 1, 1000}, {"cm", 1, 100}, {"km", 1000, 1}, {"in", 254, 10000}, {"ft", 3048, 10000}, {"yd", 9144, 10000},
		{"US survey ft", 1200, 3937},
	},
	wire.QuantityArea: {{"m2", 1, 1}, {"cm2", 1, 10000}, {"mm2", 1, 1e6}, {"ft2", 9290304, 1e8}, {"in2", 64516, 1e8}},
	wire.QuantityDischarge: {
		{"m3/s", 1, 1}, {"l/s", 1, 1000}, {"m3/h", 1, 3600}, {"m3/d", 1, 86400}, {"l/min", 1, 60000}, {"ft3/s", 28316846592, 1e12},
	},
	wire.QuantityDischargePerLength: {{"m2/s", 1, 1}, {"ft2/s", 9290304, 1e8}},
	wire.QuantityVelocity:           {{"m/s", 1, 1}, {"cm/s", 1, 100}, {"mm/s", 1, 1000}, {"km/h", 10, 36}, {"ft/s", 3048, 10000}},
	wire.QuantityAcceleration:       {{"m/s2", 1, 1}, {"ft/s2", 3048, 10000}},
	wire.QuantityStress:             {{"N/m2", 1, 1}, {"Pa", 1, 1}, {"kPa", 1000, 1}, {"lbf/ft2", 45359237 * 980665, 1e8 * 9290.304}},
	wire.QuantityPowerPerArea:       {{"W/m2", 1, 1}},
	wire.QuantityKinematicViscosity: {{"m2/s", 1, 1}, {"mm2/s", 1, 1e6}, {"ft2/s", 9290304, 1e8}},
	wire.QuantityManning:            {{"s/m^(1/3)", 1, 1}},
	wire.QuantityStrickler:          {{"m^(1/3)/s", 1, 1}},
	wire.QuantityChezy:              {{"m^(1/2)/s", 1, 1}, {"ft^(1/2)/s", 0.552086949673690439425820580144, 1}},
	wire.Dimensionless:              {{"1", 1, 1}, {"%", 1, 100}, {"percent", 1, 100}, {"permille", 1, 1000}},
}

// A convert turns a value of a column into that of a member in the request's system of units. ok is false where the value has no
// counterpart (a slope of 1:0).
type convert func(v float64) (converted float64, ok bool)

// A measure is how the values of a feed become those of a member.
type measure struct {
	unit    string
	convert convert // nil where nothing changes
}

// A slopeOf is what a number that is a slope means in the contract.
type slopeOf uint8

const (
	noSlope   slopeOf = iota
	sineSlope         // drop along the bed: bed_slope
	runSlope          // horizontal per unit vertical: side slopes
	riseSlope         // vertical per unit horizontal: cross_slope, gutter_slope
)

func slopeOfMember(path []string) slopeOf {
	switch path[len(path)-1] {
	case "bed_slope":
		return sineSlope
	case "side_slope", "left_side_slope", "right_side_slope", "upper_side_slope":
		return runSlope
	case "cross_slope", "gutter_slope":
		return riseSlope
	}
	return noSlope
}

// slopeUnits are the ways to write a slope, by what they give: the tangent of its angle.
var slopeUnits = []struct {
	name    string
	tangent func(v float64) float64
}{
	{"tangent", func(v float64) float64 { return v }},
	{"%", func(v float64) float64 { return v / 100 }},
	{"percent", func(v float64) float64 { return v / 100 }},
	{"permille", func(v float64) float64 { return v / 1000 }},
	{ratioUnit, func(v float64) float64 { return 1 / v }},
	{"degrees", func(v float64) float64 { return math.Tan(v * (math.Pi / 180)) }},
}

// sineUnit and runUnit are the contract's own ways of writing slopes.
const (
	sineUnit = "sine"
	runUnit  = "x:1"
)

// unitNames lists the units in which a member may be given.
func unitNames(q wire.Quantity, slope slopeOf) []string {
	var names []string
	if slope == noSlope {
		for _, s := range scales[q] {
			names = append(names, s.name)
		}
		return names
	}
	switch slope {
	case sineSlope:
		names = append(names, sineUnit)
	case runSlope:
		names = append(names, runUnit)
	}
	for _, u := range slopeUnits {
		names = append(names, u.name)
	}
	return names
}

// ratioUnit is the drop of one in so many.
const ratioUnit = "1:x"

// ratio reads a text such as 1:200 as a number in a unit that is a ratio: the 200 of 1:x, the 2 of 2:1 in x:1.
func ratio(text []byte, unit string, mark byte) (float64, bool) {
	if unit != ratioUnit && unit != runUnit {
		return 0, false
	}
	left, right, found := bytes.Cut(text, []byte{':'})
	if !found {
		return 0, false
	}
	a, isNumber := parseNumber(bytes.TrimSpace(left), mark)
	b, isNumberToo := parseNumber(bytes.TrimSpace(right), mark)
	if unit == runUnit {
		a, b = b, a
	}
	return b / a, isNumber && isNumberToo && a != 0
}

// converter returns how values in a unit become those of a member in a system of units; nil where nothing changes. found is false for an unknown unit.
func converter(q wire.Quantity, slope slopeOf, unit string, system wire.System) (c convert, found bool) {
	if slope != noSlope {
		return slopeConverter(slope, unit)
	}
	at := slices.IndexFunc(scales[q], func(s scale) bool { return s.name == unit })
	if at < 0 {
		return nil, false
	}
	from := scales[q][at]
	if system == wire.SI {
		return from.to(scale{"", 1, 1}), true
	}
	own := system.Unit(q)
	to := slices.IndexFunc(scales[q], func(s scale) bool { return s.name == own })
	if to < 0 { // a plain number, in both systems the same
		return from.to(scale{"", 1, 1}), true
	}
	return from.to(scales[q][to]), true
}

// to returns the conversion from one scale to another.
func (s scale) to(other scale) convert {
	if s.num == other.num && s.den == other.den {
		return nil
	}
	num, den := s.num*other.den, s.den*other.num
	if common := greatestDivisor(num, den); common > 1 {
		num, den = num/common, den/common
	}
	switch {
	case den == 1:
		return func(v float64) (float64, bool) { return v * num, true }
	case num == 1:
		return func(v float64) (float64, bool) { return v / den, true }
	}
	return func(v float64) (float64, bool) { return v * num / den, true }
}

// greatestDivisor is Euclid's, of whole numbers; 1 where they are none, or too large to be exact.
func greatestDivisor(a, b float64) float64 {
	const exact = 1 << 53
	if a != math.Trunc(a) || b != math.Trunc(b) || a > exact || b > exact {
		return 1
	}
	for b != 0 {
		a, b = b, math.Mod(a, b)
	}
	return a
}

func slopeConverter(slope slopeOf, unit string) (convert, bool) {
	if slope == sineSlope && unit == sineUnit || slope == runSlope && unit == runUnit || slope == riseSlope && unit == "tangent" {
		return nil, true
	}
	at := -1
	for i := range slopeUnits {
		if slopeUnits[i].name == unit {
			at = i
		}
	}
	if at < 0 {
		return nil, false
	}
	tangent := slopeUnits[at].tangent
	if slope == runSlope && unit == ratioUnit {
		return nil, true // one vertical to x horizontal is what the contract says
	}
	return func(v float64) (float64, bool) {
		t := tangent(v)
		switch slope {
		case sineSlope:
			t /= math.Sqrt(1 + t*t)
		case runSlope:
			t = 1 / t
		}
		return t, !math.IsInf(t, 0) && !math.IsNaN(t)
	}, true
}

// otherSpellings are what people write for a unit.
var otherSpellings = strings.NewReplacer("³", "3", "²", "2", "‰", "permille", "°", "degrees", "L/", "l/")

// plainUnit is a unit as it is known here.
func plainUnit(unit string) string { return otherSpellings.Replace(strings.TrimSpace(unit)) }
