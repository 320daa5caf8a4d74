package friction

import (
	"math"
	"slices"

	"leat/compute"
	"leat/compute/section"
	"leat/compute/solve"
)

// Stones is the law of a lining of riprap, cobble or gravel, bound to one open section. With the mean flow depth da = A/T and the median stone D,
// Manning's n is, in metres,
//
//	n = 0.319 da^(1/6) / (2.25 + 5.23 log10(da/D))                   from da = 1.5 D on  (J. C. Blodgett 1986)
//	n = da^(1/6) / (sqrt(g) f(F) f(REG) f(CG))                       from 0.3 D to 1.5 D (J. C. Bathurst 1991)
//	f(F)   = (0.28 F/b)^log10(0.755/b),                f(CG) = (T/da)^(-b)
//	f(REG) = 13.434 (T/D)^0.492 b^(1.025 (T/D)^0.118), b = 1.14 (D/T)^0.453 (da/D)^0.814
//
// with F = V/sqrt(g da) (R. T. Kilgore and G. K. Cotton 2005, FHWA Hydraulic Engineering Circular 15, third edition, section 6.1, equations 6.1 to
// 6.6, with its choice between the two). Below 0.3 D no law is known, nor where Bathurst's velocity depends on itself with a power above
// 0.8 (very wide flow over stones): there is no conveyance.
//
// Where one formula gives way to the other the conveyance jumps: such depths are among Breaks. There may be two normal depths about it, or none.
type Stones struct {
	stone   float64 // D, m
	gravity float64 // m/s2
	breaks  []float64
	pieces  []Resistance // of the stretch below each break, and of that above the last
}

// Resistance is a formula for the roughness of stones.
type Resistance uint8

const (
	Unresolved Resistance = iota // flow too shallow against the stones for any
	Bathurst
	Blodgett
)

// The limits of the formulas, as da/D; above the greatest Blodgett's goes beyond its data.
const (
	leastSubmergence    = 0.3
	blodgettSubmergence = 1.5
	// GreatestSubmergence is the mean depth over the stone size up to which Blodgett's formula was fitted.
	GreatestSubmergence = 185
)

// greatestFeedback bounds the power of the velocity with which Bathurst's velocity depends on itself.
const greatestFeedback = 0.8

// NewStones returns the law of stones of a median size in m in an open section, under gravity in m/s2. It fails with compute.Faults where the size is not
// from 1e-4 to 1e2 or the section is closed.
func NewStones(size, gravity float64, s section.Section) (Law, error) {
	var faults compute.Faults
	faults = within(faults, "stone_size", "stone size", size, 1e-4, 1e2)
	faults = within(faults, "gravity", "gravity", gravity, leastGravity, greatestGravity)
	if s.Closed() {
		faults = append(faults, compute.Fault{Code: "closed_section", Detail: "Stones line open channels only; their roughness is not known in a closed section."})
	}
	if len(faults) > 0 {
		return nil, faults
	}
	law := &Stones{stone: size, gravity: gravity}
	law.part(s)
	return law, nil
}

// looks is the number of depths at which the section is looked at for a change of formula, leastLooks that of each smooth piece of it.
const looks, leastLooks = 64, 4

// part finds the depths at which the formula changes: at the breaks of the section and between them, where da is smooth.
func (l *Stones) part(s section.Section) {
	from := 0.25 * l.stone // da is no more than the depth, so that no formula holds up to here
	if from >= s.Height() {
		l.pieces = []Resistance{Unresolved}
		return
	}
	here := l.formula(s.At(from))
	reach := func(to float64) {
		for there := l.formula(s.At(to)); there != here; {
			// Halve down to neighbours: the lower one is the last depth of the formula here.
			a, b := from, to
			for {
				middle := a + (b-a)/2
				if middle <= a || middle >= b {
					break
				}
				if l.formula(s.At(middle)) == here {
					a = middle
				} else {
					b = middle
				}
			}
			l.breaks, l.pieces = append(l.breaks, a), append(l.pieces, here)
			from, here = b, l.formula(s.At(b))
		}
		from = to
	}
	breaks := s.Breaks()
	each := max(leastLooks, looks/(len(breaks)+1))
	for i := 0; i <= len(breaks); i++ {
		top := s.Height()
		if i < len(breaks) {
			top = breaks[i]
		}
		if top <= from {
			continue
		}
		if math.IsInf(top, 1) { // above the last break da rises without end
			for top = 2 * from; l.formula(s.At(top)) != Blodgett && top < immense; {
				top *= 2
			}
		}
		reach(math.Nextafter(from, top))
		bottom := from
		for j := 1; j < each; j++ {
			if to := bottom * solve.Power(top/bottom, float64(j)/float64(each)); to > from && to < top {
				reach(to)
			}
		}
		reach(top)
	}
	l.pieces = append(l.pieces, here)
}

// immense is a depth in m beyond all that occur.
const immense = 1e12

// formula returns the formula that holds at a geometry, by its own mean depth.
func (l *Stones) formula(g section.Geometry) Resistance {
	mean := g.Area / g.TopWidth
	switch {
	case mean > blodgettSubmergence*l.stone:
		return Blodgett
	case mean >= leastSubmergence*l.stone && l.bathurst(g).feedback <= greatestFeedback:
		return Bathurst
	}
	return Unresolved
}

