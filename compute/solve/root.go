package solve

import "math"

// rootSteps bounds the evaluations of a search. Bisection of the binades and then of the digits of a float64
// takes fewer than 1,100 + 53.
const rootSteps = 1300

// halfway returns a point that halves the bracket: in the logarithm where its ends have one sign and are far apart.
func halfway(lo, hi float64) float64 {
	switch {
	case lo > 0 && hi > 8*lo:
		return math.Sqrt(lo) * math.Sqrt(hi)
	case hi < 0 && lo < 8*hi:
		return -math.Sqrt(-lo) * math.Sqrt(-hi)
	}
	return lo + 0.5*(hi-lo)
}

// RootSlopeless finds a zero of f between lo and hi, at which f must have opposite signs (or be zero), without slopes: by
// inverse quadratic interpolation where the last three points allow it, else by bisection (T. R. Chandrupatla, A new
// hybrid quadratic/bisection algorithm for finding the zero of a nonlinear function without using derivatives,
// Advances in Engineering Software 28, 1997). It goes on until the ends of the bracket are neighbours or f is zero
// and returns the end with the smaller absolute value. ok is false if the signs at lo and hi
// do not differ or f gives a NaN; x is then of no meaning. Where f jumps, x stands at the jump: callers who cannot exclude jumps check the value there.
func RootSlopeless(f func(x float64) float64, lo, hi float64) (x float64, iterations int, ok bool) {
	if !(lo < hi) {
		return 0, 0, false
	}
	// a is the newest point, b the other end of the bracket, c the point before.
	a, b := lo, hi
	fa, fb := f(a), f(b)
	if fa == 0 {
		return a, 2, true
	}
	if fb == 0 {
		return b, 2, true
	}
	if !(fa < 0 && fb > 0 || fa > 0 && fb < 0) {
		return 0, 2, false
	}
	c, fc := b, fb
	x = halfway(lo, hi)
	for iterations = 3; iterations < rootSteps; iterations++ {
		fx := f(x)
		if fx != fx {
			return 0, iterations, false
		}
		if fx == 0 {
			return x, iterations, true
		}
		if (fx < 0) == (fa < 0) {
			c, fc = a, fa
		} else {
			c, fc = b, fb
			b, fb = a, fa
		}
		a, fa = x, fx
		near := math.Min(math.Abs(a), math.Abs(b))
		least := 0x1p-53 * near // half a unit in the last place or a little less
		width := math.Abs(b - a)
		lower, upper := math.Min(a, b), math.Max(a, b)
		mid := halfway(lower, upper)
		if mid <= lower || mid >= upper {
			break
		}
		x = mid
		xi, phi := (a-b)/(c-b), (fa-fb)/(fc-fb)
		if phi*phi < xi && (1-phi)*(1-phi) < 1-xi {
			t := fa/(fb-fa)*fc/(fb-fc) + (c-a)/(b-a)*fa/(fc-fa)*fb/(fc-fb)
			if step := t * width; step >= 2*least && step <= width-2*least {
				x = a + t*(b-a)
			} else if step < 2*least {
				x = a + math.Copysign(2*least, b-a)
			} else {
				x = b - math.Copysign(2*least, b-a)
			}
			if x <= lower || x >= upper {
				x = mid
			}
		}
	}
	if math.Abs(fb) < math.Abs(fa) {
		return b, iterations, true
	}
	return a, iterations, true
}
