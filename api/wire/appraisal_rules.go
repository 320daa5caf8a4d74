package wire

import "strings"

// rules judges how the members of an appraisal go together.
func (r *AppraisalRequest) rules(w *walk) {
	r.roughnessRules(w)
	r.flowRules(w)
}

// roughnessRules judges that there is one source of roughness: the request's, or the lining's own.
func (r *AppraisalRequest) roughnessRules(w *walk) {
	own := r.Lining.HasRoughness()
	switch {
	case own && r.Roughness.Given:
		w.faultAt("roughness", codeConflictingMember, func() string {
			return "A lining of kind " + string(r.Lining.Kind) + " has a roughness of its own, which follows from it and from the flow; leave roughness out."
		})
	case !own && !r.Roughness.Given && !w.faulted("lining"):
		w.faultAt("roughness", codeMissingMember, func() string {
			return "roughness is missing: give an object such as " + objectExamples["roughness"] + "; only linings of kind vegetation, riprap and gravel have a roughness of their own."
		})
	default:
		r.Roughness.fits(w, &r.Section)
	}
}

// flowRules judges that the flows of each criterion are flows of the request, and the criterion one that is judged.
func (r *AppraisalRequest) flowRules(w *walk) {
	if !r.CriterionFlows.Given || w.faulted("flows") {
		return
	}
	at := w.enter("criterion_flows")
	for i := range criteria {
		c := &criteria[i]
		names := c.flows(&r.CriterionFlows)
		if names == nil || w.stop() {
			continue
		}
		if r.Criteria.Given && !c.given(&r.Criteria) {
			w.faultAt(string(c.name), codeCriterionNotGiven, func() string {
				return "criteria gives no " + string(c.name) + ", so that there is nothing to judge these flows by; give it there, or leave it out here."
			})
			continue
		}
		list := w.enter(string(c.name))
		for j, name := range names {
			if w.stop() {
				break
			}
			if !r.hasFlow(name) {
				item := w.enterItem(j)
				w.fault(codeUnknownFlow, func() string { return r.unknownFlowText(name) })
				w.leave(item)
			}
		}
		w.leave(list)
	}
	w.leave(at)
}

func (r *AppraisalRequest) hasFlow(name string) bool {
	for i := range r.Flows {
		if r.Flows[i].Name == name {
			return true
		}
	}
	return false
}

// mostFlowsNamed is the number of flows that a sentence names.
const mostFlowsNamed = 10

func (r *AppraisalRequest) unknownFlowText(name string) string {
	known := make([]string, 0, len(r.Flows))
	for i := range r.Flows {
		known = append(known, clip(r.Flows[i].Name))
	}
	text := "There is no flow " + clip(name) + " in flows."
	if near, ok := nearest(name, known); ok {
		return text + " Did you mean " + near + "?"
	}
	if len(known) > mostFlowsNamed {
		return text + " Give the names of some that are there."
	}
	return text + " There are " + list(known, "and") + "."
}

// rules judges that there is something to judge by, and that limits from both sides leave room between them.
func (c *Criteria) rules(w *walk) {
	some := false
	for i := range criteria {
		some = some || criteria[i].given(c)
	}
	if !some && !w.faultedBelow() {
		w.fault(codeTooFewItems, func() string {
			names := make([]string, len(criteria))
			for i := range criteria {
				names[i] = string(criteria[i].name)
			}
			return "There is nothing to judge by: give at least one of " + list(names, "and") + "."
		})
	}
	if band := c.CriticalBand; band.Given && !w.faulted("critical_band") {
		switch low, high := band.Values[0], band.Values[1]; {
		case !(high > low):
			w.faultAt("critical_band", codeNotRising, func() string {
				return "The second Froude number must be greater than the first, such as in [0.86, 1.13]."
			})
		case !(low <= 1 && high >= 1):
			w.faultAt("critical_band", codeOutOfRange, func() string {
				return "The band must enclose 1, the Froude number of critical flow, such as [0.86, 1.13] does."
			})
		}
	}
	between := func(least, greatest Number, name string) {
		if least.Given && greatest.Given && greatest.Value > 0 && !(greatest.Value > least.Value) {
			w.faultAt(name, codeNotRising, func() string {
				return name + " must be greater than " + strings.Replace(name, "greatest", "least", 1) + ", or no flow can meet both."
			})
		}
	}
	between(c.LeastVelocity, c.GreatestVelocity, "greatest_velocity")
	between(c.LeastShear, c.GreatestShear, "greatest_shear")
}
