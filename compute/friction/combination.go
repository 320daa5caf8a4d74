package friction

import (
	"math"

	"leat/compute"
	"leat/compute/section"
	"leat/compute/solve"
)

// Combination is the rule by which parts of a perimeter with different Manning coefficients act together.
type Combination uint8

const (
	// Divided sums the conveyances of the zones.
	Divided Combination = iota
	// HortonEinstein assumes the same mean velocity everywhere: n^(3/2) is the mean of ni^(3/2) over the perimeter
	// (R. E. Horton 1933; H. A. Einstein 1934).
	HortonEinstein
	// Lotter sums discharges, each zone with its own hydraulic radius (G. K. Lotter 1933): the same as Divided.
	Lotter
	// Pavlovskii sums resisting forces: n^2 is the mean of ni^2 over the perimeter (N. N. Pavlovskii 1931).
	Pavlovskii
)

// String returns the rule's name in requests.
func (c Combination) String() string {
	switch c {
	case Divided:
		return "divided"
	case HortonEinstein:
		return "horton_einstein"
	case Lotter:
		return "lotter"
	case Pavlovskii:
		return "pavlovskii"
	}
	return "unknown"
}

// weight returns what a length of perimeter counts with coefficient n: n^(3/2) or n^2.
func (c Combination) weight(n float64) float64 {
	if c == HortonEinstein {
		return n * math.Sqrt(n)
	}
	return n * n
}

// composite returns the conveyance of a section taken as one, given sum, the integral of the weight over the perimeter, and its
// derivative with depth. With the mean weight sum/P, n is its 2/3 power (Horton and Einstein) or its square root (Pavlovskii).
func (c Combination) composite(g section.Geometry, sum, sumRate float64) Conveyance {
	if c == HortonEinstein { // K = A (A/sum)^(2/3)
		radius := g.Area / sum
		speed := solve.TwoThirds(radius)
		return Conveyance{
			K:    speed * g.Area,
			Rate: speed * (5*g.TopWidth - 2*radius*sumRate) / 3,
		}
	}
	// K = A R^(2/3)/sqrt(sum/P) = A (A^4/(P sum^3))^(1/6)
	radius := g.Area / g.Perimeter
	speed := solve.TwoThirds(radius) / math.Sqrt(sum/g.Perimeter)
	return Conveyance{
		K:    speed * g.Area,
		Rate: speed * (10*g.TopWidth - radius*g.PerimeterRate - 3*g.Area*(sumRate/sum)) / 6,
	}
}

// BedAndSides is Manning's law with one coefficient on the bed and another on all the rest of the wetted perimeter.
type BedAndSides struct {
	width      float64 // length of the bed, m
	bed, sides float64 // weights
	how        Combination
}

// NewBedAndSides returns the law of a section with a distinct bed, n in s/m^(1/3). A roof belongs to the sides. It fails with
// compute.Faults where an n is not from 1e-6 to 1e3 or the rule is neither HortonEinstein nor Pavlovskii.
func NewBedAndSides(s section.Bedded, bed, sides float64, how Combination) (Law, error) {
	var faults compute.Faults
	faults = withinManning(faults, "bed/manning", bed)
	faults = withinManning(faults, "sides/manning", sides)
	if how != HortonEinstein && how != Pavlovskii {
		faults = append(faults, compute.Fault{Member: "combine", Code: "unknown_rule", Detail: "Bed and sides combine as horton_einstein or pavlovskii."})
	}
	if len(faults) > 0 {
		return nil, faults
	}
	return &BedAndSides{width: s.BedWidth(), bed: how.weight(bed), sides: how.weight(sides), how: how}, nil
}

// At returns the conveyance, which is the same at every slope and discharge.
func (b *BedAndSides) At(g section.Geometry) Conveyance {
	if !(g.Area > 0 && g.Perimeter > 0) {
		return Conveyance{}
	}
	sum := b.width*b.bed + math.Max(0, g.Perimeter-b.width)*b.sides
	return b.how.composite(g, sum, g.PerimeterRate*b.sides)
}

// AtSlope implements Law.
func (b *BedAndSides) AtSlope(g section.Geometry, _ float64) Conveyance { return b.At(g) }

// AtDischarge implements Law.
func (b *BedAndSides) AtDischarge(g section.Geometry, _ float64) Conveyance { return b.At(g) }

// Coefficients implements Law: the section is one, so both are 1.
func (b *BedAndSides) Coefficients(section.Geometry) Coefficients { return one }

// Breaks implements Law: there are none beyond the section's.
func (b *BedAndSides) Breaks() []float64 { return nil }

// Form implements Law.
func (b *BedAndSides) Form() Form { return General }
