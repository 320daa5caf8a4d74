package wire

// The members of a state.
var (
	stateDepth            = answerMember("depth", QuantityLength)
	stateArea             = answerMember("area", QuantityArea)
	stateWettedPerimeter  = answerMember("wetted_perimeter", QuantityLength)
	stateHydraulicRadius  = answerMember("hydraulic_radius", QuantityLength)
	stateTopWidth         = answerMember("top_width", QuantityLength)
	stateHydraulicDepth   = answerMember("hydraulic_depth", QuantityLength)
	stateCentroidDepth    = answerMember("centroid_depth", QuantityLength)
	stateConveyance       = answerMember("conveyance", QuantityDischarge)
	stateUniformDischarge = answerMember("uniform_discharge", QuantityDischarge)
	stateDischarge        = answerMember("discharge", QuantityDischarge)
	stateVelocity         = answerMember("velocity", QuantityVelocity)
	stateVelocityHead     = answerMember("velocity_head", QuantityLength)
	stateFroudeNumber     = answerMember("froude_number", Dimensionless)
	stateSpecificEnergy   = answerMember("specific_energy", QuantityLength)
	stateSpecificForce    = answerMember("specific_force", QuantityVolume)
	stateFrictionSlope    = answerMember("friction_slope", Dimensionless)
	stateBedShearStress   = answerMember("bed_shear_stress", QuantityStress)
	stateStreamPower      = answerMember("stream_power", QuantityPowerPerArea)
)

// AppendJSON appends the state as an object.
func (s *State) AppendJSON(dst []byte, system System) []byte {
	start := len(dst)
	dst = s.appendMembers(dst, system)
	dst[start] = '{' // in place of the first comma
	return append(dst, '}')
}

// appendMembers appends the members, each with its comma before it.
func (s *State) appendMembers(dst []byte, system System) []byte {
	if s.Members&WithDischarge != 0 {
		dst = stateDischarge.append(dst, system, s.Discharge)
	}
	dst = stateDepth.append(dst, system, s.Depth)
	dst = stateArea.append(dst, system, s.Area)
	dst = stateWettedPerimeter.append(dst, system, s.WettedPerimeter)
	dst = stateHydraulicRadius.append(dst, system, s.HydraulicRadius)
	dst = stateTopWidth.append(dst, system, s.TopWidth)
	dst = stateHydraulicDepth.append(dst, system, s.HydraulicDepth)
	dst = stateCentroidDepth.append(dst, system, s.CentroidDepth)
	if s.Members&WithConveyance != 0 {
		dst = stateConveyance.append(dst, system, s.Conveyance)
	}
	if s.Members&WithUniform != 0 {
		dst = stateUniformDischarge.append(dst, system, s.UniformDischarge)
	}
	if s.Members&WithFlow != 0 {
		dst = stateVelocity.append(dst, system, s.Velocity)
		dst = stateVelocityHead.append(dst, system, s.VelocityHead)
		dst = stateFroudeNumber.append(dst, system, s.FroudeNumber)
		dst = stateSpecificEnergy.append(dst, system, s.SpecificEnergy)
		dst = stateSpecificForce.append(dst, system, s.SpecificForce)
		dst = appendName(dst, `,"regime":`, s.Regime)
	}
	if s.Members&WithFriction != 0 {
		dst = stateFrictionSlope.append(dst, system, s.FrictionSlope)
		dst = stateBedShearStress.append(dst, system, s.BedShearStress)
		dst = stateStreamPower.append(dst, system, s.StreamPower)
	}
	return dst
}

// appendStates appends a list of states under a key.
func appendStates(dst []byte, key string, states []State, system System) []byte {
	dst = append(dst, key...)
	dst = append(dst, '[')
	for i := range states {
		if i > 0 {
			dst = append(dst, ',')
		}
		dst = states[i].AppendJSON(dst, system)
	}
	return append(dst, ']')
}
