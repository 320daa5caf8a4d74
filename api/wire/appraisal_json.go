package wire

import "strconv"

// The members of an answer to appraisal that are not members of depths.
var (
	appraisalDischarge         = answerMember("discharge", QuantityDischarge)
	appraisalBendRise          = answerMember("bend_rise", QuantityLength)
	appraisalGoverningValue    = answerMember("governing_value", QuantityTold)
	appraisalGoverningLimit    = answerMember("governing_limit", QuantityTold)
	findingValue               = answerMember("value", QuantityTold)
	findingLimit               = answerMember("limit", QuantityTold)
	liningManning              = answerMember("manning", QuantityManning)
	liningBedShear             = answerMember("bed_shear", QuantityStress)
	liningSideShear            = answerMember("side_shear", QuantityStress)
	liningPermissibleShear     = answerMember("permissible_shear", QuantityStress)
	liningPermissibleSideShear = answerMember("permissible_side_shear", QuantityStress)
	liningPermissibleVelocity  = answerMember("permissible_velocity", QuantityVelocity)
	liningBendFactor           = answerMember("bend_factor", Dimensionless)
	liningSafety               = answerMember("safety", Dimensionless)
	liningRecommendedSafety    = answerMember("recommended_safety", Dimensionless)
)

// appendAs appends the member with a value in SI that measures what its criterion does.
func (m *member) appendAs(dst []byte, system System, q Quantity, value float64) []byte {
	return appendNumber(append(dst, m.key...), system.FromSI(q, value))
}

// AppendJSON appends the answer in a system of units; id stands in front where it is not nil.
func (a *AppraisalAnswer) AppendJSON(dst []byte, system System, id ID) []byte {
	dst = appendHead(dst, system, id, a.Fingerprint)
	dst = appendName(dst, `,"verdict":`, a.Verdict)
	dst = a.Governing.appendMembers(dst, system)
	dst = append(dst, `,"flows":{`...)
	for i := range a.Flows {
		if i > 0 {
			dst = append(dst, ',')
		}
		dst = a.Flows[i].appendMember(dst, system)
	}
	dst = appendText(append(dst, `},"notice":`...), a.Notice)
	dst = appendWarnings(dst, a.Warnings)
	return append(dst, '}')
}

// appendMembers appends the members, each with its comma before it.
func (g *Governing) appendMembers(dst []byte, system System) []byte {
	if !g.Known {
		return append(dst, `,"governing_flow":null,"governing_criterion":null,"governing_value":null,"governing_limit":null,"governing_unit":null`...)
	}
	q := g.Criterion.Quantity()
	dst = appendText(append(dst, `,"governing_flow":`...), g.Flow)
	dst = appendName(dst, `,"governing_criterion":`, string(g.Criterion))
	dst = appraisalGoverningValue.appendAs(dst, system, q, g.Value)
	dst = appraisalGoverningLimit.appendAs(dst, system, q, g.Limit)
	return appendText(append(dst, `,"governing_unit":`...), system.Unit(q))
}

// appendMember appends the flow as a member under its name.
func (f *AppraisedFlow) appendMember(dst []byte, system System) []byte {
	dst = append(appendText(dst, f.Name), ':')
	start := len(dst)
	dst = appraisalDischarge.append(dst, system, f.Discharge)
	dst[start] = '{' // in place of the first comma
	dst = f.Depths.appendMembers(dst, system)
	if f.Bent {
		dst = appraisalBendRise.append(dst, system, f.BendRise)
	}
	if f.Lined {
		dst = f.Lining.appendMember(dst, system)
	}
	dst = append(dst, `,"findings":[`...)
	for i := range f.Findings {
		if i > 0 {
			dst = append(dst, ',')
		}
		dst = f.Findings[i].AppendJSON(dst, system)
	}
	return append(dst, `]}`...)
}

// appendMember appends the state as the member lining, with its comma before it.
func (l *LiningState) appendMember(dst []byte, system System) []byte {
	dst = append(dst, `,"lining":`...)
	if !l.Known {
		return append(dst, "null"...)
	}
	start := len(dst)
	dst = liningManning.append(dst, system, l.Manning)
	dst[start] = '{' // in place of the first comma
	dst = liningBedShear.append(dst, system, l.BedShear)
	dst = liningSideShear.append(dst, system, l.SideShear)
	dst = liningPermissibleShear.append(dst, system, l.PermissibleShear)
	dst = liningPermissibleSideShear.append(dst, system, l.PermissibleSideShear)
	dst = liningPermissibleVelocity.append(dst, system, l.PermissibleVelocity)
	dst = liningBendFactor.append(dst, system, l.BendFactor)
	dst = liningSafety.append(dst, system, l.Safety)
	dst = liningRecommendedSafety.append(dst, system, l.RecommendedSafety)
	dst = appendName(dst, `,"governing_place":`, l.GoverningPlace)
	return append(dst, '}')
}

// AppendJSON appends the finding as an object.
func (f *Finding) AppendJSON(dst []byte, system System) []byte {
	q := f.Criterion.Quantity()
	dst = appendName(dst, `{"criterion":`, string(f.Criterion))
	dst = findingValue.appendAs(dst, system, q, f.Value)
	dst = findingLimit.appendAs(dst, system, q, f.Limit)
	dst = appendText(append(dst, `,"unit":`...), system.Unit(q))
	dst = append(dst, `,"met":`...)
	if f.Judged {
		dst = strconv.AppendBool(dst, f.Met)
	} else {
		dst = append(dst, "null"...)
	}
	dst = appendName(dst, `,"reason":`, f.Reason)
	if f.Detail != "" {
		dst = appendText(append(dst, `,"detail":`...), f.Detail)
	}
	return append(dst, '}')
}
