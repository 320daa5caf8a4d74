package appraise

import (
	"math"

	"leat/compute/flow"
)

// Asset is a channel with what covers it and how it bends.
type Asset struct {
	Channel    flow.Channel // its law is the lining's where that sets one (Lining.Roughness)
	Lining     Lining       // nil where it is not known
	BendRadius float64      // of the centreline, m; 0 for a straight channel
}

// Judgement is what one flow does in a channel. A number that is not known is NaN.
type Judgement struct {
	Findings  []Finding   // in the order of the criteria
	BendRise  float64     // of the outer water surface, m; 0 in a straight channel
	HasLining bool        // an open channel with a known lining and a normal depth
	Lining    LiningState // at the lowest normal depth
}

// Judge holds the uniform flow of a discharge (total, m3/s) against those criteria of the limits that are in only. Its characteristic depths
// must be those that Channel.Depths gives. Findings are appended to dst; it allocates only where dst's capacity does not suffice, or to name missing members.
//
// The lowest normal depth is judged. A closed section that is surcharged is judged running full; it fails freeboard and fill, as does a channel that overtops.
// Where a lining's own roughness lets a discharge flow at several depths, a criterion is judged only if all of them agree on it.
func (a *Asset) Judge(discharge float64, depths *flow.Depths, limits *Limits, only Set, dst []Finding) Judgement {
	j := Judgement{Findings: dst, BendRise: math.NaN()}
	v := a.view(discharge, depths, 0)
	if v.flows && !v.full {
		j.BendRise = v.rise
	}
	if a.Lining != nil && v.flows && !a.Channel.Section.Closed() {
		j.HasLining = true
		j.Lining = v.lining
	}
	first := len(dst)
	for c := Criterion(0); c < criteria; c++ {
		if limits.Given.Has(c) && only.Has(c) {
			j.Findings = append(j.Findings, a.judge(&v, c, limits))
		}
	}
	if len(depths.Normal) > 1 && a.ownLaw() {
		for i := 1; i < len(depths.Normal); i++ {
			other := a.view(discharge, depths, i)
			for k := first; k < len(j.Findings); k++ {
				a.compare(&j.Findings[k], &other, limits)
			}
		}
	}
	return j
}

// ownLaw reports whether the channel's law is its lining's.
func (a *Asset) ownLaw() bool {
	switch a.Lining.(type) {
	case Vegetation, Riprap:
		return !a.Channel.Section.Closed()
	}
	return false
}

// compare marks a finding for which there is another normal depth.
func (a *Asset) compare(f *Finding, other *view, limits *Limits) {
	switch there := a.judge(other, f.Criterion, limits); {
	case !f.Applies() || f.Met == Unknown:
	case there.Met != f.Met:
		f.Met, f.Reason = Unknown, DepthsDisagree
	case f.Reason.Code == "":
		f.Reason = SeveralDepths
	}
}

// view is the flow at one depth, as the criteria see it.
type view struct {
	depths       *flow.Depths
	flows        bool   // there is a state to judge
	why          Reason // why not
	full         bool   // surcharged
	overtops     bool
	state        flow.State
	shear        float64 // mean boundary shear stress, N/m2
	freeboard    float64 // NaN where no bank is known
	fill         float64
	rise         float64
	bendReason   Reason // why the rise is not known
	lining       LiningState
	liningReason Reason
}

// view resolves the flow at the i-th normal depth.
func (a *Asset) view(discharge float64, d *flow.Depths, i int) view {
	c := &a.Channel
	v := view{depths: d, shear: math.NaN(), freeboard: math.NaN(), fill: math.NaN()}
	switch {
	case c.Law == nil:
		v.why = MissingLaw
		return v
	case d.Surcharged:
		v.full, v.flows, v.overtops, v.freeboard, v.fill = true, true, true, 0, 1
		v.state = c.State(c.Section.Height(), discharge)
	case len(d.Normal) == 0:
		v.why = absent(d.NormalAbsent)
		v.overtops = d.NormalAbsent == flow.BeyondTable && !math.IsNaN(d.Bank)
		return v
	default:
		v.flows = true
		v.state = c.State(d.Normal[i], discharge)
		v.freeboard, v.fill = d.Bank-d.Normal[i], d.Normal[i]/d.Bank
		v.overtops = d.Normal[i] > d.Bank
	}
	v.shear = v.state.BedShearStress
	if a.BendRadius > 0 {
		switch {
		case c.Section.Closed():
			v.rise, v.bendReason = math.NaN(), BendInClosed
		case a.BendRadius < v.state.Geometry.TopWidth/2:
			v.rise, v.bendReason = math.NaN(), TightBend
		default:
			v.rise = BendRise(c, &v.state, a.BendRadius)
		}
	}
	if a.Lining != nil && !c.Section.Closed() {
		v.lining, v.liningReason = a.judgeLining(&v.state)
	}
	return v
}

