package solve

import "math"

// Exp returns e^x to about one unit in the last place; 0 or +Inf where the result under- or overflows. The argument is reduced by ln 2 in two parts, as in
// Power, but what is left is one number with its rounding beside it, not a pair, and even and odd terms of the Taylor series are summed apart, so that the
// processor can work on them side by side.
func Exp(x float64) float64 {
	switch {
	case x > 709.78:
		return math.Inf(1)
	case x < -745.2:
		return 0
	}
	n := math.Floor(x*math.Log2E + 0.5)
	high := x - n*lnTwoHigh // exact
	low := n * lnTwoLow
	r := high - low
	low = (high - r) - low
	// 1/k! from k = 2 to 14, on a remainder of at most 0.35.
	q := r * r
	even := 0.5 + q*(1.0/24+q*(1.0/720+q*(1.0/40320+q*(1.0/3628800+q*(1.0/479001600+q*(1.0/87178291200))))))
	odd := 1.0/6 + q*(1.0/120+q*(1.0/5040+q*(1.0/362880+q*(1.0/39916800+q*(1.0/6227020800)))))
	e := 1 + (r + (q*(even+r*odd) + low))
	if n > -1000 && n < 1000 {
		return e * math.Float64frombits(uint64(1023+int64(n))<<52)
	}
	return math.Ldexp(e, int(n))
}
