package operation

import (
	"cmp"
	"errors"
	"math"
	"slices"
	"strings"

	"leat/api/wire"
	"leat/compute/appraise"
	"leat/compute/flow"
)

// Appraisal is the operation appraisal: whether one section is good enough for its flows.
var Appraisal = Operation{Name: "appraisal", Form: (*wire.AppraisalAnswer)(nil), Request: (*wire.AppraisalRequest)(nil), Solve: func(body []byte, options Options) (Solved, *wire.Problem) {
	request := appraisalRequests.take()
	solved, problem := Run("appraisal", body, options, request, &request.Common, func() (wire.Answer, *wire.Problem) {
		return solveAppraisal(request, &options)
	})
	appraisalRequests.leave(request) // not after a panic
	return solved, problem
}}

var appraisalRequests requests[wire.AppraisalRequest]

// notice stands in every appraisal.
const notice = "An aid to judgement: local codes and standards come first, and a licensed engineer decides. A culvert is its barrel here; inlet control is not computed."

func solveAppraisal(r *wire.AppraisalRequest, options *Options) (wire.Answer, *wire.Problem) {
	var w warnings
	asset, limits, problem := newAsset(r, &w)
	if problem != nil {
		return nil, problem
	}
	if r.Depth.Given {
		if fault, above := aboveSection(&asset.Channel, r.Depth.Value, "/depth"); above {
			return nil, wire.InvalidRequest(fault)
		}
	}
	checkpoint := options.begin()
	// In an order that does not depend on that of the members, which means nothing in JSON.
	flows := slices.Clone(r.Flows)
	slices.SortFunc(flows, func(a, b wire.NamedNumber) int {
		return cmp.Or(cmp.Compare(a.Value, b.Value), strings.Compare(a.Name, b.Name))
	})
	a := &wire.AppraisalAnswer{Notice: notice, Flows: make([]wire.AppraisedFlow, len(flows))}
	var overall appraise.Overall
	var room flow.Room
	findings := make([]appraise.Finding, 0, limits.Given.Len())
	var unjudged openFindings
	for i := range flows {
		if err := checkpoint(); err != nil {
			return nil, stopped(err)
		}
		f := &a.Flows[i]
		f.Name, f.Discharge = flows[i].Name, flows[i].Value
		at := wire.MemberPointer("/flows", f.Name)
		d, problem := describeDepths(&f.Depths, &asset.Channel, f.Discharge, r.Depth, depthsPlaces{at, at}, options.Brief, &room, &w)
		if problem != nil {
			return nil, problem
		}
		j := asset.Judge(f.Discharge, &d, &limits, judged(r, f.Name), findings[:0])
		overall.Add(i, j.Findings)
		describeJudgement(f, r, &j)
		unjudged.gather(at, j.Findings)
		if r.Bend.Given {
			w.bend(&asset.Channel, &d, &j)
		}
	}
	verdict := overall.Verdict()
	a.Verdict = verdict.String()
	if verdict == appraise.Undetermined {
		w.undetermined(unjudged)
	}
	a.Governing = wire.Governing{Value: math.NaN(), Limit: math.NaN()}
	if i, f, known := overall.Governing(); known {
		a.Governing = wire.Governing{Known: true, Flow: flows[i].Name, Criterion: wire.Criterion(f.Criterion.String()), Value: f.Value, Limit: f.Limit}
	}
	a.Warnings = w.done()
	return a, nil
}

// openFindings are the findings that could not be judged, each with the pointer of its flow: what an answer without findings, one row of a table, says of its verdict.
type openFindings []openFinding

type openFinding struct {
	flow    string
	finding appraise.Finding
}

func (o *openFindings) gather(flow string, findings []appraise.Finding) {
	for _, f := range findings {
		if f.Met == appraise.Unknown && f.Applies() {
			*o = append(*o, openFinding{flow, f})
		}
	}
}

// undetermined says why a verdict is open: each reason once, with the criteria that it keeps from being judged, at the first flow for which it does.
func (w *warnings) undetermined(open openFindings) {
	for i, o := range open {
		same := func(f openFinding) bool { return f.finding.Reason == o.finding.Reason }
		if slices.ContainsFunc(open[:i], same) {
			continue
		}
		var criteria []string
		for _, f := range open[i:] {
			if name := f.finding.Criterion.String(); same(f) && !slices.Contains(criteria, name) {
				criteria = append(criteria, name)
			}
		}
		detail := strings.Join(criteria, ", ") + " could not be judged."
		if o.finding.Reason.Detail != "" {
			detail = strings.Join(criteria, ", ") + " could not be judged: " + o.finding.Reason.Detail
		}
		w.add("undetermined", o.flow, detail)
	}
	if len(open) == 0 {
		w.add("undetermined", "/criteria", "No criterion applies to this section and its flows, so that there is nothing to judge.")
	}
}

