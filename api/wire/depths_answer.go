package wire

// DepthsAnswer answers a DepthsRequest, in SI units. A number that cannot be given is NaN and written null.
type DepthsAnswer struct {
	Traced
	Brief bool // leave out the lists Normal and Critical

	NormalDepth, CriticalDepth float64 // the lowest
	Normal, Critical           []State // rising in depth
	// NormalAbsent and CriticalAbsent say why there is no such depth; empty where there is one.
	NormalAbsent, CriticalAbsent string

	NormalVelocity, NormalFroudeNumber, NormalBedShearStress float64
	Fill                                                     float64

	SlopeClass    string // empty is written null
	CriticalSlope float64

	Capacity  Capacity
	Freeboard float64

	// Closed says that the section has a crown: only then surcharged and full_friction_slope are written.
	Closed            bool
	Surcharged        bool
	FullFrictionSlope float64

	Given DepthsGiven

	Warnings []Warning
}

// Capacity is the most a section carries in uniform flow up to its bank or crown.
type Capacity struct {
	Known            bool // else null
	Discharge, Depth float64
	FullDischarge    float64 // written for closed sections only
	Ratio            float64
}

// DepthsGiven is what is said of a depth that the request gave.
type DepthsGiven struct {
	Present                      bool
	State                        State
	AlternateDepth, SequentDepth float64
	Curve                        string // empty is written null
}
