package wire

// Placed answers have places along the geometry of their request, from its first position to its last.
type Placed interface {
	Answer
	// Line returns the geometry's positions, none where the request gave no geometry, and the length in m that runs along them.
	Line() (line []Position, length float64)
	// Places returns the number of places.
	Places() int
	// Place returns where a place is, in m from the first position, and its water level in m, NaN where that is not known.
	Place(i int) (chainage, level float64)
	// AppendProperties appends the members of a place as an object.
	AppendProperties(dst []byte, i int, system System) []byte
	// AppendRest appends all members of the answer that belong to no place, each with its comma before it.
	AppendRest(dst []byte, system System, id ID) []byte
}

// Line returns the request's geometry and the length of the run.
func (a *ProfileAnswer) Line() (line []Position, length float64) {
	if a.Geometry != nil {
		line = a.Geometry.Coordinates
	}
	return line, a.Length
}

// Places are the stations and the jumps.
func (a *ProfileAnswer) Places() int { return len(a.Stations) + len(a.Jumps) }

// Place returns the chainage and the water level of a station, or of the station just below a jump.
func (a *ProfileAnswer) Place(i int) (chainage, level float64) {
	if i < len(a.Stations) {
		return a.Stations[i].Chainage, a.Stations[i].WaterLevel
	}
	return a.Jumps[i-len(a.Stations)].Chainage, a.Jumps[i-len(a.Stations)].WaterLevel
}

// AppendProperties appends the members of a station or a jump; `feature` says which it is.
func (a *ProfileAnswer) AppendProperties(dst []byte, i int, system System) []byte {
	if i < len(a.Stations) {
		dst = a.Stations[i].appendMembers(append(dst, `{"feature":"station"`...), system)
	} else {
		dst = a.Jumps[i-len(a.Stations)].appendMembers(append(dst, `{"feature":"jump"`...), system)
	}
	return append(dst, '}')
}

// AppendRest appends id, units, reaches, curves, controls, extent, balance and warnings.
func (a *ProfileAnswer) AppendRest(dst []byte, system System, id ID) []byte {
	start := len(dst)
	dst = appendHead(dst, system, id, a.Fingerprint)
	dst[start] = ',' // in place of the brace
	dst = a.appendReaches(dst, system)
	return a.appendRun(dst, system)
}
