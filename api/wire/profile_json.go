package wire

// The members of an answer to profile that are not members of states.
var (
	profileChainage        = answerMember("chainage", QuantityLength)
	profileBedLevel        = answerMember("bed_level", QuantityLength)
	profileWaterLevel      = answerMember("water_level", QuantityLength)
	profileEnergyLevel     = answerMember("energy_level", QuantityLength)
	profileNormalDepth     = answerMember("normal_depth", QuantityLength)
	profileCriticalDepth   = answerMember("critical_depth", QuantityLength)
	profileFrom            = answerMember("from", QuantityLength)
	profileTo              = answerMember("to", QuantityLength)
	profileUpstreamDepth   = answerMember("upstream_depth", QuantityLength)
	profileDownstreamDepth = answerMember("downstream_depth", QuantityLength)
	profileFroudeNumber    = answerMember("froude_number", Dimensionless)
	profileEnergyLoss      = answerMember("energy_loss", QuantityLength)
	profileLength          = answerMember("length", QuantityLength)
	profileDepth           = answerMember("depth", QuantityLength)
	profileExtent          = answerMember("extent", QuantityLength)
	profileEnergy          = answerMember("energy", QuantityLength)
	profileMomentum        = answerMember("momentum", QuantityVolume)
)

// AppendJSON appends the answer in a system of units; id stands in front where it is not nil.
func (a *ProfileAnswer) AppendJSON(dst []byte, system System, id ID) []byte {
	dst = appendHead(dst, system, id, a.Fingerprint)
	dst = appendItems(dst, `,"stations":`, a.Stations, system, (*ProfileStation).appendMembers)
	dst = a.appendReaches(dst, system)
	dst = appendItems(dst, `,"jumps":`, a.Jumps, system, (*ProfileJump).appendMembers)
	dst = a.appendRun(dst, system)
	return append(dst, '}')
}

// appendReaches appends what is said of reaches and curves, each member with its comma before it.
func (a *ProfileAnswer) appendReaches(dst []byte, system System) []byte {
	dst = appendItems(dst, `,"reaches":`, a.Reaches, system, (*ProfileReach).appendMembers)
	return appendItems(dst, `,"curves":`, a.Curves, system, (*ProfileCurve).appendMembers)
}

// appendRun appends what is said of the run as a whole.
func (a *ProfileAnswer) appendRun(dst []byte, system System) []byte {
	dst = appendItems(dst, `,"controls":`, a.Controls, system, (*ProfileControl).appendMembers)
	dst = profileExtent.append(dst, system, a.Extent)
	dst = append(dst, `,"balance":`...)
	start := len(dst)
	dst = profileEnergy.append(dst, system, a.Balance.Energy)
	dst = profileMomentum.append(dst, system, a.Balance.Momentum)
	dst[start] = '{' // in place of the first comma
	dst = append(dst, '}')
	return appendWarnings(dst, a.Warnings)
}

// appendItems appends a list of objects under a key, an empty one where there are none.
func appendItems[T any](dst []byte, key string, items []T, system System, members func(*T, []byte, System) []byte) []byte {
	dst = append(dst, key...)
	dst = append(dst, '[')
	for i := range items {
		if i > 0 {
			dst = append(dst, ',')
		}
		start := len(dst)
		dst = members(&items[i], dst, system)
		dst[start] = '{' // in place of the first comma
		dst = append(dst, '}')
	}
	return append(dst, ']')
}

func appendReach(dst []byte, key string, reach ID) []byte {
	return append(append(dst, key...), reach...)
}

func (s *ProfileStation) appendMembers(dst []byte, system System) []byte {
	dst = profileChainage.append(dst, system, s.Chainage)
	dst = appendReach(dst, `,"reach":`, s.Reach)
	dst = profileBedLevel.append(dst, system, s.BedLevel)
	dst = profileWaterLevel.append(dst, system, s.WaterLevel)
	dst = profileEnergyLevel.append(dst, system, s.EnergyLevel)
	dst = appendName(dst, `,"curve":`, s.Curve)
	return s.State.appendMembers(dst, system)
}

func (r *ProfileReach) appendMembers(dst []byte, system System) []byte {
	dst = appendReach(dst, `,"id":`, r.ID)
	dst = profileNormalDepth.append(dst, system, r.NormalDepth)
	dst = profileCriticalDepth.append(dst, system, r.CriticalDepth)
	return appendName(dst, `,"slope_class":`, r.SlopeClass)
}

func (c *ProfileCurve) appendMembers(dst []byte, system System) []byte {
	dst = profileFrom.append(dst, system, c.From)
	dst = profileTo.append(dst, system, c.To)
	dst = appendReach(dst, `,"reach":`, c.Reach)
	return appendName(dst, `,"curve":`, c.Curve)
}

func (j *ProfileJump) appendMembers(dst []byte, system System) []byte {
	dst = profileChainage.append(dst, system, j.Chainage)
	dst = appendReach(dst, `,"reach":`, j.Reach)
	dst = profileUpstreamDepth.append(dst, system, j.UpstreamDepth)
	dst = profileDownstreamDepth.append(dst, system, j.DownstreamDepth)
	dst = profileFroudeNumber.append(dst, system, j.FroudeNumber)
	dst = profileEnergyLoss.append(dst, system, j.EnergyLoss)
	dst = profileLength.append(dst, system, j.Length)
	return appendName(dst, `,"form":`, j.Form)
}

func (c *ProfileControl) appendMembers(dst []byte, system System) []byte {
	dst = profileChainage.append(dst, system, c.Chainage)
	dst = appendName(dst, `,"kind":`, c.Kind)
	return profileDepth.append(dst, system, c.Depth)
}
