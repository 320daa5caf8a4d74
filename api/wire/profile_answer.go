package wire

// ProfileAnswer answers a ProfileRequest, in SI units. A number that cannot be given is NaN and written null.
type ProfileAnswer struct {
	Traced
	Stations []ProfileStation
	Reaches  []ProfileReach
	Curves   []ProfileCurve
	Jumps    []ProfileJump
	Controls []ProfileControl
	Extent   float64
	Balance  ProfileBalance
	Warnings []Warning
	// Geometry is the line that the request gave, if any, along which the run of Length m lies.
	Geometry *Geometry
	Length   float64
}

// ProfileStation is one place of a profile.
type ProfileStation struct {
	Chainage float64
	// Reach is the id of the reach as its JSON literal: that of the request, or the reach's index from 0 where that gives none.
	Reach                             ID
	BedLevel, WaterLevel, EnergyLevel float64
	Curve                             string // empty is written null
	State                             State
}

// ProfileReach describes a reach, or the interval between two surveyed stations, at the discharge of its downstream end.
type ProfileReach struct {
	ID                         ID // as in ProfileStation.Reach
	NormalDepth, CriticalDepth float64
	SlopeClass                 string // empty is written null
}

// ProfileCurve is a stretch of one curve.
type ProfileCurve struct {
	From, To float64
	Reach    ID
	Curve    string // empty is written null
}

// ProfileJump is a hydraulic jump.
type ProfileJump struct {
	Chainage                         float64
	Reach                            ID
	UpstreamDepth, DownstreamDepth   float64
	FroudeNumber, EnergyLoss, Length float64
	WaterLevel                       float64 // below the jump, NaN where not known; told as a place only
	Form                             string
}

// ProfileControl is a place that governs the flow.
type ProfileControl struct {
	Chainage float64
	Kind     string
	Depth    float64
}

// ProfileBalance holds the largest residuals of an answer.
type ProfileBalance struct{ Energy, Momentum float64 }
