package wire

// StateMembers says which groups of members a state has, after what was given.
type StateMembers uint8

const (
	// WithConveyance is for a roughness.
	WithConveyance StateMembers = 1 << iota
	// WithUniform is for a roughness and a positive slope.
	WithUniform
	// WithFlow is for a discharge: velocity to regime.
	WithFlow
	// WithFriction is for a roughness and a discharge: friction_slope, bed_shear_stress, stream_power.
	WithFriction
	// WithDischarge writes the state's own discharge, as in ratings and profiles.
	WithDischarge
)

// Regimes of flow.
const (
	Subcritical   = "subcritical"
	Critical      = "critical"
	Supercritical = "supercritical"
	RegimeFull    = "full"
)

// State describes the flow at one depth, in SI units. A value that cannot be given is NaN, an unknown regime empty: both are written null.
type State struct {
	Members StateMembers

	Depth, Area, WettedPerimeter, HydraulicRadius float64
	TopWidth, HydraulicDepth, CentroidDepth       float64

	Conveyance       float64
	UniformDischarge float64
	Discharge        float64

	Velocity, VelocityHead, FroudeNumber float64
	SpecificEnergy, SpecificForce        float64
	Regime                               string

	FrictionSlope, BedShearStress, StreamPower float64
}
