package friction

import (
	"math"

	"leat/compute"
	"leat/compute/section"
)

// SandRoughness is the law of Colebrook and White with the pipe diameter replaced by four hydraulic radii,
//
//	1/sqrt(f) = -2 log10(ks/(3.7*4R) + 2.51/(Re sqrt(f))),   Re = 4 R V/nu,   Sf = f V^2/(8 g R)
//
// (C. F. Colebrook 1939, Journal of the Institution of Civil Engineers 11; D = 4R after the ASCE Task Force on Friction
// Factors in Open Channels 1963), used at every Reynolds number, also where flow would be laminar or in transition.
//
// Where the logarithm's argument reaches 1, the law gives no conveyance: the roughness is as large as the flow is deep, or the
// flow so slow that the law has lost its meaning. At a given slope Argument tells; at a given discharge it happens
// exactly where the hydraulic radius is at most LeastRadius.
type SandRoughness struct {
	leastRadius float64 // ks/14.8, m
	viscosity   float64 // m2/s
	gravity     float64 // m/s2
}

// NewSandRoughness returns Colebrook and White's law for an equivalent sand roughness in m, a kinematic viscosity in m2/s and
// gravity in m/s2. It fails with compute.Faults where one of them is not positive or wildly out of the range of what occurs.
func NewSandRoughness(sandRoughness, viscosity, gravity float64) (Law, error) {
	var faults compute.Faults
	faults = within(faults, "sand_roughness", "sand roughness", sandRoughness, leastSand, greatestSand)
	faults = within(faults, "kinematic_viscosity", "kinematic viscosity", viscosity, leastViscosity, greatestViscosity)
	faults = within(faults, "gravity", "gravity", gravity, leastGravity, greatestGravity)
	if len(faults) > 0 {
		return nil, faults
	}
	return SandRoughness{leastRadius: sandRoughness / 14.8, viscosity: viscosity, gravity: gravity}, nil
}

// perLn is 2/ln(10): -2 log10(u) = -perLn ln(u).
const perLn = 2 / math.Ln10

// LeastRadius returns ks/14.8 in m: at this hydraulic radius and below there is no conveyance at any discharge or slope.
func (s SandRoughness) LeastRadius() float64 { return s.leastRadius }

// Argument returns the logarithm's argument of uniform flow at a friction slope; from 1 on there is no conveyance.
func (s SandRoughness) Argument(g section.Geometry, slope float64) float64 {
	radius := g.Area / g.Perimeter
	return s.leastRadius/radius + s.smooth(radius, slope)
}

// smooth returns the viscous part of the argument, 2.51 nu/(4R sqrt(8 g R S)).
func (s SandRoughness) smooth(radius, slope float64) float64 {
	return 2.51 * s.viscosity / (4 * radius * math.Sqrt(8*s.gravity*radius*slope))
}

// Reynolds returns the Reynolds number 4 R V/nu = 4 Q/(P nu) of a discharge in m3/s.
func (s SandRoughness) Reynolds(g section.Geometry, discharge float64) float64 {
	return 4 * discharge / (g.Perimeter * s.viscosity)
}

// AtSlope implements Law; the velocity at a slope is explicit.
func (s SandRoughness) AtSlope(g section.Geometry, slope float64) Conveyance {
	if !(g.Area > 0 && g.Perimeter > 0 && slope > 0) {
		return Conveyance{}
	}
	radius := g.Area / g.Perimeter
	rough := s.leastRadius / radius
	smooth := s.smooth(radius, slope)
	lack := (radius-s.leastRadius)/radius - smooth // 1 - argument, precise where the argument is near 1
	if !(lack > 0) {
		return Conveyance{}
	}
	argument := rough + smooth
	x := -perLn * logOf(argument, -lack)
	relative := g.TopWidth - radius*g.PerimeterRate // A (dR/dy)/R
	speed := math.Sqrt(8 * s.gravity * radius)
	return Conveyance{
		K:    speed * x * g.Area,
		Rate: speed * (x*(g.TopWidth+relative/2) + perLn*(rough+1.5*smooth)/argument*relative),
	}
}

// AtDischarge implements Law; 1/sqrt(f) is found to full precision, its derivative by implicit differentiation.
func (s SandRoughness) AtDischarge(g section.Geometry, discharge float64) Conveyance {
	if !(g.Area > 0 && g.Perimeter > 0 && discharge > 0) {
		return Conveyance{}
	}
	radius := g.Area / g.Perimeter
	rough := s.leastRadius / radius
	lack := (radius - s.leastRadius) / radius
	if !(lack > 0) {
		return Conveyance{}
	}
	smooth := 2.51 / s.Reynolds(g, discharge)
	x, _ := colebrook(rough, lack, smooth)
	relative := g.TopWidth - radius*g.PerimeterRate
	speed := math.Sqrt(8 * s.gravity * radius)
	// x + perLn ln(rough + smooth x) = 0 with d rough = -rough dR/R and d smooth = smooth dP/P.
	change := perLn * (rough*relative - smooth*x*radius*g.PerimeterRate) / (rough + smooth*x + perLn*smooth)
	return Conveyance{
		K:    speed * x * g.Area,
		Rate: speed * (x*(g.TopWidth+relative/2) + change),
	}
}

// Coefficients implements Law: the section is one, so both are 1.
func (s SandRoughness) Coefficients(section.Geometry) Coefficients { return one }

// Breaks implements Law: there are none that do not depend on the slope.
func (s SandRoughness) Breaks() []float64 { return nil }

// Form implements Law.
func (s SandRoughness) Form() Form { return Whole }

// DarcyFactor returns the Darcy-Weisbach friction factor f of Colebrook and White at a Reynolds number and a relative roughness
// ks/D (0 is smooth), and whether there is one: there is none where the relative roughness reaches 3.7.
func DarcyFactor(reynolds, relativeRoughness float64) (f float64, exists bool) {
	rough := relativeRoughness / 3.7
	if !(reynolds > 0 && rough >= 0 && rough < 1) {
		return 0, false
	}
	x, _ := colebrook(rough, 1-rough, 2.51/reynolds)
	return 1 / (x * x), true
}

// colebrook returns the root of
//
//	x + perLn ln(rough + smooth x) = 0,   0 <= rough < 1,  smooth > 0,  lack = 1 - rough
//
// and the number of Newton steps. The left side rises and is concave, and at x = lack/smooth it is x itself: Newton's
// first step from any point up to there stays above 0 and lands at or below the root, and from there the steps rise to it.
func colebrook(rough, lack, smooth float64) (x float64, steps int) {
	// First guess: one substitution from x = 8 (f = 1/64), or Newton's step from the upper limit where viscosity rules.
	limit := lack / smooth
	x = limit * (perLn * smooth / (1 + perLn*smooth))
	if substituted := -perLn * math.Log(rough+8*smooth); substituted > x {
		x = math.Min(substituted, limit)
	}
	for steps = 1; ; steps++ {
		argument := rough + smooth*x
		step := (x + perLn*logOf(argument, smooth*x-lack)) / (1 + perLn*smooth/argument)
		x -= step
		// The next error is at most half the square of the relative step, so it would be below rounding.
		if math.Abs(step) <= 1e-8*x || steps == 40 {
			return x, steps
		}
	}
}

// logOf returns ln(u), given u and u - 1, with full relative precision near u = 1.
func logOf(u, less float64) float64 {
	if u > 0.5 {
		return math.Log1p(less)
	}
	return math.Log(u)
}
