package appraise

import (
	"math"

	"leat/compute"
	"leat/compute/flow"
	"leat/compute/friction"
	"leat/compute/section"
	"leat/compute/solve"
)

// A Lining is what covers the bed and the sides of an open channel, and what it stands. Its values may be missing (NaN): the roughness it sets needs
// some, as its constructor says; without the others its safety is not known, and a Reason says which are missing.
type Lining interface {
	// Roughness returns the friction law that the lining sets, bound to a section, under gravity in m/s2; nil where the lining sets none. It fails with
	// compute.Faults.
	Roughness(s section.Section, gravity float64) (friction.Law, error)

	// resist returns the state with what the lining stands filled in, or says why that is not known.
	resist(a attack, s LiningState) (LiningState, Reason)
}

// LiningState is what a lining bears and stands at one depth. A number that is not known is NaN.
type LiningState struct {
	Roughness            float64 // Manning's n at this depth, s/m^(1/3)
	BedShear             float64 // greatest shear stress on the bed, rho*g*depth*S, in a bend times its factor, N/m2
	SideShear            float64 // the same on the sides, N/m2
	PermissibleShear     float64 // on the bed, N/m2
	PermissibleSideShear float64 // on the sides, N/m2
	PermissibleVelocity  float64 // m/s, where the lining is judged by velocity
	BendFactor           float64 // 1 in a straight channel
	Safety               float64 // the least ratio of permissible to occurring stress or velocity
	RecommendedSafety    float64 // what the source of the method asks of that ratio
	OnSides              bool    // that ratio is the sides'
}

// attack is the flow as a lining bears it.
type attack struct {
	geometry    section.Geometry
	velocity    float64 // m/s
	slope       float64 // the sine of the bed's angle
	cosine      float64
	gravity     float64 // m/s2
	side        float64 // the steepest side, horizontal per unit vertical; NaN where not known
	bend        bool
	submergence float64 // mean depth over stone size where stones set the roughness, else 0
}

// SideFactor returns the greatest shear stress on the sides of a channel over that on its bed, for a side slope (horizontal per unit vertical):
// 0.77 up to 1.5, 0.066 z + 0.67, and 1 from 5 on (HEC-15, third edition, chapter 3, after A. G. Anderson and others 1970).
func SideFactor(slope float64) float64 {
	switch {
	case slope <= 1.5:
		return 0.77
	case slope < 5:
		return 0.066*slope + 0.67
	}
	return 1
}

// BendFactor returns the greatest shear stress in a bend over that in a straight channel, for the radius of the centreline over the width of the water surface:
// 2 up to 2, 2.38 - 0.206 x + 0.0073 x^2, and 1.05 from 10 on (HEC-15, third edition, chapter 3).
func BendFactor(ratio float64) float64 {
	switch {
	case ratio <= 2:
		return 2
	case ratio < 10:
		return 2.38 - 0.206*ratio + 0.0073*ratio*ratio
	}
	return 1.05
}

// judgeLining returns the state of a lining at a state of the flow.
func (a *Asset) judgeLining(s *flow.State) (LiningState, Reason) {
	nan := math.NaN()
	out := LiningState{Roughness: nan, BedShear: nan, SideShear: nan, PermissibleShear: nan, PermissibleSideShear: nan, PermissibleVelocity: nan,
		BendFactor: 1, Safety: nan, RecommendedSafety: nan}
	c, g := &a.Channel, s.Geometry
	out.Roughness = g.Area * solve.TwoThirds(s.Radius) / s.Conveyance
	att := attack{geometry: g, velocity: s.Velocity, slope: c.Slope, cosine: c.Cosine(), gravity: c.Gravity, side: nan, bend: a.BendRadius > 0}
	if stones, own := c.Law.(*friction.Stones); own {
		att.submergence = stones.Submergence(g)
	}
	if sided, ok := c.Section.(section.Sided); ok {
		att.side = sided.Steepest(g.Depth)
	}
	if att.bend {
		if a.BendRadius < g.TopWidth/2 {
			return out, TightBend
		}
		out.BendFactor = BendFactor(a.BendRadius / g.TopWidth)
	}
	out.BedShear = out.BendFactor * compute.WaterDensity * c.Gravity * g.Depth * c.Slope
	if att.side == att.side {
		out.SideShear = SideFactor(att.side) * out.BedShear
	}
	return a.Lining.resist(att, out)
}

// standing returns the state with the same permissible shear stress on the bed and the sides. The bed then governs.
func (s LiningState) standing(shear float64) LiningState {
	s.PermissibleShear, s.PermissibleSideShear = shear, shear
	s.Safety = shear / s.BedShear
	return s
}

// ShearLimited is a lining with a permissible shear stress of its own, as makers state it.
type ShearLimited struct{ permissible float64 }

// NewShearLimited returns a lining of a permissible_shear in N/m2, NaN where it is missing. It fails with compute.Faults where that is not positive.
func NewShearLimited(permissible float64) (Lining, error) {
	var c check
	c.size("permissible_shear", permissible)
	if err := c.err(); err != nil {
		return nil, err
	}
	return ShearLimited{permissible}, nil
}

// Roughness implements Lining: it sets none.
func (l ShearLimited) Roughness(section.Section, float64) (friction.Law, error) { return nil, nil }

func (l ShearLimited) resist(_ attack, s LiningState) (LiningState, Reason) {
	if math.IsNaN(l.permissible) {
		return s, missing("permissible_shear")
	}
	return s.standing(l.permissible), Reason{}
}
