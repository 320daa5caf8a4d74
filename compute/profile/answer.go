package profile

import "leat/compute/flow"

// Answer is a solved run.
type Answer struct {
	Stations []Point
	Reaches  []ReachSummary
	Curves   []CurveSpan
	Jumps    []Jump
	Controls []Control
	// Extent is how far upstream of the downstream end the flow first comes within 1 % of its own reach's normal depth, in m; NaN where it never does.
	Extent  float64
	Balance Balance
	Notes   []Note
}

// Point is one reported place.
type Point struct {
	Chainage                          float64 // from the upstream end along the bed, m
	Reach                             int     // index of the reach, or of the interval between two stations
	BedLevel, WaterLevel, EnergyLevel float64 // m
	State                             flow.State
	Curve                             string // M1 to A3, uniform, or empty where full or between stations that differ
}

// ReachSummary describes a reach at the discharge of its downstream end.
type ReachSummary struct {
	NormalDepth, CriticalDepth float64 // NaN for none
	Class                      flow.SlopeClass
}

// CurveSpan is a stretch of one curve.
type CurveSpan struct {
	From, To float64 // chainages, m
	Reach    int
	Curve    string
}

// Jump is a hydraulic jump, without length at its place.
type Jump struct {
	Chainage                       float64
	Reach                          int
	UpstreamDepth, DownstreamDepth float64
	FroudeNumber                   float64 // upstream
	EnergyLoss                     float64 // m
	Length                         float64 // what it needs downstream, m (Hager 1992)
	Form                           string  // undular, weak, oscillating, steady, strong
}

// Control is a place that governs the flow.
type Control struct {
	Chainage float64
	Kind     string // "critical", "depth", "level", "normal", "free_overfall", "gate", "sharp_crested", "broad_crested", "rating"
	Depth    float64
}

// Balance holds the largest residuals of an answer, recomputed from its depths.
type Balance struct {
	Energy   float64 // m of head, between neighbouring stations of one curve
	Momentum float64 // m3 of specific force, at jumps
}

// Note is something a caller should know, with the place it concerns.
type Note struct {
	Code     string
	Detail   string
	Chainage float64 // NaN where none is meant
	End      string  // "upstream" or "downstream" where a boundary is meant
}
