package wire

// BoundaryControl names a depth that a boundary is at by itself.
type BoundaryControl string

// The depths that a boundary may be at by itself.
const (
	ControlNormal       BoundaryControl = "normal"
	ControlCritical     BoundaryControl = "critical"
	ControlFreeOverfall BoundaryControl = "free_overfall"
)

// Boundary is what is known at an end of a profile: the union of all forms. After Decode exactly one member is given, which Form names.
type Boundary struct {
	// Depth is in m.
	Depth Number `json:"depth" quantity:"length" in:"depth" validate:"omitempty,gte=1e-18,lte=1e9"`
	// Level is a water level in m.
	Level   Number          `json:"level" quantity:"length" in:"level" validate:"omitempty,gte=-1e9,lte=1e9"`
	Control BoundaryControl `json:"control" in:"control" validate:"omitempty,oneof=normal critical free_overfall"`
	Gate    Gate            `json:"gate" in:"gate" validate:"omitempty"`
	Weir    Weir            `json:"weir" in:"weir" validate:"omitempty"`
	// Rating are pairs of depth in m and total discharge in m3/s, both rising.
	Rating [][2]float64 `json:"rating" quantity:"length discharge" in:"rating" validate:"omitempty,min=2,dive,columns=0:1e9 0:1e12"`

	// Form is the name of the member given; empty where the request has no such boundary.
	Form  string `json:"-"`
	Given bool   `json:"-"`
}

// Gate is a sluice gate.
type Gate struct {
	// Opening is the height of the gate's lip above the bed in m.
	Opening Number `json:"opening" quantity:"length" validate:"required,gte=1e-9,lte=1e9"`
	// ContractionCoefficient is the depth of the jet over the opening.
	ContractionCoefficient Number `json:"contraction_coefficient" validate:"omitempty,gte=0.1,lte=1"`
	Given                  bool   `json:"-"`
}

// WeirKind names a kind of weir.
type WeirKind string

// The kinds of weir.
const (
	SharpCrested WeirKind = "sharp_crested"
	BroadCrested WeirKind = "broad_crested"
)

// Weir is a weir across the downstream end.
type Weir struct {
	Kind WeirKind `json:"kind" validate:"required,oneof=sharp_crested broad_crested"`
	// CrestHeight is above the bed, in m.
	CrestHeight Number `json:"crest_height" quantity:"length" validate:"required,gte=0,floor=1e-9,lte=1e9"`
	// CrestWidth is across the flow, in m.
	CrestWidth           Number `json:"crest_width" quantity:"length" validate:"required,gte=1e-9,lte=1e9"`
	DischargeCoefficient Number `json:"discharge_coefficient" validate:"omitempty,gte=0.01,lte=10"`
	Given                bool   `json:"-"`
}

func (b *Boundary) variant() string {
	switch {
	case b.Depth.Given:
		b.Form = "depth"
	case b.Level.Given:
		b.Form = "level"
	case b.Control != "":
		b.Form = "control"
	case b.Gate.Given:
		b.Form = "gate"
	case b.Weir.Given:
		b.Form = "weir"
	case b.Rating != nil:
		b.Form = "rating"
	}
	return b.Form
}

func (r *Report) variant() string {
	switch {
	case r.Spacing.Given:
		return "spacing"
	case r.At != nil:
		return "at"
	}
	return ""
}

// rules judges that something is known there, and the order of a rating.
func (b *Boundary) rules(w *walk) {
	if b.Form == "" && !w.faulted("control") {
		w.fault(codeMissingMember, func() string {
			return "What is known there is missing: give one of depth, level, control, gate, weir and rating."
		})
	}
	at := w.enter("rating")
	for i := 1; i < len(b.Rating) && !w.stop(); i++ {
		row := w.enterItem(i)
		for column, name := range [...]string{"depth", "discharge"} {
			if !(b.Rating[i][column] > b.Rating[i-1][column]) {
				cell := w.enterItem(column)
				w.fault(codeNotRising, func() string { return "The " + name + " must be greater than that of the pair before." })
				w.leave(cell)
			}
		}
		w.leave(row)
	}
	w.leave(at)
}

func (r *Report) rules(w *walk) {
	if !r.Spacing.Given && r.At == nil {
		w.fault(codeMissingMember, func() string {
			return "Where to report is missing: give spacing, a number, or at, a list of chainages; or leave report out."
		})
	}
}

func (v *Weir) rules(w *walk) {
	if v.Kind == SharpCrested && v.CrestHeight.Given && v.CrestHeight.Value == 0 && !v.DischargeCoefficient.Given {
		w.faultAt("crest_height", codeNotPositive, func() string {
			return "crest_height must be greater than 0 for a sharp-crested weir without a discharge_coefficient: its own depends on the head over the height."
		})
	}
}

// upstream judges a boundary as that of the upstream end. w reads the request.
func (b *Boundary) upstream(w *walk) {
	at := w.enter("upstream")
	switch {
	case b.Form == "weir", b.Form == "rating":
		w.faultAt(b.Form, codeForeignMember, func() string {
			return b.Form + " stands at the downstream end only; upstream accepts depth, level, control and gate."
		})
	case b.Control == ControlFreeOverfall:
		w.faultAt("control", codeUnknownValue, func() string {
			return `control must be "normal" or "critical" upstream; a free overfall stands at the downstream end only.`
		})
	}
	w.leave(at)
}
