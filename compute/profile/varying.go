package profile

import (
	"slices"

	"leat/compute/flow"
	"leat/compute/friction"
	"leat/compute/section"
)

// varying is a stretch on which the section, or the discharge, varies with the chainage: the interval between two stations (at equal depth area, width, first
// moment, perimeter, conveyance and coefficients vary linearly), or a prismatic reach with lateral inflow. The depth's equation is
//
//	ddepth/dx * cos*(1 - F^2) = S0 - Sf - dE/dx at equal depth            (interval)
//	ddepth/dx * cos*(1 - F^2) = S0 - Sf - 2*beta*Q*q/(g*A^2)              (lateral inflow q; Chow 1959, section 12-2)
type varying struct {
	a, b    *flow.Channel // the sections at both ends; the same one under lateral inflow
	fed     bool
	slope   float64
	length  float64
	first   float64 // total discharge at the upstream end
	lateral float64 // total inflow per length
	cosine  float64
	breaks  []float64
	height  float64
	corners []float64 // chainages inside at which critical depth jumps and the flow passes through it
	check   func() error
	memory  *memory
}

// newFed returns a reach with lateral inflow.
func newFed(c *flow.Channel, discharge, lateral, length float64, check func() error, memory *memory) *varying {
	v := &varying{a: c, b: c, fed: true, slope: c.Slope, length: length, first: discharge, lateral: lateral, cosine: c.Cosine(), check: check, memory: memory}
	v.prepare()
	return v
}

// newInterval returns the interval between two stations, whose channels bear the slope of the interval.
func newInterval(a, b *flow.Channel, discharge, length float64, check func() error, memory *memory) *varying {
	v := &varying{a: a, b: b, slope: a.Slope, length: length, first: discharge, cosine: a.Cosine(), check: check, memory: memory}
	v.prepare()
	return v
}

func (v *varying) prepare() {
	v.height = min(v.a.Section.Height(), v.b.Section.Height())
	v.breaks = slices.Concat(v.a.Section.Breaks(), v.a.Law.Breaks(), v.b.Section.Breaks(), v.b.Law.Breaks())
	slices.Sort(v.breaks)
	v.breaks = slices.Compact(v.breaks)
	v.breaks = slices.DeleteFunc(v.breaks, func(d float64) bool { return d <= 0 || d >= v.height })
}

func (v *varying) total(x float64) float64 { return v.first + v.lateral*x }

func (v *varying) side(x float64) side {
	if v.fed || x == 0 {
		return sideOf(v.a, v.total(x))
	}
	if x == v.length {
		return sideOf(v.b, v.total(x))
	}
	w := x / v.length
	c := *v.a
	c.Section = &between{v: v, w: w}
	c.Law = &betweenLaw{v: v, w: w}
	return sideOf(&c, v.total(x))
}

// rates returns the numerator and the denominator of ddepth/dx at a chainage and depth.
func (v *varying) rates(x, y float64) (numerator, denominator float64) {
	if v.fed {
		m := v.a.Motion(v.total(x))
		g := v.a.Geometry(y)
		momentum := 1.0
		if v.a.MomentumCoefficient != 0 {
			momentum = v.a.MomentumCoefficient
		} else {
			momentum = v.a.Law.Coefficients(v.a.Wetted(g)).Momentum
		}
		perBarrel := v.lateral / float64(max(v.a.Barrels, 1))
		return v.slope - m.FrictionSlope(g) - 2*momentum*m.Discharge()*perBarrel/(v.a.Gravity*g.Area*g.Area), m.EnergyRate(g)
	}
	w := x / v.length
	ga, gb := v.a.Geometry(y), v.b.Geometry(y)
	q := v.first / float64(max(v.a.Barrels, 1))
	wa, wb := v.a.Wetted(ga), v.b.Wetted(gb)
	k := (1-w)*v.a.Law.AtDischarge(wa, q).K + w*v.b.Law.AtDischarge(wb, q).K
	ca, cb := coefficients(v.a, wa), coefficients(v.b, wb)
	alpha, alphaRate := (1-w)*ca.Energy+w*cb.Energy, (1-w)*ca.EnergyRate+w*cb.EnergyRate
	alphaAlong := (cb.Energy - ca.Energy) / v.length
	area, width := (1-w)*ga.Area+w*gb.Area, (1-w)*ga.TopWidth+w*gb.TopWidth
	areaAlong := (gb.Area - ga.Area) / v.length
	head := q * q / v.a.Gravity
	along := head / (area * area) * (alphaAlong/2 - alpha*areaAlong/area)
	slope := q / k
	return v.slope - slope*slope - along, v.cosine - head/(area*area)*(alpha*width/area-alphaRate/2)
}

