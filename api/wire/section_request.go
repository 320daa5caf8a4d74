package wire

// SectionRequest asks for geometry and hydraulics at given depths. Exactly one of Depth and Depths is given.
type SectionRequest struct {
	Common
	Barrelled
	Section   Section   `json:"section" validate:"required"`
	Depth     Number    `json:"depth" quantity:"length" validate:"omitempty,gte=1e-18,lte=1e9"`
	Depths    []float64 `json:"depths" quantity:"length" validate:"omitempty,min=1,dive,gte=1e-18,lte=1e9"`
	Roughness Roughness `json:"roughness" validate:"omitempty"`
	BedSlope  Number    `json:"bed_slope" validate:"omitempty,gt=-1,lt=1,floor=1e-15"`
	Discharge Number    `json:"discharge" quantity:"discharge" validate:"omitempty,gte=1e-15,lte=1e12"`
}

func (r *SectionRequest) rules(w *walk) {
	switch {
	case r.Depth.Given && r.Depths != nil:
		w.faultAt("depths", codeConflictingMember, func() string { return "Give either depth or depths, not both." })
	case !r.Depth.Given && r.Depths == nil:
		w.faultAt("depth", codeMissingMember, func() string { return "depth is missing: give depth, a number, or depths, a list of numbers." })
	}
	r.Roughness.fits(w, &r.Section)
}
