package profile

// A stretch is a part of the chain on which nothing jumps but the depth: a prismatic reach, or one with lateral inflow, or the interval between two stations.
type stretch interface {
	// sweep follows the flow of one regime from a place and a depth to the upstream or the downstream end, or to where its branch ends.
	sweep(x, depth, direction float64, subcritical bool) (*trace, error)
	// side returns the channel and the motion at a chainage of the stretch.
	side(x float64) side
	// total returns the total discharge at a chainage.
	total(x float64) float64
	// rates returns the numerator and the denominator of ddepth/dx at a chainage and depth.
	rates(x, depth float64) (numerator, denominator float64)
	// controls returns the places inside at which the flow passes from subcritical to supercritical by itself, from upstream to downstream,
	// as far as looking at the ends of so many parts of it can tell.
	controls(parts int) ([]passage, error)
}

// A passage is a place and its critical depth: that of the flow above it and that of the flow below it, two where another minimum of the energy becomes the
// least there.
type passage struct{ x, depth, below float64 }

// A leg is a stretch with its place in the chain and the subcritical flow in it.
type leg struct {
	stretch
	reach     int     // index of the reach, or of the interval
	start     float64 // chainage of its upstream end in the run
	length    float64
	bed       float64 // bed level at its upstream end
	slope     float64
	prismatic bool
	inside    []passage
	subs      []*trace // subcritical sweeps, from downstream to upstream: from the end, and from each control inside
	joint     joint    // to the next leg
	above     above    // what the joint makes of the flow below it; of the last leg the boundary
}

// level returns the bed level at a chainage of the leg.
func (l *leg) level(x float64) float64 { return l.bed - l.slope*x }

// passage returns the passage inside the leg at a chainage.
func (l *leg) passage(x float64) (p passage, ok bool) {
	for _, p := range l.inside {
		if p.x == x {
			return p, true
		}
	}
	return p, false
}

// sub returns the subcritical sweep that covers a chainage, nil for none.
func (l *leg) sub(x float64) *trace {
	for _, t := range l.subs {
		if t.covers(x) {
			return t
		}
	}
	return nil
}

// subBelow returns the subcritical sweep whose upstream end is the nearest at or below a chainage, nil for none.
func (l *leg) subBelow(x float64) *trace {
	for i := len(l.subs) - 1; i >= 0; i-- {
		if t := l.subs[i]; t.end >= x {
			return t
		}
	}
	return nil
}

func (p *prismatic) side(float64) side               { return side{p.channel, p.motion} }
func (p *prismatic) total(float64) float64           { return p.discharge }
func (p *prismatic) controls(int) ([]passage, error) { return nil, nil }

func (p *prismatic) rates(_, depth float64) (numerator, denominator float64) {
	g := p.channel.Geometry(depth)
	return p.steepness(g), p.motion.EnergyRate(g)
}
