package profile

import "math"

// terms is the number of Chebyshev points at which a prismatic panel takes its integrand; even. On random chains sixteen and twenty-four cost as much.
const terms = 20

// An antiderivative is a function on [-1, 1] that is 0 at -1, as the coefficients of its Chebyshev polynomials, T_0 first. It is what a panel holds: the chainage
// over a variable of the depth, or the depth over the chainage.
type antiderivative [terms + 1]float64

// points are the Chebyshev points of the first kind, falling, and basis[k][j] is 2/terms*T_k at the j-th of the first half of them.
var points, basis = func() (points [terms]float64, basis [terms][terms / 2]float64) {
	for j := range points {
		points[j] = math.Cos(math.Pi * (float64(j) + 0.5) / terms)
	}
	for j := range terms / 2 {
		points[terms-1-j] = -points[j]
		t, below := points[j], 1.0
		p := t
		basis[0][j], basis[1][j] = 1./terms, 2*t/terms
		for k := 2; k < terms; k++ {
			p, below = 2*t*p-below, p
			basis[k][j] = 2 * p / terms
		}
	}
	return points, basis
}()

// integrate sets a to the integral of a function from its values at the points, and returns the size of the function's last two coefficients relative to the
// largest: how well it is resolved.
func (a *antiderivative) integrate(values *[terms]float64) (tail float64) {
	var even, odd [terms / 2]float64
	for j := range terms / 2 {
		u, v := values[j], values[terms-1-j]
		even[j], odd[j] = u+v, u-v
	}
	var c [terms + 2]float64
	largest := 0.0
	for k := 0; k < terms; k += 2 {
		e, o := 0.0, 0.0
		b, d := &basis[k], &basis[k+1]
		for j := range terms / 2 {
			e += b[j] * even[j]
			o += d[j] * odd[j]
		}
		c[k], c[k+1] = e, o
		largest = max(largest, math.Abs(e), math.Abs(o))
	}
	a.from(&c)
	if largest == 0 {
		return 0
	}
	return (math.Abs(c[terms-1]) + math.Abs(c[terms-2])) / largest
}

// from sets a to the integral of a function from its Chebyshev coefficients, of which the last two are 0.
func (a *antiderivative) from(c *[terms + 2]float64) {
	a[1] = c[0] - c[2]/2
	start := a[1]
	for k := 2; k <= terms; k++ {
		a[k] = (c[k-1] - c[k+1]) * halves[k]
		if k%2 == 0 {
			start -= a[k]
		} else {
			start += a[k]
		}
	}
	a[0] = start
}

// halves[k] is 1/(2k).
var halves = func() (h [terms + 1]float64) {
	for k := 1; k <= terms; k++ {
		h[k] = 1 / float64(2*k)
	}
	return h
}()

// whole returns the value at 1.
func (a *antiderivative) whole() float64 {
	sum := 0.0
	for k := terms; k >= 0; k-- {
		sum += a[k]
	}
	return sum
}

// at returns the value and the derivative at a t. Even and odd polynomials are summed apart by Clenshaw's recurrence, in s = T_2(t), since the processor
// can work on the two and on their derivatives side by side: T_2k(t) = T_k(s), and T_(2k+1)(t)/t obeys the same recurrence.
func (a *antiderivative) at(t float64) (value, slope float64) {
	square := t * t
	s := 2*square - 1
	s2 := 2 * s
	e, e1 := a[terms], 0.0   // b_k and b_(k+1) of the even ones
	o, o1 := a[terms-1], 0.0 // and of the odd ones
	de, de1 := 0.0, 0.0      // their derivatives with s
	do, do1 := 0.0, 0.0
	for k := terms - 2; k > 0; k -= 2 {
		de, de1 = 2*e-de1+s2*de, de
		do, do1 = 2*o-do1+s2*do, do
		e, e1 = a[k]-e1+s2*e, e
		o, o1 = a[k-1]-o1+s2*o, o
	}
	// The even sum ends with T_0 = 1, T_1 = s; the odd one with T_1/t = 1, T_3/t = 2s - 1.
	de = e + s*de - de1
	e = a[0] + s*e - e1
	do -= do1
	o -= o1
	return e + t*o, o + 4*(t*de+square*do)
}

