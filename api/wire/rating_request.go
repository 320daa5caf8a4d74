package wire

// RatingKind says which flow a rating describes.
type RatingKind string

// The kinds of rating.
const (
	RatingUniform  RatingKind = "uniform"
	RatingCritical RatingKind = "critical"
)

// RatingRequest asks for a depth-discharge table: for Count depths from FromDepth to ToDepth, or for Discharges.
type RatingRequest struct {
	Common
	Barrelled
	Section    Section    `json:"section" validate:"required"`
	Roughness  Roughness  `json:"roughness" validate:"required"`
	BedSlope   Number     `json:"bed_slope" validate:"required,gt=-1,lt=1,floor=1e-15"`
	Kind       RatingKind `json:"kind" validate:"required,oneof=uniform critical"`
	FromDepth  Number     `json:"from_depth" quantity:"length" validate:"omitempty,gte=1e-18,lte=1e9"`
	ToDepth    Number     `json:"to_depth" quantity:"length" validate:"omitempty,gte=1e-18,lte=1e9"`
	Count      Whole      `json:"count" limit:"array_items" validate:"omitempty,gte=2"`
	Discharges []float64  `json:"discharges" quantity:"discharge" validate:"omitempty,min=1,dive,gte=1e-15,lte=1e12"`
}

func (r *RatingRequest) rules(w *walk) {
	r.Roughness.fits(w, &r.Section)
	byDepth := r.FromDepth.Given || r.ToDepth.Given || r.Count.Given
	switch {
	case r.Discharges != nil:
		if byDepth {
			w.faultAt("discharges", codeConflictingMember, func() string {
				return "Give either discharges or from_depth, to_depth and count, not both."
			})
		}
	case !byDepth:
		w.faultAt("discharges", codeMissingMember, func() string {
			return "discharges is missing: give discharges, a list of numbers, or from_depth, to_depth and count."
		})
	default:
		r.rangeRules(w)
	}
	if r.Kind == RatingUniform && r.BedSlope.Given && !(r.BedSlope.Value > 0) {
		w.faultAt("bed_slope", codeNotPositive, func() string {
			return `bed_slope must be greater than 0 for a rating of kind "uniform": there is no uniform flow on a horizontal or adverse bed.`
		})
	}
}

// rangeRules judges a rating by depths.
func (r *RatingRequest) rangeRules(w *walk) {
	missing := func(name string) {
		w.faultAt(name, codeMissingMember, func() string { return name + " is missing: from_depth, to_depth and count go together." })
	}
	if !r.FromDepth.Given {
		missing("from_depth")
	}
	if !r.ToDepth.Given {
		missing("to_depth")
	}
	if !r.Count.Given {
		missing("count")
	}
	if r.FromDepth.Given && r.ToDepth.Given && !(r.ToDepth.Value > r.FromDepth.Value) {
		w.faultAt("to_depth", codeNotRising, func() string { return "to_depth must be greater than from_depth." })
	}
}
