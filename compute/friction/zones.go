package friction

import (
	"errors"
	"slices"
	"strconv"

	"leat/compute"
	"leat/compute/section"
	"leat/compute/solve"
)

// Zones is Manning's law in a section parted at offsets into zones, each with its own coefficient. The lines between zones
// add no perimeter.
//
// Combined as Divided or Lotter, the conveyance is the sum of the zones' and the velocity coefficients follow from them,
//
//	alpha = sum(Ki^3/Ai^2) A^2/K^3,   beta = sum(Ki^2/Ai) A/K^2
//
// (V. T. Chow 1959, Open-Channel Hydraulics, section 6-5, in the form of common practice). The other rules treat the section as one.
type Zones struct {
	parts  []section.Section
	n      []float64
	weight []float64 // what a length of perimeter counts, for HortonEinstein and Pavlovskii
	how    Combination
	breaks []float64
}

// NewZones returns the law of a section whose zones end at the offsets untils (m, rising, one fewer than zones) and have the Manning
// coefficients n in s/m^(1/3), from left to right. It fails with compute.Faults where the section cannot be parted there, an n is
// not from 1e-6 to 1e3, the numbers of offsets and zones do not fit, or the rule is unknown.
func NewZones(s section.Zoned, untils []float64, n []float64, how Combination) (Law, error) {
	var faults compute.Faults
	if how > Pavlovskii {
		faults = append(faults, compute.Fault{Member: "combine", Code: "unknown_rule", Detail: "Zones combine as divided, horton_einstein, lotter or pavlovskii."})
	}
	for i, coefficient := range n {
		faults = withinManning(faults, "zones/"+strconv.Itoa(i)+"/manning", coefficient)
	}
	if len(n) != len(untils)+1 {
		faults = append(faults, compute.Fault{Member: "zones", Code: "wrong_count", Detail: "Every zone but the last must have an offset at which it ends, the last one none."})
		return nil, faults
	}
	parts, err := s.Part(untils)
	if err != nil {
		var parting compute.Faults
		if !errors.As(err, &parting) {
			return nil, err
		}
		for _, fault := range parting {
			fault.Member = "zones/" + fault.Member + "/until"
			faults = append(faults, fault)
		}
	}
	if len(faults) > 0 {
		return nil, faults
	}
	law := &Zones{parts: parts, how: how, n: slices.Clone(n)}
	if law.AsOne() {
		law.weight = make([]float64, len(n))
		for i := range n {
			law.weight[i] = how.weight(n[i])
		}
	}
	for _, part := range parts {
		law.breaks = append(law.breaks, part.Breaks()...)
	}
	slices.Sort(law.breaks)
	law.breaks = slices.Compact(law.breaks)
	own := s.Breaks()
	law.breaks = slices.DeleteFunc(law.breaks, func(depth float64) bool {
		_, found := slices.BinarySearch(own, depth)
		return found
	})
	return law, nil
}

// AsOne reports whether the rule treats the section as one, so that alpha and beta are 1.
func (z *Zones) AsOne() bool { return z.how == HortonEinstein || z.how == Pavlovskii }

// At returns the conveyance, which is the same at every slope and discharge, and the velocity coefficients, in one go.
func (z *Zones) At(g section.Geometry) (Conveyance, Coefficients) {
	if !(g.Area > 0 && g.Perimeter > 0) {
		return Conveyance{}, one
	}
	if z.AsOne() {
		var sum, rate float64
		for i, part := range z.parts {
			zone := part.At(g.Depth)
			sum += zone.Perimeter * z.weight[i]
			rate += zone.PerimeterRate * z.weight[i]
		}
		return z.how.composite(g, sum, rate), one
	}
	// Areas are taken relative to the whole area and zone velocities v = R^(2/3)/n relative to R^(2/3) of the whole, so that no power
	// overflows. Then Ki = A v, Ki^2/Ai = A v^2 and Ki^3/Ai^2 = A v^3, whose derivatives follow from v ~ (A/P)^(2/3) with no
	// division by the zone's area: a zone that is nearly dry does no harm.
	scale := solve.TwoThirds(g.Area / g.Perimeter)
	var first, second, third, firstRate, secondRate, thirdRate float64
	for i, part := range z.parts {
		zone := part.At(g.Depth)
		if !(zone.Area > 0 && zone.Perimeter > 0) {
			continue
		}
		radius := zone.Area / zone.Perimeter
		v := solve.TwoThirds(radius) / z.n[i] / scale
		share := zone.Area / g.Area
		widening := zone.TopWidth / g.Area
		lengthening := radius * zone.PerimeterRate / g.Area
		first += share * v
		second += share * v * v
		third += share * v * v * v
		firstRate += v * (5*widening - 2*lengthening) / 3
		secondRate += v * v * (7*widening - 4*lengthening) / 3
		thirdRate += v * v * v * (3*widening - 2*lengthening)
	}
	if !(first > 0) {
		return Conveyance{}, one
	}
	conveyance := Conveyance{K: first * scale * g.Area, Rate: firstRate * scale * g.Area}
	energy := third / (first * first * first)
	momentum := second / (first * first)
	widening, rising := g.TopWidth/g.Area, firstRate/first
	return conveyance, Coefficients{
		Energy:       energy,
		EnergyRate:   energy * (thirdRate/third + 2*widening - 3*rising),
		Momentum:     momentum,
		MomentumRate: momentum * (secondRate/second + widening - 2*rising),
	}
}

// AtSlope implements Law.
func (z *Zones) AtSlope(g section.Geometry, _ float64) Conveyance {
	conveyance, _ := z.At(g)
	return conveyance
}

// AtDischarge implements Law.
func (z *Zones) AtDischarge(g section.Geometry, _ float64) Conveyance {
	conveyance, _ := z.At(g)
	return conveyance
}

// Coefficients implements Law.
func (z *Zones) Coefficients(g section.Geometry) Coefficients {
	if z.AsOne() {
		return one
	}
	_, coefficients := z.At(g)
	return coefficients
}

// Breaks implements Law: those of the zones that are not the section's own.
func (z *Zones) Breaks() []float64 { return z.breaks }

// Form implements Law.
func (z *Zones) Form() Form { return General }
