package flow

import (
	"math"

	"leat/compute/solve"
)

// samples is the number of stretches in which an irregular piece is searched. Sampling is closest at both ends of the piece, where a
// zone begins to be wet or a crown closes.
const samples = 24

// knots are the most stretches of one piece.
const knots = 2*samples + 2

// wary is how near to zero a rate must be at a sample for the stretch beside it to be looked at once more in its middle.
const wary = 0.2

// A Branch is a stretch of depth on which a curve is smooth and monotone. Its lower end is exclusive (0 for the first; otherwise the
// curve may jump there), its upper end inclusive (+Inf for the last of an open section).
type Branch struct {
	Lo, Hi float64
	Rising bool
	First  bool // the branch begins at the lower end of a smooth piece
	Last   bool // the branch ends at the upper end of a smooth piece
}

// inside returns a depth inside a branch to begin a search from.
func (b Branch) inside() float64 {
	switch {
	case math.IsInf(b.Hi, 1) && b.Lo == 0:
		return 1
	case math.IsInf(b.Hi, 1):
		return 2 * b.Lo
	case b.Lo == 0:
		return b.Hi / 2
	}
	return b.Lo + (b.Hi-b.Lo)/2
}

// branches visits the branches of a curve from the bed upward until visit returns false.
func (c *Channel) branches(f *curve, visit func(b Branch) bool) {
	breaks := newBreaks(c)
	lo := 0.0
	for {
		hi := breaks.next()
		if !c.piece(f, lo, hi, visit) || hi >= c.Section.Height() {
			return
		}
		lo = hi
	}
}

// piece visits the branches of a curve on one smooth piece; it reports whether to go on.
func (c *Channel) piece(f *curve, lo, hi float64, visit func(b Branch) bool) bool {
	var knot [knots + 1]float64
	n := c.cut(f, lo, hi, &knot)
	b := Branch{Lo: lo, Rising: f.risesFromZero(), First: true}
	if lo > 0 {
		b.Rising = f.rises(c.Section.At(above(lo)))
	}
	for i := 1; i <= n; i++ {
		end := knot[i]
		rising := true
		if !math.IsInf(end, 1) {
			rising = f.rises(c.Section.At(end))
		}
		if rising != b.Rising {
			// A turn that rounds to the end of the piece, the crown perhaps, stays just inside it.
			b.Hi = min(c.turn(f, max(knot[i-1], lo), end, rising), math.Nextafter(end, 0))
			if b.Hi > b.Lo {
				if !visit(b) {
					return false
				}
				b.Lo, b.First = b.Hi, false
			}
			b.Rising = rising
		}
	}
	b.Hi, b.Last = hi, true
	if b.Hi > b.Lo {
		return visit(b)
	}
	return true
}

// cut writes the ends of the stretches of a piece on which the curve's rate changes its sign at most once, both ends of the
// piece included, and returns how many stretches there are.
func (c *Channel) cut(f *curve, lo, hi float64, knot *[knots + 1]float64) int {
	knot[0] = lo
	switch f.turning {
	case parted:
		reference := 2 * lo
		if !math.IsInf(hi, 1) {
			reference = hi
		} else if lo == 0 {
			reference = 1
		}
		a, b := f.parts(c.Section.At(reference))
		if b < a {
			a, b = b, a
		}
		n := 1
		for _, depth := range [2]float64{a, b} {
			if depth > knot[n-1] && depth < hi {
				knot[n] = depth
				n++
			}
		}
		knot[n] = hi
		return n
	case searched:
		return c.sample(f, lo, hi, knot)
	}
	knot[1] = hi
	return 1
}

// sample cuts a piece of which nothing is known. Where the rate comes near zero between three samples without changing its sign, or between two that are near
// zero themselves, the place where it is nearest becomes a knot, so that a pair of turns is not passed over.
func (c *Channel) sample(f *curve, lo, hi float64, knot *[knots + 1]float64) int {
	var at, rate [samples + 1]float64
	for i := 1; i <= samples; i++ {
		at[i] = samplePoint(lo, hi, i)
		rate[i] = f.rate(c.Section.At(min(at[i], math.MaxFloat64)))
	}
	at[0], rate[0] = lo, math.Inf(-1)
	if lo > 0 {
		rate[0] = f.rate(c.Section.At(above(lo)))
	} else if f.risesFromZero() {
		rate[0] = math.Inf(1)
	}
	n := 0
	add := func(depth float64) {
		if depth > knot[n] {
			n++
			knot[n] = depth
		}
	}
	for i := 1; i <= samples; i++ {
		// Between the sample before and this one.
		if p, r := rate[i-1], rate[i]; p*r > 0 && min(math.Abs(p), math.Abs(r)) < wary {
			middle := at[i-1] + (at[i]-at[i-1])/2
			if m := f.rate(c.Section.At(middle)); m*r < 0 || math.Abs(m) <= min(math.Abs(p), math.Abs(r)) {
				if m*r > 0 {
					middle = c.nearestZero(f, at[i-1], middle, at[i])
				}
				add(middle)
			}
		}
		x := at[i]
		if i < samples {
			p, q, r := rate[i-1], rate[i], rate[i+1]
			flat := p == q && q == r // no conveyance yet
			if !flat && p*q > 0 && q*r > 0 && math.Abs(q) <= math.Abs(p) && math.Abs(q) <= math.Abs(r) {
				x = c.nearestZero(f, at[i-1], at[i], at[i+1])
			}
		}
		add(x)
	}
	if math.IsInf(hi, 1) {
		n++
	}
	knot[n] = hi
	return n
}

// samplePoint returns the i-th of samples points of a piece.
func samplePoint(lo, hi float64, i int) float64 {
	switch {
	case math.IsInf(hi, 1) && lo == 0:
		return math.Ldexp(1, 3*(i-samples/2))
	case math.IsInf(hi, 1):
		return lo + math.Ldexp(lo, i-samples/2)
	case i == samples:
		return hi // rounding must not lead beyond
	}
	u := float64(i) / samples
	return lo + (hi-lo)*(u*u*u*(10+u*(6*u-15)))
}

// nearestZero returns the depth between a and d at which the size of the rate, known to be less at b than at both, is least, or the first depth met
// at which the rate has the other sign.
func (c *Channel) nearestZero(f *curve, a, b, d float64) float64 {
	sign := math.Copysign(1, f.rate(c.Section.At(b)))
	return solve.Dip(func(depth float64) float64 { return sign * f.rate(c.Section.At(depth)) }, a, b, d)
}

// turn returns the depth between lo and hi at which the rate of a curve changes its sign: to rising or from it.
func (c *Channel) turn(f *curve, lo, hi float64, rising bool) float64 {
	sign := 1.0
	if !rising {
		sign = -1
	}
	// A finite bracket: the signs at zero and without end are known.
	if lo == 0 {
		lo = min(hi, math.MaxFloat64) / 2
		if math.IsInf(hi, 1) {
			lo = 1
		}
		for ; lo > 0 && sign*f.rate(c.Section.At(lo)) > 0; lo /= 16 {
			hi = lo
		}
	} else {
		lo = above(lo)
	}
	if math.IsInf(hi, 1) {
		for hi = 2 * lo; sign*f.rate(c.Section.At(hi)) <= 0; hi *= 16 {
			lo = hi
		}
	}
	depth, _, _ := solve.RootSlopeless(func(depth float64) float64 { return f.rate(c.Section.At(depth)) }, lo, hi)
	return depth
}

// above returns the next depth above another.
func above(depth float64) float64 { return math.Nextafter(depth, math.Inf(1)) }
