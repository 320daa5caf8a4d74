package wire

import "strconv"

// The members of an answer to depths that are not members of states.
var (
	depthsNormalDepth           = answerMember("normal_depth", QuantityLength)
	depthsCriticalDepth         = answerMember("critical_depth", QuantityLength)
	depthsNormalVelocity        = answerMember("normal_velocity", QuantityVelocity)
	depthsNormalFroudeNumber    = answerMember("normal_froude_number", Dimensionless)
	depthsNormalBedShearStress  = answerMember("normal_bed_shear_stress", QuantityStress)
	depthsFill                  = answerMember("fill", Dimensionless)
	depthsCriticalSlope         = answerMember("critical_slope", Dimensionless)
	depthsCapacityDischarge     = answerMember("discharge", QuantityDischarge)
	depthsCapacityDepth         = answerMember("depth", QuantityLength)
	depthsCapacityFullDischarge = answerMember("full_discharge", QuantityDischarge)
	depthsCapacityRatio         = answerMember("ratio", Dimensionless)
	depthsFreeboard             = answerMember("freeboard", QuantityLength)
	depthsFullFrictionSlope     = answerMember("full_friction_slope", Dimensionless)
	depthsAlternateDepth        = answerMember("alternate_depth", QuantityLength)
	depthsSequentDepth          = answerMember("sequent_depth", QuantityLength)
)

// AppendJSON appends the answer in a system of units; id stands in front where it is not nil.
func (a *DepthsAnswer) AppendJSON(dst []byte, system System, id ID) []byte {
	dst = appendHead(dst, system, id, a.Fingerprint)
	dst = a.appendMembers(dst, system)
	dst = appendWarnings(dst, a.Warnings)
	return append(dst, '}')
}

// appendMembers appends what an answer says of one discharge, each member with its comma before it.
func (a *DepthsAnswer) appendMembers(dst []byte, system System) []byte {
	dst = depthsNormalDepth.append(dst, system, a.NormalDepth)
	dst = depthsCriticalDepth.append(dst, system, a.CriticalDepth)
	if a.NormalAbsent != "" {
		dst = appendText(append(dst, `,"normal_absent":`...), a.NormalAbsent)
	}
	if a.CriticalAbsent != "" {
		dst = appendText(append(dst, `,"critical_absent":`...), a.CriticalAbsent)
	}
	dst = depthsNormalVelocity.append(dst, system, a.NormalVelocity)
	dst = depthsNormalFroudeNumber.append(dst, system, a.NormalFroudeNumber)
	dst = depthsNormalBedShearStress.append(dst, system, a.NormalBedShearStress)
	dst = depthsFill.append(dst, system, a.Fill)
	dst = appendName(dst, `,"slope_class":`, a.SlopeClass)
	dst = depthsCriticalSlope.append(dst, system, a.CriticalSlope)
	dst = a.appendCapacity(dst, system)
	dst = depthsFreeboard.append(dst, system, a.Freeboard)
	if a.Closed {
		dst = strconv.AppendBool(append(dst, `,"surcharged":`...), a.Surcharged)
		dst = depthsFullFrictionSlope.append(dst, system, a.FullFrictionSlope)
	}
	if a.Given.Present {
		dst = a.Given.State.AppendJSON(append(dst, `,"given":`...), system)
		dst = depthsAlternateDepth.append(dst, system, a.Given.AlternateDepth)
		dst = depthsSequentDepth.append(dst, system, a.Given.SequentDepth)
		dst = appendName(dst, `,"curve":`, a.Given.Curve)
	}
	if !a.Brief {
		dst = appendStates(dst, `,"normal":`, a.Normal, system)
		dst = appendStates(dst, `,"critical":`, a.Critical, system)
	}
	return dst
}

func (a *DepthsAnswer) appendCapacity(dst []byte, system System) []byte {
	dst = append(dst, `,"capacity":`...)
	if !a.Capacity.Known {
		return append(dst, "null"...)
	}
	start := len(dst)
	dst = depthsCapacityDischarge.append(dst, system, a.Capacity.Discharge)
	dst = depthsCapacityDepth.append(dst, system, a.Capacity.Depth)
	if a.Closed {
		dst = depthsCapacityFullDischarge.append(dst, system, a.Capacity.FullDischarge)
	}
	dst = depthsCapacityRatio.append(dst, system, a.Capacity.Ratio)
	dst[start] = '{' // in place of the first comma
	return append(dst, '}')
}