// stopped returns the problem of a solve that its checkpoint ended.
func stopped(err error) *wire.Problem {
	var problem *wire.Problem
	if errors.As(err, &problem) {
		return problem
	}
	return wire.Internal("The solve was stopped before its end.")
}

// newAsset builds what is to be judged and by which limits, or tells every fault of section, roughness, lining and criteria.
func newAsset(r *wire.AppraisalRequest, w *warnings) (appraise.Asset, appraise.Limits, *wire.Problem) {
	in := inputs{&r.Common, r.Barrels, &r.Section, &r.Roughness, r.BedSlope}
	c, faults := in.build("", nil)
	lining, err := newLining(&r.Lining)
	faults = gather(faults, "", "/lining", err)
	if err == nil && lining != nil && c.Section != nil {
		law, err := lining.Roughness(c.Section, c.Gravity)
		faults = gather(faults, "", "/lining", err)
		if law != nil {
			c.Law = law
		}
	}
	limits := newLimits(&r.Criteria)
	faults = gather(faults, "", "/criteria", limits.Check())
	if len(faults) > 0 {
		return appraise.Asset{}, limits, wire.InvalidRequest(faults...)
	}
	w.doubt("", &in)
	w.doubtAppraisal(r)
	return appraise.Asset{Channel: c, Lining: lining, BendRadius: r.Bend.Radius.Or(0)}, limits, nil
}

// newLimits returns the criteria that a request gives.
func newLimits(c *wire.Criteria) appraise.Limits {
	l := appraise.Limits{
		LeastFreeboard: c.LeastFreeboard.Value, FreeboardRule: freeboardRules[c.FreeboardRule], GreatestFill: c.GreatestFill.Value,
		LeastVelocity: c.LeastVelocity.Value, GreatestVelocity: c.GreatestVelocity.Value, LeastShear: c.LeastShear.Value, GreatestShear: c.GreatestShear.Value,
		CriticalBand: c.CriticalBand.Values, GreatestVedernikovNumber: c.GreatestVedernikovNumber.Value, LeastLiningSafety: c.LeastLiningSafety.Value,
	}
	for _, criterion := range appraise.Criteria() {
		if c.Has(wire.Criterion(criterion.String())) {
			l.Given = l.Given.With(criterion)
		}
	}
	return l
}

var freeboardRules = map[wire.FreeboardRule]appraise.Rule{wire.CanalFreeboard: appraise.Canal, wire.ChuteFreeboard: appraise.Chute}

// judged returns the criteria that are about a flow.
func judged(r *wire.AppraisalRequest, name string) appraise.Set {
	set := appraise.All
	if !r.CriterionFlows.Given {
		return set
	}
	for _, criterion := range appraise.Criteria() {
		if names := r.CriterionFlows.Of(wire.Criterion(criterion.String())); names != nil && !slices.Contains(names, name) {
			set &^= appraise.Of(criterion)
		}
	}
	return set
}

// bend says why the effect of a bend is not known.
func (w *warnings) bend(c *flow.Channel, d *flow.Depths, j *appraise.Judgement) {
	switch {
	case !math.IsNaN(j.BendRise) || len(d.Normal) == 0 && !c.Section.Closed():
	case c.Section.Closed():
		w.add(appraise.BendInClosed.Code, "/bend", appraise.BendInClosed.Detail)
	default:
		w.add(appraise.TightBend.Code, "/bend/radius", appraise.TightBend.Detail)
	}
}

// describeJudgement tells a judgement in the contract's terms.
func describeJudgement(f *wire.AppraisedFlow, r *wire.AppraisalRequest, j *appraise.Judgement) {
	f.Bent, f.BendRise = r.Bend.Given, j.BendRise
	f.Lined = r.Lining.Given
	f.Lining.Known = j.HasLining
	if j.HasLining {
		l := &j.Lining
		f.Lining = wire.LiningState{
			Known: true, Manning: l.Roughness, BedShear: l.BedShear, SideShear: l.SideShear, PermissibleShear: l.PermissibleShear,
			PermissibleSideShear: l.PermissibleSideShear, PermissibleVelocity: l.PermissibleVelocity, BendFactor: l.BendFactor, Safety: l.Safety,
			RecommendedSafety: l.RecommendedSafety, GoverningPlace: governingPlace(l),
		}
	}
	f.Findings = make([]wire.Finding, len(j.Findings))
	for i := range j.Findings {
		finding := &j.Findings[i]
		f.Findings[i] = wire.Finding{
			Criterion: wire.Criterion(finding.Criterion.String()), Value: finding.Value, Limit: finding.Limit,
			Judged: finding.Met != appraise.Unknown, Met: finding.Met == appraise.Yes, Reason: finding.Reason.Code, Detail: finding.Reason.Detail,
		}
	}
}

// governingPlace names where a lining is weakest; nothing where that is not known.
func governingPlace(l *appraise.LiningState) string {
	switch {
	case math.IsNaN(l.Safety):
		return ""
	case l.OnSides:
		return "sides"
	}
	return "bed"
}
