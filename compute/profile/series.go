package profile

import "math"

// order is the number of Gauss points of a panel by collocation; the function sought is a polynomial of one degree less.
const order = 12

// A series is a function on [-1, 1] as a sum of Legendre polynomials, P_0 first.
type series [order]float64

// rule holds the nodes of the Gauss-Legendre rule and the matrix that turns the values at them into a series (Abramowitz and Stegun 1964,
// 25.4.29 and 22.2.10).
var rule = newRule()

type legendreRule struct {
	gauss
	project [order][order]float64
}

func newRule() *legendreRule {
	r := &legendreRule{gauss: newGauss(order)}
	for j, t := range r.node {
		p, below := 1.0, 0.0
		for k := range order {
			r.project[k][j] = float64(2*k+1) / 2 * r.weight[j] * p
			p, below = legendre(k, t, p, below), p
		}
	}
	return r
}

// gauss is a Gauss-Legendre rule on [-1, 1].
type gauss struct{ node, weight []float64 }

// newGauss returns the rule of n points, by Newton's iteration from Tricomi's first guess.
func newGauss(n int) gauss {
	g := gauss{make([]float64, n), make([]float64, n)}
	for j := range n {
		t := -math.Cos(math.Pi * (float64(j) + 0.75) / (float64(n) + 0.5))
		var slope float64
		for range 8 {
			p, below := 1.0, 0.0
			for k := range n {
				p, below = legendre(k, t, p, below), p
			}
			slope = float64(n) * (t*p - below) / (t*t - 1)
			t -= p / slope
		}
		g.node[j] = t
		g.weight[j] = 2 / ((1 - t*t) * slope * slope)
	}
	return g
}

// legendre returns P_(k+1)(t) from P_k and P_(k-1).
func legendre(k int, t, p, below float64) float64 {
	return (float64(2*k+1)*t*p - float64(k)*below) / float64(k+1)
}

// newSeries returns the series of a function from its values at the nodes.
func newSeries(values *[order]float64) series {
	var s series
	for k := range order {
		sum := 0.0
		for j := range order {
			sum += rule.project[k][j] * values[j]
		}
		s[k] = sum
	}
	return s
}

// tail returns the size of the last two coefficients relative to the largest: how well the series resolves its function.
func (s *series) tail() float64 {
	largest := 0.0
	for _, c := range s {
		largest = max(largest, math.Abs(c))
	}
	if largest == 0 {
		return 0
	}
	return (math.Abs(s[order-1]) + math.Abs(s[order-2])) / largest
}

// next returns P_(k+1)(t) from P_k and P_(k-1).
func next(k int, t, p, below float64) float64 {
	return (recurrence[k][0]*t)*p - recurrence[k][1]*below
}

// recurrence holds (2k+1)/(k+1) and k/(k+1).
var recurrence = func() (r [order + 1][2]float64) {
	for k := range r {
		r[k] = [2]float64{float64(2*k+1) / float64(k+1), float64(k) / float64(k+1)}
	}
	return r
}()

// integral returns the integral from -1 to t, and the value at t.
func (s *series) integral(t float64) (integral, value float64) {
	p, below := 1.0, -1.0 // with P_(-1) = -1 the formula below holds for k = 0 too
	for k := 0; k < order; k++ {
		value += s[k] * p
		var above float64
		if k == 0 {
			above = t
			integral += s[0] * (above - below)
		} else {
			above = next(k, t, p, below)
			integral += s[k] * (above - below) * inverse[k]
		}
		p, below = above, p
	}
	return integral, value
}

// inverse holds 1/(2k+1).
var inverse = func() (r [order]float64) {
	for k := range r {
		r[k] = 1 / float64(2*k+1)
	}
	return r
}()

// antiderivative returns the series' integral from -1.
func (s *series) antiderivative() (a antiderivative) {
	var c [terms + 2]float64
	for k := range order {
		for l := k; l < order; l += 2 {
			c[k] += legendreInChebyshev[k][l] * s[l]
		}
	}
	a.from(&c)
	return a
}

// legendreInChebyshev[k][l] is the coefficient of T_k in P_l.
var legendreInChebyshev = func() (m [order][order]float64) {
	for j := range points {
		p, below := 1.0, 0.0
		for l := range order {
			for k := range order {
				weight := basis[k][min(j, terms-1-j)]
				if j >= terms/2 && k%2 == 1 {
					weight = -weight
				}
				m[k][l] += weight * p
			}
			p, below = legendre(l, points[j], p, below), p
		}
	}
	return m
}()

// The most that a tail may be the noise of the last places, where the chainage is a series over the depth and where the depth is one over the chainage.
const (
	noisyOverDepth    = 1e-6
	noisyOverChainage = 1e-9
)

// A floor watches the tails of ever narrower panels. Next to a crown or to critical depth the last places of the depth are coarse, and the tail stops falling: even
// where a function has a singular end, three halvings lower it well below half.
type floor struct {
	before [3]float64
	n      int
}

func newFloor() floor {
	none := math.Inf(1)
	return floor{before: [3]float64{none, none, none}}
}

// reached notes a tail and reports whether it is noise, which is at most noisy.
func (f *floor) reached(tail, noisy float64) bool {
	i := f.n % len(f.before)
	noise := tail < noisy && tail > f.before[i]/2
	f.before[i] = tail
	f.n++
	return noise
}
