package friction

import (
	"math"

	"leat/compute/section"
	"leat/compute/solve"
)

// Power is a law in which the conveyance is a constant times a power of the hydraulic radius,
//
//	K = C * A * R^(2/3)   with Form Manning
//	K = C * A * R^(1/2)   with Form Chezy
//
// so that it depends neither on slope nor on discharge. It is exported for solvers that treat such a law in closed form:
// they test for it with a type assertion to Power.
type Power struct {
	C    float64 // m^(1/3)/s for Manning's and Strickler's law, m^(1/2)/s for Chezy's
	form Form
}

// NewManning returns Manning's law, K = A R^(2/3)/n with n in s/m^(1/3) (R. Manning 1891, in the form of common practice).
// It fails with compute.Faults where n is not from 1e-6 to 1e3.
func NewManning(n float64) (Law, error) {
	if faults := withinManning(nil, "manning", n); len(faults) > 0 {
		return nil, faults
	}
	return Power{C: 1 / n, form: Manning}, nil
}

// NewStrickler returns the law of Gauckler and Strickler, K = k A R^(2/3) with k = 1/n in m^(1/3)/s (A. Strickler 1923).
// It fails with compute.Faults where k is not from 1e-3 to 1e6.
func NewStrickler(k float64) (Law, error) {
	if faults := within(nil, "strickler", "Strickler coefficient", k, leastStrickler, greatestStrickler); len(faults) > 0 {
		return nil, faults
	}
	return Power{C: k, form: Manning}, nil
}

// NewChezy returns Chezy's law, K = C A R^(1/2) with C in m^(1/2)/s (A. de Chezy 1768).
// It fails with compute.Faults where C is not from 1e-3 to 1e6.
func NewChezy(c float64) (Law, error) {
	if faults := within(nil, "chezy", "Chezy coefficient", c, leastChezy, greatestChezy); len(faults) > 0 {
		return nil, faults
	}
	return Power{C: c, form: Chezy}, nil
}

// Exponent returns the power of the hydraulic radius: 2/3 or 1/2.
func (p Power) Exponent() float64 {
	if p.form == Chezy {
		return 1. / 2
	}
	return 2. / 3
}

// At returns the conveyance, which is the same at every slope and discharge.
func (p Power) At(g section.Geometry) Conveyance {
	if !(g.Area > 0 && g.Perimeter > 0) {
		return Conveyance{}
	}
	if p.form == Chezy {
		speed := p.C * math.Sqrt(g.Area/g.Perimeter)
		return Conveyance{
			K:    speed * g.Area,
			Rate: speed * (1.5*g.TopWidth - 0.5*g.Area/g.Perimeter*g.PerimeterRate),
		}
	}
	return manning(g, p.C)
}

// Conveyance returns K alone, from the area and the hydraulic radius.
func (p Power) Conveyance(area, radius float64) float64 {
	switch {
	case !(area > 0 && radius < math.Inf(1)):
		return 0
	case p.form == Chezy:
		return p.C * math.Sqrt(radius) * area
	}
	return p.C * solve.TwoThirds(radius) * area
}

// FrictionSlope returns (discharge/K)^2 with K as At gives it but for its last places, at less cost where R^(-1/3) serves for the root; +Inf where there
// is no conveyance.
func (p Power) FrictionSlope(g section.Geometry, discharge float64) float64 {
	if !(g.Area > 0 && g.Perimeter > 0) {
		return math.Inf(1)
	}
	velocity := discharge / (p.C * g.Area)
	inverse := g.Perimeter / g.Area
	if p.form == Chezy {
		return velocity * velocity * inverse
	}
	root := solve.InverseCubeRoot(g.Area / g.Perimeter)
	return velocity * velocity * (inverse * root)
}

// AtSlope implements Law.
func (p Power) AtSlope(g section.Geometry, _ float64) Conveyance { return p.At(g) }

// AtDischarge implements Law.
func (p Power) AtDischarge(g section.Geometry, _ float64) Conveyance { return p.At(g) }

// Coefficients implements Law: the section is one, so both are 1.
func (p Power) Coefficients(section.Geometry) Coefficients { return one }

// Breaks implements Law: there are none.
func (p Power) Breaks() []float64 { return nil }

// Form implements Law.
func (p Power) Form() Form { return p.form }

// one is what every law answers that treats the section as one.
var one = Coefficients{Energy: 1, Momentum: 1}

// manning returns c A R^(2/3) and its derivative c R^(2/3) (5/3 T - 2/3 R dP/dy).
func manning(g section.Geometry, c float64) Conveyance {
	radius := g.Area / g.Perimeter
	speed := c * solve.TwoThirds(radius)
	return Conveyance{
		K:    speed * g.Area,
		Rate: speed * (5*g.TopWidth - 2*radius*g.PerimeterRate) / 3,
	}
}
