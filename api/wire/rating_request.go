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
	Section    Section    `json:"section" validate:"required"`
	Roughness  Roughness  `json:"roughness" validate:"required"`
	BedSlope   Number     `json:"bed_slope" validate:"required,gt=-1,lt=1,floor=1e-15"`
	Kind       RatingKind `json:"kind" validate:"required,oneof=uniform critical"`
	FromDepth  Number     `json:"from_depth" quantity:"length" validate:"omitempty,gte=1e-18,lte=1e9"`
	ToDepth    Number     `json:"to_depth" quantity:"length" validate:"omitempty,gte=1e-18,lte=1e9"`
	Count      Whole      `json:"count" limit:"array_items" validate:"omitempty,gte=2"`
	Discharges []float64  `json:"discharges" quantity:"discharge" validate:"omitempty,min=1,dive,gte=1e-15,lte=1e12"`
}