// bent is at with the second derivative, whose recurrence takes no longer, since the processor works on it beside the others.
func (a *antiderivative) bent(t float64) (value, slope, bend float64) {
	square := t * t
	s := 2*square - 1
	s2 := 2 * s
	e, e1 := a[terms], 0.0
	o, o1 := a[terms-1], 0.0
	de, de1, do, do1 := 0.0, 0.0, 0.0, 0.0
	be, be1, bo, bo1 := 0.0, 0.0, 0.0, 0.0 // the second derivatives with s
	for k := terms - 2; k > 0; k -= 2 {
		be, be1 = 4*de-be1+s2*be, be
		bo, bo1 = 4*do-bo1+s2*bo, bo
		de, de1 = 2*e-de1+s2*de, de
		do, do1 = 2*o-do1+s2*do, do
		e, e1 = a[k]-e1+s2*e, e
		o, o1 = a[k-1]-o1+s2*o, o
	}
	be = 2*de + s*be - be1
	de = e + s*de - de1
	e = a[0] + s*e - e1
	bo -= bo1
	do -= do1
	o -= o1
	return e + t*o, o + 4*(t*de+square*do), 4*(de+3*t*do) + 16*square*(be+t*bo)
}

// follow returns the t in [-1, 1] at which a monotone function has a value, from a guess that is near, by Halley's iteration, whose steps shrink by cubes; and
// what it found where it last looked. It gives up, and ok is false, where a step is large against what the function bends over, or leads out of the interval.
func (a *antiderivative) follow(want, t float64) (root float64, last footing, ok bool) {
	for range 4 {
		if !(t >= -1 && t <= 1) {
			return 0, last, false
		}
		value, slope, bend := a.bent(t)
		last = footing{t, value, slope, bend}
		step := (want - value) / slope
		b := bend / (2 * slope)
		if !(math.Abs(b*step) < 0.02) {
			return 0, last, false
		}
		step /= 1 + b*step
		next := t + step
		if math.Abs(step*step*step)*(1+b*b) <= 1e-17 {
			return next, last, next >= -1 && next <= 1
		}
		t = next
	}
	return 0, last, false
}

// A footing is a t with the value of a function and its first two derivatives there.
type footing struct{ t, value, slope, bend float64 }

// guess returns where a function has another value, by the series of its inverse, with its third derivative.
func (f *footing) guess(want, third float64) float64 {
	step := (want - f.value) / f.slope
	b := f.bend / (2 * f.slope)
	return f.t + step*(1-step*(b-step*(2*b*b-third/(6*f.slope))))
}

// invert returns the t in [-1, 1] at which a monotone function has a value between 0 and the whole, by Newton's iteration inside a bracket from a first guess.
func (a *antiderivative) invert(want, whole, t float64) (root float64) {
	lo, hi := -1.0, 1.0
	sign := math.Copysign(1, whole)
	before := 0.0 // the size of the step that led to t; 0 where none of Newton's did
	for range 60 {
		if !(t > lo && t < hi) {
			t, before = lo+(hi-lo)/2, 0
		}
		value, slope := a.at(t)
		e := value - want
		if sign*e < 0 {
			lo = t
		} else {
			hi = t
		}
		step := e / slope
		size := math.Abs(step)
		if !(size > 4e-16) || hi-lo < 4e-16 {
			return t
		}
		next := t - step
		// Where steps shrink by squares, what this one leaves is size*(size/before)^2 at most.
		if next > lo && next < hi && size*size*size <= 1e-17*before*before {
			return next
		}
		t, before = next, size
	}
	return t
}