// Formula returns the formula that holds at a depth.
func (l *Stones) Formula(depth float64) Resistance {
	i, _ := slices.BinarySearch(l.breaks, depth)
	return l.pieces[i]
}

// Submergence returns the mean depth over the stone size.
func (l *Stones) Submergence(g section.Geometry) float64 { return g.Area / (g.TopWidth * l.stone) }

// AtSlope implements Law. With Bathurst's formula the velocity is a power of what does not depend on it.
func (l *Stones) AtSlope(g section.Geometry, slope float64) Conveyance {
	if !(g.Area > 0 && g.TopWidth > 0 && slope > 0) {
		return Conveyance{}
	}
	switch l.Formula(g.Depth) {
	case Blodgett:
		return l.blodgett(g)
	case Bathurst:
		b := l.bathurst(g)
		// ln V = R^(2/3) S^(1/2)/n, with feedback*ln V in it.
		rest := 1 - b.feedback
		logV := (b.smooth + 0.5*math.Log(slope)) / rest
		rate := (b.smoothRate + b.feedbackRate*logV) / rest
		k := g.Area * solve.Exp(logV) / math.Sqrt(slope)
		return Conveyance{K: k, Rate: k * (g.TopWidth/g.Area + rate)}
	}
	return Conveyance{}
}

// AtDischarge implements Law: the velocity is known, and with it Bathurst's n.
func (l *Stones) AtDischarge(g section.Geometry, discharge float64) Conveyance {
	if !(g.Area > 0 && g.TopWidth > 0 && discharge > 0) {
		return Conveyance{}
	}
	switch l.Formula(g.Depth) {
	case Blodgett:
		return l.blodgett(g)
	case Bathurst:
		b := l.bathurst(g)
		relative := g.TopWidth / g.Area
		logV := math.Log(discharge / g.Area)
		k := g.Area * solve.Exp(b.smooth+b.feedback*logV)
		return Conveyance{K: k, Rate: k * (relative + b.smoothRate + b.feedbackRate*logV - b.feedback*relative)}
	}
	return Conveyance{}
}

// blodgett returns A R^(2/3)/n with Blodgett's n.
func (l *Stones) blodgett(g section.Geometry) Conveyance {
	mean := g.Area / g.TopWidth
	denominator := 2.25 + 5.23/math.Ln10*math.Log(mean/l.stone)
	n := 0.319 * math.Cbrt(math.Sqrt(mean)) / denominator
	k := manning(g, 1/n)
	meanRate := g.TopWidth/g.Area - g.TopWidthRate/g.TopWidth // dda/ddepth over da
	k.Rate += k.K * meanRate * (5.23/math.Ln10/denominator - 1.0/6)
	return k
}

// smoothness is the logarithm of what Manning's law gives on a slope of 1, R^(2/3)/n, by Bathurst's formula: smooth + feedback ln V, with the derivatives
// of both with depth.
type smoothness struct{ smooth, smoothRate, feedback, feedbackRate float64 }

// bathurst resolves Bathurst's formula at a geometry.
func (l *Stones) bathurst(g section.Geometry) smoothness {
	// Logarithms and their derivatives with depth.
	radius, radiusRate := math.Log(g.Area/g.Perimeter), g.TopWidth/g.Area-g.PerimeterRate/g.Perimeter
	mean, meanRate := math.Log(g.Area/g.TopWidth), g.TopWidth/g.Area-g.TopWidthRate/g.TopWidth
	size := math.Log(l.stone)
	broad, broadRate := math.Log(g.TopWidth)-size, g.TopWidthRate/g.TopWidth // T/D
	b, bRate := math.Log(1.14)-0.453*broad+0.814*(mean-size), -0.453*broadRate+0.814*meanRate

	feedback, feedbackRate := (math.Log(0.755)-b)/math.Ln10, -bRate/math.Ln10
	// ln of 0.28/(b sqrt(g da)), by which V makes Froude's number over b.
	perVelocity := math.Log(0.28) - b - 0.5*(math.Log(l.gravity)+mean)
	perVelocityRate := -bRate - 0.5*meanRate
	exponent := 1.025 * solve.Exp(0.118*broad)
	element := math.Log(13.434) + 0.492*broad + exponent*b
	elementRate := 0.492*broadRate + exponent*(bRate+0.118*broadRate*b)
	concentration := solve.Exp(b)
	narrow, narrowRate := broad+size-mean, broadRate-meanRate // T/da
	return smoothness{
		smooth: 2.0/3*radius - mean/6 + 0.5*math.Log(l.gravity) + feedback*perVelocity + element - concentration*narrow,
		smoothRate: 2.0/3*radiusRate - meanRate/6 + feedback*perVelocityRate + feedbackRate*perVelocity + elementRate -
			concentration*(bRate*narrow+narrowRate),
		feedback: feedback, feedbackRate: feedbackRate,
	}
}

// Coefficients implements Law: the section is one, so both are 1.
func (l *Stones) Coefficients(section.Geometry) Coefficients { return one }

// Breaks implements Law: the depths at which the formula changes.
func (l *Stones) Breaks() []float64 { return l.breaks }

// Form implements Law.
func (l *Stones) Form() Form { return General }