// judge judges one criterion.
func (a *Asset) judge(v *view, c Criterion, l *Limits) Finding {
	f := Finding{Criterion: c, Value: math.NaN(), Limit: math.NaN()}
	switch c {
	case LeastFreeboard:
		f.Limit = l.LeastFreeboard
		a.freeboard(v, &f)
	case FreeboardRule:
		if a.Channel.Section.Closed() {
			f.Reason = NotApplicable
			return f
		}
		f.Limit = a.ruled(v, l.FreeboardRule)
		a.freeboard(v, &f)
	case GreatestFill:
		f.Limit = l.GreatestFill
		a.fill(v, &f)
	case LeastVelocity:
		f.Limit = l.LeastVelocity
		f.atLeast(v, v.state.Velocity)
	case GreatestVelocity:
		f.Limit = l.GreatestVelocity
		f.atMost(v, v.state.Velocity)
	case LeastShear:
		f.Limit = l.LeastShear
		f.atLeast(v, v.shear)
	case GreatestShear:
		f.Limit = l.GreatestShear
		f.atMost(v, v.shear)
	case CriticalBand:
		f.Band = l.CriticalBand
		f.outside(v)
	case GreatestVedernikovNumber:
		f.Limit = l.GreatestVedernikovNumber
		switch {
		case !v.flows:
			f.Reason = v.why
		case v.state.Regime == flow.FullFlow:
			f.Reason = FlowsFull
		default:
			f.atMost(v, VedernikovNumber(&a.Channel, &v.state))
		}
	case LeastLiningSafety:
		f.Limit = l.LeastLiningSafety
		a.linings(v, &f)
	}
	return f
}

// atLeast and atMost hold a value against the limit. A value that equals it meets it.
func (f *Finding) atLeast(v *view, value float64) { f.hold(v, value, value >= f.Limit) }

func (f *Finding) atMost(v *view, value float64) { f.hold(v, value, value <= f.Limit) }

func (f *Finding) hold(v *view, value float64, met bool) {
	switch {
	case !v.flows:
		f.Reason = v.why
		return
	case math.IsNaN(value) && v.full && math.IsNaN(v.state.Conveyance):
		f.Reason = absent(flow.NoConveyance)
		return
	case math.IsNaN(value) || math.IsInf(value, 0) || math.IsNaN(f.Limit):
		f.Reason = OutOfRange
		return
	}
	f.Value, f.Met = value, No
	if met {
		f.Met = Yes
	}
	if v.full {
		f.Reason = Surcharged
	}
}

// ruled returns the freeboard that a rule asks.
func (a *Asset) ruled(v *view, rule Rule) float64 {
	if !v.flows {
		return math.NaN()
	}
	s := &v.state
	if rule == Chute {
		return ChuteFreeboard(s.Velocity, s.Geometry.Depth)
	}
	return CanalFreeboard(s.Velocity*s.Geometry.Area, s.Geometry.Depth)
}

// freeboard judges the freeboard, less the rise in a bend.
func (a *Asset) freeboard(v *view, f *Finding) {
	switch {
	case v.full:
		f.Value, f.Met, f.Reason = v.freeboard, No, Surcharged
	case math.IsNaN(v.depths.Bank):
		f.Reason = MissingBank
		if !v.flows {
			f.Reason = v.why
		}
	case v.overtops && !v.flows:
		f.Met, f.Reason = No, Overtopped // deeper than the section is known, how deep is not
	case v.overtops:
		f.Value, f.Met, f.Reason = v.freeboard, No, Overtopped
		if v.rise > 0 {
			f.Value -= v.rise
		}
	case v.flows && v.bendReason.Code != "":
		f.Reason = v.bendReason
	default:
		f.atLeast(v, v.freeboard-v.rise)
	}
}

// fill judges the fill.
func (a *Asset) fill(v *view, f *Finding) {
	switch {
	case v.full:
		f.Value, f.Met, f.Reason = v.fill, No, Surcharged
	case math.IsNaN(v.depths.Bank):
		f.Reason = MissingBank
		if !v.flows {
			f.Reason = v.why
		}
	case v.overtops && !v.flows:
		f.Met, f.Reason = No, Overtopped
	case v.overtops:
		f.Value, f.Met, f.Reason = v.fill, No, Overtopped
	default:
		f.atMost(v, v.fill)
	}
}

// outside judges the Froude number against a band, whose edges are outside.
func (f *Finding) outside(v *view) {
	low, high := f.Band[0], f.Band[1]
	froude := v.state.FroudeNumber
	switch {
	case !v.flows:
		f.Reason = v.why
		return
	case v.state.Regime == flow.FullFlow:
		f.Reason = FlowsFull
		return
	case math.IsNaN(froude):
		f.Reason = NoFroudeNumber
		return
	}
	f.Value, f.Met = froude, Yes
	if froude > low && froude < high {
		f.Met = No
	}
	// The nearer edge as a share of itself, so that it is the one that the distance speaks of.
	f.Limit = low
	if math.Abs(froude-high)/high < math.Abs(froude-low)/low {
		f.Limit = high
	}
}

// linings judges the lining.
func (a *Asset) linings(v *view, f *Finding) {
	switch {
	case a.Channel.Section.Closed():
		f.Reason = NotApplicable
	case a.Lining == nil:
		f.Reason = MissingLining
	case !v.flows:
		f.Reason = v.why
	case math.IsNaN(v.lining.Safety):
		f.Reason = v.liningReason
		if f.Reason.Code == "" {
			f.Reason = OutOfRange
		}
	default:
		f.atLeast(v, v.lining.Safety)
		switch {
		case f.Reason.Code != "":
		case v.liningReason.Code != "":
			f.Reason = v.liningReason
		case f.Met == Yes && v.lining.Safety < v.lining.RecommendedSafety:
			f.Reason = BelowRecommended
		}
	}
}
