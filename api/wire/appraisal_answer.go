package wire

// AppraisalAnswer answers an AppraisalRequest, in SI units. A number that cannot be given is NaN and written null.
type AppraisalAnswer struct {
	Verdict   string // meets, falls_short or undetermined
	Governing Governing
	Flows     []AppraisedFlow // rising in discharge
	Notice    string

	Warnings []Warning
	Traced
}

// Governing is the finding that decides over all flows: of those not met the one furthest beyond its limit, else of those met the nearest to it.
type Governing struct {
	Known        bool // else its members are null
	Flow         string
	Criterion    Criterion
	Value, Limit float64
}

// AppraisedFlow is what is said of one flow.
type AppraisedFlow struct {
	Name      string
	Discharge float64
	Depths    DepthsAnswer // without warnings and fingerprint, which stand at the top
	// BendRise in m is what a bend lifts the outer edge of the water by; written where Bent.
	Bent     bool
	BendRise float64
	// Lining is written where Lined.
	Lined    bool
	Lining   LiningState
	Findings []Finding
}

// LiningState is what a flow does to a lining, and what that withstands.
type LiningState struct {
	Known bool // else null

	Manning                                float64 // n in s/m^(1/3)
	BedShear, SideShear                    float64 // the greatest, N/m2
	PermissibleShear, PermissibleSideShear float64 // N/m2
	PermissibleVelocity                    float64 // m/s
	BendFactor                             float64 // 1 in a straight channel
	Safety, RecommendedSafety              float64
	GoverningPlace                         string // bed or sides; empty is written null
}

// Finding is the judgement by one criterion.
type Finding struct {
	Criterion    Criterion
	Value, Limit float64
	Judged       bool // else Met is written null
	Met          bool
	Reason       string // a code; empty is written null
	Detail       string // a sentence; left out where empty
}
