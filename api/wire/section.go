package wire

// Kind names a kind of cross-section.
type Kind string

// The kinds of cross-section.
const (
	Rectangular Kind = "rectangular"
	Trapezoidal Kind = "trapezoidal"
	Triangular  Kind = "triangular"
	Parabolic   Kind = "parabolic"
	UShaped     Kind = "u_shaped"
	Circular    Kind = "circular"
	Box         Kind = "box"
	Elliptical  Kind = "elliptical"
	Egg         Kind = "egg"
	Horseshoe   Kind = "horseshoe"
	Gutter      Kind = "gutter"
	TwoStage    Kind = "two_stage"
	Surveyed    Kind = "surveyed"
	Tabulated   Kind = "tabulated"
)

// Section is a cross-section of any kind: the union of the members of all kinds. After Decode exactly those of its
// Kind can be given, and those that the kind needs are. The tag `in` names the kinds a member belongs to; a question
// mark says that it may be left out there.
//
// Lengths lie between 1e-9 and 1e9 m and side slopes are 0 or between 1e-9 and 1e6, so that no power of them that
// hydraulics needs leaves the range of float64.
type Section struct {
	Kind Kind `json:"kind" validate:"required,oneof=rectangular trapezoidal triangular parabolic u_shaped circular box elliptical egg horseshoe gutter two_stage surveyed tabulated"`

	BottomWidth    Number `json:"bottom_width" quantity:"length" in:"rectangular trapezoidal two_stage" validate:"omitempty,gte=1e-9,lte=1e9"`
	SideSlope      Number `json:"side_slope" in:"trapezoidal? triangular? two_stage" validate:"omitempty,gte=0,floor=1e-9,lte=1e6"`
	LeftSideSlope  Number `json:"left_side_slope" in:"trapezoidal? triangular?" validate:"omitempty,gte=0,floor=1e-9,lte=1e6"`
	RightSideSlope Number `json:"right_side_slope" in:"trapezoidal? triangular?" validate:"omitempty,gte=0,floor=1e-9,lte=1e6"`
	TopWidth       Number `json:"top_width" quantity:"length" in:"parabolic" validate:"omitempty,gte=1e-9,lte=1e9"`
	Width          Number `json:"width" quantity:"length" in:"u_shaped box elliptical" validate:"omitempty,gte=1e-9,lte=1e9"`
	Height         Number `json:"height" quantity:"length" in:"parabolic box elliptical egg horseshoe" validate:"omitempty,gte=1e-9,lte=1e9"`
	Diameter       Number `json:"diameter" quantity:"length" in:"circular" validate:"omitempty,gte=1e-9,lte=1e9"`
	Haunch         Number `json:"haunch" quantity:"length" in:"box?" validate:"omitempty,gte=0,floor=1e-9,lte=1e9"`
	Inverted       bool   `json:"inverted" in:"egg?"`

	CrossSlope  Number `json:"cross_slope" in:"gutter" validate:"omitempty,gte=1e-6,lte=1e6"`
	CurbHeight  Number `json:"curb_height" quantity:"length" in:"gutter" validate:"omitempty,gte=1e-9,lte=1e9"`
	GutterWidth Number `json:"gutter_width" quantity:"length" in:"gutter?" validate:"omitempty,gte=1e-9,lte=1e9"`
	GutterSlope Number `json:"gutter_slope" in:"gutter?" validate:"omitempty,gte=1e-6,lte=1e6"`

	BenchHeight     Number `json:"bench_height" quantity:"length" in:"two_stage" validate:"omitempty,gte=1e-9,lte=1e9"`
	BenchWidth      Number `json:"bench_width" quantity:"length" in:"two_stage?" validate:"omitempty,gte=0,floor=1e-9,lte=1e9"`
	LeftBenchWidth  Number `json:"left_bench_width" quantity:"length" in:"two_stage?" validate:"omitempty,gte=0,floor=1e-9,lte=1e9"`
	RightBenchWidth Number `json:"right_bench_width" quantity:"length" in:"two_stage?" validate:"omitempty,gte=0,floor=1e-9,lte=1e9"`
	UpperSideSlope  Number `json:"upper_side_slope" in:"two_stage" validate:"omitempty,gte=0,floor=1e-9,lte=1e6"`

	// Points are pairs of offset and level in m.
	Points [][2]float64 `json:"points" quantity:"length length" in:"surveyed" limit:"points" validate:"omitempty,min=2,dive,columns=-1e9:1e9 -1e9:1e9"`
	// Rows are depth (m), area (m2), wetted perimeter (m) and top width (m).
	Rows [][4]float64 `json:"rows" quantity:"length area length length" in:"tabulated" validate:"omitempty,min=1,dive,columns=1e-18:1e9 1e-36:1e18 1e-18:1e9 0:1e9"`

	// BankHeight is the depth in m at which an open section overtops.
	BankHeight Number `json:"bank_height" quantity:"length" in:"rectangular? trapezoidal? triangular? parabolic? u_shaped? gutter? two_stage? surveyed? tabulated?" validate:"omitempty,gte=1e-9,lte=1e9"`

	// Given reports whether the request has this object.
	Given bool `json:"-"`
}
