package friction

import (
	"math"

	"leat/compute"
	"leat/compute/section"
	"leat/compute/solve"
)

// Grass is the law of grass linings: stems bend under the flow, so that Manning's n falls with the mean boundary shear stress,
//
//	n = Cn/tau^0.4,   tau = rho g R S in N/m2
//
// (R. T. Kilgore and G. K. Cotton 2005, FHWA Hydraulic Engineering Circular 15, third edition, section 4.1, after N. Kouwen and R.-M. Li
// 1981). With Manning's law that makes uniform flow Q = (rho g)^0.4/Cn A R^(16/15) S^0.9: depth and roughness need no iteration.
type Grass struct {
	coefficient float64 // Cn
	weight      float64 // (rho g)^0.4
}

// NewGrass returns the law of a grass roughness coefficient Cn (as used with N/m2) and gravity in m/s2. It fails with
// compute.Faults where one of them is not positive or wildly out of the range of what occurs.
func NewGrass(coefficient, gravity float64) (Law, error) {
	var faults compute.Faults
	faults = within(faults, "grass_roughness", "grass roughness coefficient", coefficient, leastManning, greatestManning)
	faults = within(faults, "gravity", "gravity", gravity, leastGravity, greatestGravity)
	if len(faults) > 0 {
		return nil, faults
	}
	return Grass{coefficient: coefficient, weight: solve.Power(compute.WaterDensity*gravity, 0.4)}, nil
}

// unit returns what flows uniformly on a slope of 1, (rho g)^0.4/Cn A R^(16/15), and its relative rate of change with depth times the area.
func (l Grass) unit(g section.Geometry) (q, relative float64) {
	radius := g.Area / g.Perimeter
	q = l.weight / l.coefficient * g.Area * radius * math.Cbrt(fifthRoot(radius))
	return q, g.TopWidth + 16.0/15*(g.TopWidth-radius*g.PerimeterRate)
}

// fifthRoot returns x^(1/5).
func fifthRoot(x float64) float64 { return solve.PairedPower(x, fifth) }

// fifth is 1/5 in paired precision.
var fifth = solve.Pair{High: 1}.Divide(solve.Pair{High: 5})

// AtSlope implements Law: K = Q/sqrt(S).
func (l Grass) AtSlope(g section.Geometry, slope float64) Conveyance {
	if !(g.Area > 0 && g.Perimeter > 0 && slope > 0) {
		return Conveyance{}
	}
	q, relative := l.unit(g)
	root := fifthRoot(slope)
	k := q * root * root
	return Conveyance{K: k, Rate: k * relative / g.Area}
}

// AtDischarge implements Law: the slope at which the discharge is uniform is (Q/unit)^(10/9).
func (l Grass) AtDischarge(g section.Geometry, discharge float64) Conveyance {
	if !(g.Area > 0 && g.Perimeter > 0 && discharge > 0) {
		return Conveyance{}
	}
	q, relative := l.unit(g)
	k := discharge * solve.PairedPower(q/discharge, fiveNinths)
	return Conveyance{K: k, Rate: 5.0 / 9 * k * relative / g.Area}
}

// fiveNinths is 5/9 in paired precision.
var fiveNinths = solve.Pair{High: 5}.Divide(solve.Pair{High: 9})

// Coefficients implements Law: the section is one, so both are 1.
func (l Grass) Coefficients(section.Geometry) Coefficients { return one }

// Breaks implements Law: there are none.
func (l Grass) Breaks() []float64 { return nil }

// Form implements Law.
func (l Grass) Form() Form { return Whole }
