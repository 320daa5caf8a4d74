package appraise

// Verdict is the judgement over all flows.
type Verdict uint8

const (
	Undetermined Verdict = iota // nothing is unmet, but something could not be judged, or nothing applies
	FallsShort                  // some criterion is not met
	Meets                       // every criterion that applies is met
)

// String returns the verdict's name in snake_case.
func (v Verdict) String() string { return [...]string{"undetermined", "falls_short", "meets"}[v] }

// Overall gathers findings over flows. The zero value has none.
type Overall struct {
	met, unmet, unknown int
	governing           Finding
	flow                int
	distance            float64
}

// Add adds the findings of a flow, which is known by a number.
func (o *Overall) Add(flow int, findings []Finding) {
	for i := range findings {
		f := &findings[i]
		switch {
		case !f.Applies():
		case f.Met == Unknown:
			o.unknown++
		case f.Met == No:
			// The unmet one furthest beyond its limit; it displaces any that is met. Of equals the first.
			if d := f.Distance(); o.unmet == 0 || d > o.distance {
				o.governing, o.flow, o.distance = *f, flow, d
			}
			o.unmet++
		default:
			// While all are met the one nearest to its limit.
			if d := f.Distance(); o.unmet == 0 && (o.met == 0 || d < o.distance) {
				o.governing, o.flow, o.distance = *f, flow, d
			}
			o.met++
		}
	}
}

// Verdict returns the judgement: FallsShort if any criterion is not met, else Undetermined if any could not be judged or none applies,
// else Meets.
func (o *Overall) Verdict() Verdict {
	switch {
	case o.unmet > 0:
		return FallsShort
	case o.unknown > 0 || o.met == 0:
		return Undetermined
	}
	return Meets
}

// Governing returns the finding that governs and its flow: the unmet one furthest beyond its limit (see Finding.Distance), else the met one nearest to
// it; of equals the first added. exists is false where no criterion was judged.
func (o *Overall) Governing() (flow int, finding Finding, exists bool) {
	return o.flow, o.governing, o.met+o.unmet > 0
}
