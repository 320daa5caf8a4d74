package solve

import "math"

// TwoThirds returns x^(2/3) for x >= 0 to less than one unit in the last place. A guess y at x^(-1/3), as in InverseCubeRoot, is mended by one step and cut to
// seventeen bits, so that y^3 is exact and x*y too, in two parts of x; the rest of the binomial series of x*y*(1 - h)^(-1/3), with h = 1 - x*y^3, is
// small against them. Where x^2 or y^3 might leave the normal numbers, math.Cbrt serves.
func TwoThirds(x float64) float64 {
	if !(x > 1e-290 && x < 1e290) {
		root := math.Cbrt(x)
		return root * root
	}
	bits := math.Float64bits(x)
	y := math.Float64frombits(thirdGuess - bits/3)
	h := 1 - (x*y)*(y*y)
	q := h * h
	y += y * (h*(1.0/3+h*(2.0/9)) + q*(h*(14.0/81)+q*(35.0/243)))
	y = math.Float64frombits((math.Float64bits(y) + 1<<35) &^ (1<<36 - 1))
	high := math.Float64frombits(bits &^ (1<<27 - 1))
	h = 1 - x*(y*y*y)
	return high*y + ((x-high)*y + (x*y)*(h*(1.0/3+h*(2.0/9+h*(14.0/81)))))
}

// InverseCubeRoot returns x^(-1/3) for 1e-290 < x < 1e290, and by way of math.Cbrt for others, to about one and a half units in the last place. It waits for
// no quotient: a guess from the bits of x, good to 4 %, is mended by two steps along the binomial series of (1 - h)^(-1/3) with h = 1 - x*guess^3.
func InverseCubeRoot(x float64) float64 {
	if !(x > 1e-290 && x < 1e290) {
		return 1 / math.Cbrt(x)
	}
	y := math.Float64frombits(thirdGuess - math.Float64bits(x)/3)
	h := 1 - (x*y)*(y*y)
	q := h * h
	y += y * (h*(1.0/3+h*(2.0/9)) + q*(h*(14.0/81)+q*(35.0/243+h*(91.0/729))))
	h = 1 - (x*y)*(y*y)
	return y + y*(h*(1.0/3+h*(2.0/9)))
}

// thirdGuess, less a third of the bits of x, are the bits of a guess at x^(-1/3): four thirds of the exponent's offset, less what makes the guess
// as often too large as too small.
const thirdGuess = 0x553ef0ff289dd796

// The natural logarithm of two in two parts: the first has 40 bits, so that its product with a binary exponent is exact.
const (
	lnTwoHigh = 0x1.62e42fefa2p-1
	lnTwoLow  = 0x1.9ef35793c7673p-41
)

// Power returns x^y for 0 < x < +Inf and any finite y, to about one unit in the last place; 0 or +Inf where the result under- or
// overflows, NaN for other x. The logarithm is taken in pairs from a table of 1/64 steps and the series of the
// inverse hyperbolic tangent, the exponential by its Taylor series after reduction by ln 2 (the method of P. T. P. Tang,
// Table-driven implementation of the logarithm function, ACM TOMS 16, 1990, in paired precision).
func Power(x, y float64) float64 { return PairedPower(x, Pair{High: y}) }

// PairedPower is Power for an exponent in paired precision, for powers that are themselves quotients: x^y has a relative
// error of ln(x) times the error of y.
func PairedPower(x float64, y Pair) float64 {
	if !(x > 0 && x <= math.MaxFloat64) || y.High != y.High {
		return math.NaN()
	}
	if y.High == 0 || x == 1 {
		return 1
	}
	l := logarithm(x)
	if size := math.Abs(y.High) * math.Abs(l.High); size > 800 {
		if (y.High > 0) == (l.High > 0) {
			return math.Inf(1)
		}
		return 0
	}
	return exponential(l.Times(y.High).Plus(l.High * y.Low))
}

// logarithm returns ln x in a pair with a relative error below 1e-19.
func logarithm(x float64) Pair {
	mantissa, exponent := math.Frexp(x)
	mantissa, exponent = 2*mantissa, exponent-1 // 1 <= mantissa < 2
	if mantissa > math.Sqrt2 {
		mantissa, exponent = 0.5*mantissa, exponent+1
	}
	i := int(math.Floor(mantissa*64+0.5)) - 64 // -20 <= i <= 27
	centre := 1 + float64(i)/64
	// ln(mantissa/centre) = 2 atanh(s), s = (mantissa - centre)/(mantissa + centre); the difference is exact.
	s := Pair{High: mantissa - centre}.Divide(Sum(mantissa, centre))
	q := s.High * s.High
	tail := s.High * q * (2.0/3 + q*(2.0/5+q*(2.0/7+q*(2.0/9+q*(2.0/11)))))
	l := Pair{2 * s.High, 2 * s.Low}.Plus(tail).Add(logTable[i+20])
	if exponent == 0 {
		return l
	}
	e := float64(exponent)
	return fast(e*lnTwoHigh, 0).Add(Product(e, lnTwoLow)).Add(l)
}

// exponential returns e^p, with a p of less than 800 in size.
func exponential(p Pair) float64 {
	n := math.Floor(p.High*math.Log2E + 0.5)
	r := Sum(p.High-n*lnTwoHigh, -n*lnTwoLow).Plus(p.Low)
	// 1/k! from k = 2 to 14, on a remainder of at most 0.35.
	t := r.High
	poly := 1.0/6 + t*(1.0/24+t*(1.0/120+t*(1.0/720+t*(1.0/5040+t*(1.0/40320+t*(1.0/362880+t*(1.0/3628800+
		t*(1.0/39916800+t*(1.0/479001600+t*(1.0/6227020800+t*(1.0/87178291200)))))))))))
	small := t*t*(0.5+t*poly) + r.Low*(1+t)
	s := Sum(1, t)
	return math.Ldexp(s.High+(s.Low+small), int(n))
}
