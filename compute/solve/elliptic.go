package solve

import "math"

// SecondKind returns Legendre's incomplete elliptic integral of the second kind,
//
//	E = integral of sqrt(1 - m sin^2) from 0 to an angle between 0 and a right one,
//
// from the sine and cosine of the angle and the complement 1 - m > 0 of the parameter m, which may be negative. It is
// a sum of positive terms in Carlson's symmetric integrals, so that it keeps full relative precision: DLMF 19.25.9 where m < 0
// and 19.25.10 where m > 0.
func SecondKind(sine, cosine, complement float64) float64 {
	s2, c2 := sine*sine, cosine*cosine
	delta2 := c2 + complement*s2
	m := 1 - complement
	if m <= 0 {
		first, second := symmetric(c2, delta2, 1)
		return sine * (first - m/3*s2*second)
	}
	first, second := symmetric(c2, 1, delta2)
	return sine * (complement*(first+m/3*s2*second) + m*cosine/math.Sqrt(delta2))
}

// symmetric returns Carlson's RF(x, y, z) and RD(x, y, z) by duplication (B. C. Carlson, Numerical computation of real or
// complex elliptic integrals, Numerical Algorithms 10, 1995, algorithms of section 2 and 4; DLMF 19.36).
// x, y >= 0, at most one of them 0, z > 0.
func symmetric(x, y, z float64) (first, second float64) {
	f0, d0 := (x+y+z)/3, (x+y+3*z)/5
	f, d := f0, d0
	x0, y0 := x, y
	spread := math.Max(math.Abs(d0-x), math.Max(math.Abs(d0-y), math.Abs(d0-z)))
	spread = math.Max(spread, math.Max(math.Abs(f0-x), math.Max(math.Abs(f0-y), math.Abs(f0-z))))
	// The series below leaves out terms of the sixth order in spread/400: less than 1e-16.
	spread *= 400
	share, sum := 1.0, 0.0
	for spread*share > f || spread*share > d {
		rx, ry, rz := math.Sqrt(x), math.Sqrt(y), math.Sqrt(z)
		lambda := rx*ry + (rx+ry)*rz
		sum += share / (rz * (z + lambda))
		share *= 0.25
		x, y, z = 0.25*(x+lambda), 0.25*(y+lambda), 0.25*(z+lambda)
		f, d = 0.25*(f+lambda), 0.25*(d+lambda)
	}
	{
		u, v := (f0-x0)*share/f, (f0-y0)*share/f
		w := -(u + v)
		e2, e3 := u*v-w*w, u*v*w
		first = (1 - e2/10 + e3/14 + e2*e2/24 - 3.0/44*e2*e3) / math.Sqrt(f)
	}
	u, v := (d0-x0)*share/d, (d0-y0)*share/d
	w := -(u + v) / 3
	e2, e3, e4, e5 := u*v-6*w*w, (3*u*v-8*w*w)*w, 3*(u*v-w*w)*w*w, u*v*w*w*w
	series := 1 - 3.0/14*e2 + e3/6 + 9.0/88*e2*e2 - 3.0/22*e4 - 9.0/52*e2*e3 + 3.0/26*e5
	return first, 3*sum + share*series/(d*math.Sqrt(d))
}
