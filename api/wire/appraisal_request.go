package wire

// AppraisalRequest asks whether one section is good enough for its flows.
type AppraisalRequest struct {
	Common
	Barrelled
	Section Section `json:"section" validate:"required"`
	// Roughness is not given where the lining has a roughness of its own.
	Roughness Roughness `json:"roughness" validate:"omitempty"`
	BedSlope  Number    `json:"bed_slope" validate:"required,gt=-1,lt=1,floor=1e-15"`
	// Flows are discharges in m3/s under names of the caller's, each a total.
	Flows []NamedNumber `json:"flows" quantity:"discharge" limit:"flows" validate:"required,min=1,dive,named=1e-15:1e12"`
	// Depth in m is one that occurs there.
	Depth    Number   `json:"depth" quantity:"length" validate:"omitempty,gte=1e-18,lte=1e9"`
	Criteria Criteria `json:"criteria" validate:"required"`
	// CriterionFlows says which flows a criterion is about; all, where it does not name it.
	CriterionFlows CriterionFlows `json:"criterion_flows" validate:"omitempty"`
	Lining         ChannelLining  `json:"lining" validate:"omitempty"`
	Bend           Bend           `json:"bend" validate:"omitempty"`
}

// Criteria are the limits to judge by; only those that are given count.
type Criteria struct {
	// LeastFreeboard is in m.
	LeastFreeboard Number `json:"least_freeboard" quantity:"length" validate:"omitempty,gte=0,floor=1e-9,lte=1e9"`
	// FreeboardRule names a published rule that gives the least freeboard.
	FreeboardRule FreeboardRule `json:"freeboard_rule" validate:"omitempty,oneof=canal chute"`
	// GreatestFill is a share of the bank's or crown's height.
	GreatestFill Number `json:"greatest_fill" validate:"omitempty,gte=1e-9,lte=1"`
	// LeastVelocity and GreatestVelocity are in m/s.
	LeastVelocity    Number `json:"least_velocity" quantity:"velocity" validate:"omitempty,gte=1e-9,lte=1e9"`
	GreatestVelocity Number `json:"greatest_velocity" quantity:"velocity" validate:"omitempty,gte=1e-9,lte=1e9"`
	// LeastShear and GreatestShear are means over the wetted perimeter in N/m2.
	LeastShear    Number `json:"least_shear" quantity:"stress" validate:"omitempty,gte=1e-12,lte=1e12"`
	GreatestShear Number `json:"greatest_shear" quantity:"stress" validate:"omitempty,gte=1e-12,lte=1e12"`
	// CriticalBand are the two Froude numbers between which the flow is too near to critical.
	CriticalBand Pair `json:"critical_band" quantity:"dimensionless dimensionless" validate:"omitempty,columns=1e-6:1e3 1e-6:1e3"`
	// GreatestVedernikovNumber is 1 where roll waves begin to grow.
	GreatestVedernikovNumber Number `json:"greatest_vedernikov_number" validate:"omitempty,gte=1e-6,lte=1e6"`
	// LeastLiningSafety is what the lining withstands over what it must.
	LeastLiningSafety Number `json:"least_lining_safety" validate:"omitempty,gte=1e-6,lte=1e6"`

	// Given reports whether the request has this object.
	Given bool `json:"-"`
}

// FreeboardRule names a published rule of freeboard.
type FreeboardRule string

// The rules of freeboard.
const (
	CanalFreeboard FreeboardRule = "canal"
	ChuteFreeboard FreeboardRule = "chute"
)

// CriterionFlows holds, for each criterion, the names of the flows that it is about.
type CriterionFlows struct {
	LeastFreeboard           []string `json:"least_freeboard" validate:"omitempty,min=1"`
	FreeboardRule            []string `json:"freeboard_rule" validate:"omitempty,min=1"`
	GreatestFill             []string `json:"greatest_fill" validate:"omitempty,min=1"`
	LeastVelocity            []string `json:"least_velocity" validate:"omitempty,min=1"`
	GreatestVelocity         []string `json:"greatest_velocity" validate:"omitempty,min=1"`
	LeastShear               []string `json:"least_shear" validate:"omitempty,min=1"`
	GreatestShear            []string `json:"greatest_shear" validate:"omitempty,min=1"`
	CriticalBand             []string `json:"critical_band" validate:"omitempty,min=1"`
	GreatestVedernikovNumber []string `json:"greatest_vedernikov_number" validate:"omitempty,min=1"`
	LeastLiningSafety        []string `json:"least_lining_safety" validate:"omitempty,min=1"`

	Given bool `json:"-"`
}

// Bend is a bend in plan.
type Bend struct {
	// Radius of the centreline in m.
	Radius Number `json:"radius" quantity:"length" validate:"required,gte=1e-9,lte=1e9"`
	Given  bool   `json:"-"`
}
