package wire

// DepthsRequest asks for the characteristic depths of one section.
type DepthsRequest struct {
	Common
	Barrelled
	Section   Section   `json:"section" validate:"required"`
	Roughness Roughness `json:"roughness" validate:"required"`
	BedSlope  Number    `json:"bed_slope" validate:"required,gt=-1,lt=1,floor=1e-15"`
	Discharge Number    `json:"discharge" quantity:"discharge" validate:"required,gte=1e-15,lte=1e12"`
	// Depth in m is one that occurs there.
	Depth Number `json:"depth" quantity:"length" validate:"omitempty,gte=1e-18,lte=1e9"`
}

func (r *DepthsRequest) rules(w *walk) { r.Roughness.fits(w, &r.Section) }
