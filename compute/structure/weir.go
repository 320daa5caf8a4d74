package structure

import (
	"math"

	"leat/compute/solve"
)

// BroadCrestedEnergy returns the specific energy in m above the bed that a discharge in m3/s needs to pass a broad-crested weir with critical flow on its
// crest,
//
//	E = crest + 3/2 * (Q^2/(g*(Cd*b)^2))^(1/3)
//
// for a crest height and width in m, a coefficient Cd (1 for no loss) and gravity in m/s2 (common practice; Chow 1959, section 3-8).
func BroadCrestedEnergy(discharge, crest, width, coefficient, gravity float64) float64 {
	perWidth := discharge / (coefficient * width)
	return crest + 1.5*math.Cbrt(perWidth*perWidth/gravity)
}

// rehbockCorrection is the height in m that Rehbock adds to the head for surface tension and viscosity.
const rehbockCorrection = 0.0012

// RehbockDischarge returns the discharge in m3/s over a full-width sharp-crested weir at a head in m above its crest (T. Rehbock 1929, as in ISO 1438),
//
//	Q = 2/3*(0.602 + 0.083*h/crest)*sqrt(2g)*b*(h + 0.0012 m)^1.5
func RehbockDischarge(head, crest, width, gravity float64) float64 {
	h := head + rehbockCorrection
	return 2.0 / 3 * (0.602 + 0.083*head/crest) * math.Sqrt(2*gravity) * width * h * math.Sqrt(h)
}

// RehbockHead returns the head in m above the crest at which RehbockDischarge is a discharge in m3/s; ok is false where even no head passes more.
func RehbockHead(discharge, crest, width, gravity float64) (head float64, ok bool) {
	if RehbockDischarge(0, crest, width, gravity) >= discharge {
		return 0, false
	}
	return solve.UnitRoot(func(head float64) (float64, float64) {
		q := RehbockDischarge(head, crest, width, gravity) / discharge
		return q, head * (0.083/crest/(0.602+0.083*head/crest) + 1.5/(head+rehbockCorrection))
	}, 0, math.Inf(1), 1, true)
}

// WithinRehbock reports whether a head and a crest height in m lie in the limits of ISO 1438 for Rehbock's formula: head at least 0.03 m and at most the
// crest height times one, crest at least 0.1 m.
func WithinRehbock(head, crest, width float64) bool {
	return head >= 0.03 && head <= crest && head <= 1 && crest >= 0.1 && width >= 0.3
}

// SharpCrestedHead returns the head in m above the crest at which a discharge in m3/s passes a sharp-crested weir of a given coefficient,
// Q = 2/3*Cd*sqrt(2g)*b*h^1.5 (Poleni 1717).
func SharpCrestedHead(discharge, width, coefficient, gravity float64) float64 {
	return solve.TwoThirds(discharge / (2.0 / 3 * coefficient * math.Sqrt(2*gravity) * width))
}
