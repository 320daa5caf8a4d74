package solve

import "math"

// A Ratio is a positive function of a positive variable with its logarithmic slope dln(ratio)/dln(x).
// Functions of depth run like powers of it, so that their logarithms are nearly straight lines.
type Ratio func(x float64) (ratio, power float64)

// steep is the logarithmic slope above which the last places of x already tell in the function: there the end is looked for place by place.
const steep = 32

// mostSteps bounds the work of UnitRoot; the bisection inside it needs fewer than 80 for any bracket of floats.
const mostSteps = 240

// UnitRoot returns the x in [lo, hi] at which f is one, where f rises there (or falls, if rising is false) through one.
// and is continuous. lo may be 0 and hi +Inf. ok is false where the function turns out not to be a number, or in the
// end did not converge; x is then the best point seen and no answer.
//
// Steps are Newton's on ln f over ln x: far from the root with a rough power, near it with the logarithm and the exponential
// replaced by their Pade approximants [1/1], which makes them rational. A step that leaves the bracket, or a bracket that
// shrinks too slowly, is answered by bisection in the logarithm. It does not allocate.
func UnitRoot(f Ratio, lo, hi, guess float64, rising bool) (x float64, ok bool) {
	x = guess
	if !(x > lo && x < hi) {
		x = middle(lo, hi)
	}
	best, bestError := x, math.Inf(1)
	before := math.Inf(1) // e of the step before
	for step := range mostSteps {
		ratio, power := f(x)
		e := ratio - 1
		if e == 0 {
			return x, true
		}
		if e != e {
			return x, false
		}
		if a := math.Abs(e); a < bestError {
			best, bestError = x, a
		}
		if (e < 0) == rising {
			lo = x
		} else {
			hi = x
		}
		d := -2 * e / ((ratio + 1) * power)
		next := x * (2 + d) / (2 - d)
		if ratio > 4 || ratio < 0.25 {
			next = x * roughPower(ratio, -1/power)
		}
		switch {
		case d == 0 || !(d > -1.5 && d < 1.5) || step > 8 && step%3 == 0 && !(math.Abs(d) < 1e-9):
			next = middle(lo, hi)
		case step > 0 && math.Abs(e) < 1e-6 && math.Abs(power) < steep && e*e*max(0.02, math.Abs(e)/(before*before)) < 1e-17*min(1, math.Abs(power)):
			// Converging by squares, at the pace of the step before: what is left at next is below the last place. The first step tells no
			// pace, and where the function is flat a small e is no small distance.
			if next >= lo && next <= hi {
				return next, true
			}
			return best, true
		case !(next > lo && next < hi):
			next = middle(lo, hi)
		}
		if next == x || !(next > lo && next < hi) {
			return best, true // the bracket or the step has shrunk below the last place
		}
		x, before = next, e
	}
	return best, false
}

// middle returns a point between two bounds, geometrically where they are far apart.
func middle(lo, hi float64) float64 {
	switch {
	case lo == 0 && math.IsInf(hi, 1):
		return 1
	case lo == 0:
		return hi / 16
	case math.IsInf(hi, 1):
		return lo * 16
	case hi > 4*lo:
		return math.Sqrt(lo) * math.Sqrt(hi)
	}
	return lo + (hi-lo)/2
}

// roughPower returns x^p within about a percent, for x > 0 and moderate p, from the bits of x: its exponent, and a parabola for the logarithm
// of its mantissa. Where the result is no normal number it returns NaN.
func roughPower(x, p float64) float64 {
	const one = 1 << 52
	l := float64(int64(math.Float64bits(x)))/one - 1023
	m := l - math.Floor(l)
	l = p * (l + bulge*m*(1-m))
	if !(math.Abs(l) < 1000) {
		return math.NaN()
	}
	m = l - math.Floor(l)
	return math.Float64frombits(uint64((l - bulge*m*(1-m) + 1023) * one))
}

// bulge makes m + bulge*m*(1-m) the parabola nearest to log2(1+m).
const bulge = 0.343
