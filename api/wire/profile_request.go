package wire

// ProfileRequest asks for one steady run of gradually varied flow. Exactly one of Reaches and Stations is given.
type ProfileRequest struct {
	Common
	// Discharge in m3/s is the total at the upstream end.
	Discharge Number `json:"discharge" quantity:"discharge" validate:"required,gte=1e-15,lte=1e12"`
	// Reaches go from upstream to downstream.
	Reaches []Reach `json:"reaches" validate:"omitempty,min=1,dive"`
	// Stations go from upstream to downstream.
	Stations   []Station `json:"stations" validate:"omitempty,min=2,dive"`
	Upstream   Boundary  `json:"upstream" validate:"omitempty"`
	Downstream Boundary  `json:"downstream" validate:"required"`
	// Datum in m is the level of the bed at the downstream end.
	Datum    Number   `json:"datum" quantity:"length" validate:"omitempty,gte=-1e9,lte=1e9"`
	Report   Report   `json:"report" validate:"omitempty"`
	Geometry Geometry `json:"geometry" validate:"omitempty"`
}

// Reach is a prismatic reach of a profile.
type Reach struct {
	ID ID `json:"id"`
	// Length in m is along the bed.
	Length    Number    `json:"length" quantity:"length" validate:"required,gte=1e-9,lte=1e9"`
	BedSlope  Number    `json:"bed_slope" validate:"required,gt=-1,lt=1,floor=1e-15"`
	Section   Section   `json:"section" validate:"required"`
	Roughness Roughness `json:"roughness" validate:"required"`
	Barrelled
	// Inflow in m3/s is added at the upstream end.
	Inflow Number `json:"inflow" quantity:"discharge" validate:"omitempty,gte=0,floor=1e-15,lte=1e12"`
	// LateralInflow in m2/s is added along the reach.
	LateralInflow Number `json:"lateral_inflow" quantity:"discharge_per_length" validate:"omitempty,gte=0,floor=1e-15,lte=1e9"`
	// EntryLossCoefficient is a share of the reach's own velocity head at its upstream end.
	EntryLossCoefficient Number `json:"entry_loss_coefficient" validate:"omitempty,gte=0,lte=2"`
	// Drop in m is the fall of the bed at the downstream end; a rise where it is negative.
	Drop Number `json:"drop" quantity:"length" validate:"omitempty,gte=-1e9,lte=1e9"`
	// LossCoefficient is a share of the change of velocity head at the downstream end.
	LossCoefficient Number `json:"loss_coefficient" validate:"omitempty,gte=0,lte=1"`
}

// Station is a surveyed cross-section of a profile.
type Station struct {
	// Chainage in m is along the bed.
	Chainage Number `json:"chainage" quantity:"length" validate:"required,gte=-1e9,lte=1e9"`
	// BedLevel in m is given for every section but a surveyed one, which has levels of its own.
	BedLevel  Number    `json:"bed_level" quantity:"length" validate:"omitempty,gte=-1e9,lte=1e9"`
	Section   Section   `json:"section" validate:"required"`
	Roughness Roughness `json:"roughness" validate:"required"`
	Barrelled
}

// Report says where a profile reports: every Spacing, or At some chainages; where it is not given, as often as straight lines between need.
type Report struct {
	// Spacing is in m.
	Spacing Number `json:"spacing" quantity:"length" in:"spacing" validate:"omitempty,gte=1e-9,lte=1e9"`
	// At are chainages in m from the upstream end, rising.
	At    []float64 `json:"at" quantity:"length" in:"at" validate:"omitempty,min=1,dive,gte=0,lte=1e14"`
	Given bool      `json:"-"`
}

// Geometry is a GeoJSON LineString (RFC 7946) that a profile runs along.
type Geometry struct {
	Type        string     `json:"type" validate:"required,oneof=LineString"`
	Coordinates []Position `json:"coordinates" validate:"required,min=2,dive,ordinates=-1e9:1e9"`
	Given       bool       `json:"-"`
}
