package profile

import "leat/compute/flow"

// Run is one steady run. Exactly one of Reaches and Stations is given.
type Run struct {
	Discharge  float64   // total at the upstream end, m3/s
	Reaches    []Reach   // from upstream to downstream
	Stations   []Station // from upstream to downstream, chainages rising
	Upstream   Boundary
	Downstream Boundary
	Datum      float64 // bed level at the downstream end, m; not used with Stations, which carry their own levels
	Report     Report

	// Checkpoint is called at least every 0.1 ms of work; an error from it ends the solve with that error. It may be nil.
	Checkpoint func() error
}

// Reach is a prismatic reach.
type Reach struct {
	Channel flow.Channel // section, law, slope along the bed, gravity, barrels, coefficients
	Length  float64      // along the bed, m
	Inflow  float64      // total, added at its upstream end, m3/s
	Lateral float64      // total inflow per unit length, m2/s
	Drop    float64      // fall of the bed at its downstream end, m
	Loss    float64      // at its downstream end: this share of the change of velocity head, 0 to 1
	Entry   float64      // at its upstream end: this share of its own velocity head, 0 to 2
}

// Station is a surveyed cross-section. Between two stations area, width, first moment, perimeter and conveyance vary linearly at equal depth, and
// so does the bed.
type Station struct {
	Channel  flow.Channel // its Slope is not used: the bed levels say it
	Chainage float64      // along the bed, m
	BedLevel float64      // m
}

// BoundaryKind says what is known at an end of a run.
type BoundaryKind uint8

const (
	LeftOut      BoundaryKind = iota // upstream only: see the package's rules
	Depth                            // Value is the depth in m
	Level                            // Value is the water level in m
	Normal                           // the lowest normal depth there
	CriticalFlow                     // critical depth
	FreeOverfall                     // downstream only
	Gate                             // Opening and Contraction
	SharpCrested                     // a weir downstream: CrestHeight, CrestWidth, Coefficient (0: Rehbock)
	BroadCrested                     // a weir downstream: CrestHeight, CrestWidth, Coefficient (0: 1)
	Rating                           // downstream: Curve of depth and total discharge
)

// Boundary is what is known at an end of a run.
type Boundary struct {
	Kind                    BoundaryKind
	Value                   float64
	Opening, Contraction    float64
	CrestHeight, CrestWidth float64
	Coefficient             float64
	Curve                   [][2]float64
}

// Report says at which chainages stations are wanted. With neither member, there are as many as straight lines between them need to stay within
// 0.1 % of the depth.
type Report struct {
	Spacing float64   // m; 0 for none
	At      []float64 // chainages from the upstream end, rising; nil for none
	Most    int       // the most stations an answer may have; 0 for no limit
}
