// Package friction gives the conveyance of a cross-section and its derivative by each friction law, and the
// velocity coefficients that follow from zones of different roughness.
package friction

import "leat/compute/section"

// Conveyance is what a law says at one depth. Discharge = K * sqrt(friction slope).
type Conveyance struct {
	K    float64 // m3/s; 0 where the law gives none
	Rate float64 // dK/ddepth at the same slope, or the same discharge, m2/s
}

// Coefficients are the velocity coefficients of a section at one depth and their derivatives with depth.
type Coefficients struct {
	Energy, EnergyRate     float64 // alpha and dalpha/ddepth (1/m)
	Momentum, MomentumRate float64 // beta and dbeta/ddepth (1/m)
}

// A Law is a roughness bound to a section. It is immutable and safe for concurrent use; its methods do not allocate.
type Law interface {
	// AtSlope returns the conveyance of uniform flow at a friction slope, 0 < slope < 1.
	AtSlope(g section.Geometry, slope float64) Conveyance
	// AtDischarge returns the conveyance Q/sqrt(Sf) of a discharge in m3/s through this geometry.
	AtDischarge(g section.Geometry, discharge float64) Conveyance
	// Coefficients returns alpha and beta; 1 and 0 rates where the law treats the section as one.
	Coefficients(g section.Geometry) Coefficients
	// Breaks returns further depths, beyond the section's own, at which the conveyance or its derivative may jump
	// (the depths of manning_by_depth, the depths at which a zone begins to be wet), strictly rising.
	Breaks() []float64
	// Form says what is known of the law.
	Form() Form
}

// Form classifies laws for solvers.
type Form uint8

const (
	// General promises nothing beyond smooth pieces.
	General Form = iota
	// Manning promises K = C*A*R^(2/3) with the constant C that Power.C holds.
	Manning
	// Chezy promises K = C*A*R^(1/2) with such a constant.
	Chezy
	// Whole promises a conveyance that is the area times a function of the hydraulic radius alone that rises with it, and
	// coefficients of 1 (Colebrook-White, grass).
	Whole
)