// coefficients returns alpha and beta of a channel at a geometry, as given or by its law.
func coefficients(c *flow.Channel, g section.Geometry) friction.Coefficients {
	k := c.Law.Coefficients(g)
	if c.EnergyCoefficient != 0 {
		k.Energy, k.EnergyRate = c.EnergyCoefficient, 0
	}
	if c.MomentumCoefficient != 0 {
		k.Momentum, k.MomentumRate = c.MomentumCoefficient, 0
	}
	return k
}

// between is the cross-section at a place inside an interval.
type between struct {
	v *varying
	w float64
}

func (b *between) At(depth float64) section.Geometry {
	return mix(b.v.a.Section.At(depth), b.v.b.Section.At(depth), b.w)
}

func (b *between) Full() section.Geometry {
	return mix(b.v.a.Section.Full(), b.v.b.Section.Full(), b.w)
}

func mix(a, b section.Geometry, w float64) section.Geometry {
	u := 1 - w
	return section.Geometry{Depth: a.Depth, Area: u*a.Area + w*b.Area, Perimeter: u*a.Perimeter + w*b.Perimeter, TopWidth: u*a.TopWidth + w*b.TopWidth,
		Moment: u*a.Moment + w*b.Moment, PerimeterRate: u*a.PerimeterRate + w*b.PerimeterRate, TopWidthRate: u*a.TopWidthRate + w*b.TopWidthRate}
}

func (b *between) Height() float64       { return b.v.height }
func (b *between) Closed() bool          { return b.v.a.Section.Closed() }
func (b *between) Bank() (float64, bool) { return 0, false }
func (b *between) Breaks() []float64     { return b.v.breaks }
func (b *between) Form() section.Form    { return section.Irregular }

// betweenLaw is the roughness at a place inside an interval: conveyance and coefficients vary linearly at equal depth.
type betweenLaw struct {
	v *varying
	w float64
}

func (l *betweenLaw) AtSlope(g section.Geometry, slope float64) friction.Conveyance {
	a := l.v.a.Law.AtSlope(l.v.a.Geometry(g.Depth), slope)
	b := l.v.b.Law.AtSlope(l.v.b.Geometry(g.Depth), slope)
	return friction.Conveyance{K: (1-l.w)*a.K + l.w*b.K, Rate: (1-l.w)*a.Rate + l.w*b.Rate}
}

func (l *betweenLaw) AtDischarge(g section.Geometry, discharge float64) friction.Conveyance {
	a := l.v.a.Law.AtDischarge(l.v.a.Geometry(g.Depth), discharge)
	b := l.v.b.Law.AtDischarge(l.v.b.Geometry(g.Depth), discharge)
	return friction.Conveyance{K: (1-l.w)*a.K + l.w*b.K, Rate: (1-l.w)*a.Rate + l.w*b.Rate}
}

func (l *betweenLaw) Coefficients(g section.Geometry) friction.Coefficients {
	a, b := l.v.a.Law.Coefficients(l.v.a.Geometry(g.Depth)), l.v.b.Law.Coefficients(l.v.b.Geometry(g.Depth))
	u, w := 1-l.w, l.w
	return friction.Coefficients{Energy: u*a.Energy + w*b.Energy, EnergyRate: u*a.EnergyRate + w*b.EnergyRate,
		Momentum: u*a.Momentum + w*b.Momentum, MomentumRate: u*a.MomentumRate + w*b.MomentumRate}
}

// AsOne reports whether the coefficients are 1 at every depth.
func (l *betweenLaw) AsOne() bool {
	return friction.UnitCoefficients(l.v.a.Law) && friction.UnitCoefficients(l.v.b.Law)
}

func (l *betweenLaw) Breaks() []float64   { return nil }
func (l *betweenLaw) Form() friction.Form { return friction.General }
