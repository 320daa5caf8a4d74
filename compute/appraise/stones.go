package appraise

import (
	"math"

	"leat/compute"
	"leat/compute/friction"
	"leat/compute/section"
)

// Rock describes stones. Missing values are NaN.
type Rock struct {
	StoneSize       float64 // median, m
	SpecificGravity float64 // 2.65 where it is missing
	AngleOfRepose   float64 // degrees
	Viscosity       float64 // kinematic, of the water, m2/s; 1.14e-6 where it is missing
}

// The values that stand for missing ones: common rock, and water at 15 degrees C.
const (
	commonGravity   = 2.65
	commonViscosity = 1.14e-6
)

// Riprap is a lining of loose stones, cobbles or gravel, which sets its own roughness.
type Riprap struct {
	rock         Rock
	sine, cosine float64 // of the angle of repose; NaN where it is missing
}

// NewRiprap returns a lining of stones. It fails with compute.Faults, also where stone_size is missing, from which its roughness follows.
func NewRiprap(rock Rock) (Lining, error) {
	var c check
	c.needed("stone_size", rock.StoneSize)
	c.size("kinematic_viscosity", rock.Viscosity)
	if rock.SpecificGravity <= 1 || rock.SpecificGravity > 20 {
		c.add("specific_gravity", "out_of_range", "specific_gravity must be greater than 1, that of water, and at most 20.")
	}
	if rock.AngleOfRepose <= 0 || rock.AngleOfRepose >= 90 {
		c.add("angle_of_repose", "out_of_range", "angle_of_repose must be greater than 0 and less than 90 degrees.")
	}
	if err := c.err(); err != nil {
		return nil, err
	}
	if math.IsNaN(rock.SpecificGravity) {
		rock.SpecificGravity = commonGravity
	}
	if math.IsNaN(rock.Viscosity) {
		rock.Viscosity = commonViscosity
	}
	sine, cosine := math.Sincos(rock.AngleOfRepose * (math.Pi / 180))
	return Riprap{rock, sine, cosine}, nil
}

// Roughness implements Lining.
func (l Riprap) Roughness(s section.Section, gravity float64) (friction.Law, error) {
	if s.Closed() {
		return nil, closedSection("stones")
	}
	return friction.NewStones(l.rock.StoneSize, gravity, s)
}

// closedSection is the fault of a lining of open channels in a closed section.
func closedSection(what string) error {
	return compute.Faults{{Member: "kind", Code: "closed_section", Detail: "A lining of " + what + " belongs to open channels; a closed section needs a roughness."}}
}

// ShieldsNumber returns the Shields parameter of stones and the safety that goes with it, by the Reynolds number of the grains: 0.047 and 1 up to 4e4, 0.15 and
// 1.5 from 2e5 on, straight between (HEC-15, third edition, table 6.1).
func ShieldsNumber(reynolds float64) (shields, safety float64) {
	x := min(1, max(0, (reynolds-4e4)/(2e5-4e4)))
	return 0.047 + x*(0.15-0.047), 1 + 0.5*x
}

// TractiveForceRatio returns what a stone stands on a side slope (horizontal per unit vertical) over what it stands on a level bed, given the sine of its angle of
// repose: sqrt(1 - (sin/sin repose)^2), 0 where the side is steeper (E. W. Lane 1955; V. T. Chow 1959, section 7-12; HEC-15, third edition, section 6.3).
func TractiveForceRatio(slope, sine float64) float64 {
	square := 1 / ((1 + slope*slope) * sine * sine)
	if !(square < 1) {
		return 0
	}
	return math.Sqrt(1 - square)
}

// The side slope from which on sides need no look of their own, and the bed slopes between which both rules hold (HEC-15, third edition, sections 6.2 and 6.3).
const (
	gentleSide  = 3
	gentleSlope = 0.05
	steepSlope  = 0.10
)

// resist implements Lining: on gentle slopes the bed stands F (rho_s - rho) g D and sides steeper than 1 in 3 that times the tractive-force ratio; on steep ones
// the weight of the stones pulls along too. Between the lesser safety holds.
func (l Riprap) resist(a attack, s LiningState) (LiningState, Reason) {
	velocity := math.Sqrt(a.gravity * a.geometry.Depth * a.slope) // shear velocity
	shields, recommended := ShieldsNumber(velocity * l.rock.StoneSize / l.rock.Viscosity)
	s.RecommendedSafety = recommended
	s.PermissibleShear = shields * compute.WaterDensity * a.gravity * (l.rock.SpecificGravity - 1) * l.rock.StoneSize
	if !math.IsNaN(l.sine) && !math.IsNaN(a.side) {
		s.PermissibleSideShear = s.PermissibleShear * TractiveForceRatio(a.side, l.sine)
	}
	steepSides := !(a.side >= gentleSide)
	if steepSides || a.slope > gentleSlope {
		switch {
		case math.IsNaN(a.side):
			return s, Reason{"side_slope_unknown", "How steep the sides are is not known for this kind of section."}
		case math.IsNaN(l.sine):
			return s, missing("angle_of_repose")
		}
	}
	s.Safety = math.Inf(1)
	if a.slope <= steepSlope {
		s.Safety = s.PermissibleShear / s.BedShear
		if side := s.PermissibleSideShear / s.SideShear; steepSides && side < s.Safety {
			s.Safety, s.OnSides = side, true
		}
	}
	if a.slope > gentleSlope {
		if steep := l.steep(&a, &s); steep < s.Safety {
			s.Safety, s.OnSides = steep, true
		}
	}
	switch {
	case s.Safety == 0:
		return s, Reason{"steeper_than_repose", "The sides are steeper than the stones' angle of repose."}
	case a.submergence > friction.GreatestSubmergence:
		return s, Reason{"beyond_roughness_range", "The flow is deeper against the stones than the range for which their roughness was found."}
	}
	return s, Reason{}
}

// steep returns the safety of stones on the side of a steep channel.
func (l Riprap) steep(a *attack, s *LiningState) float64 {
	return StoneStability(s.SideShear/s.PermissibleShear, a.side, l.sine/l.cosine, a.slope)
}

// StoneStability returns the safety factor of a stone on a side slope (horizontal per unit vertical) under flow down a bed, from the stability number, shear stress
// over what a level bed of such stones stands, the tangent of the angle of repose and the sine of the bed's angle:
//
//	SF = cos(theta) tan(phi)/(eta' tan(phi) + sin(theta) cos(beta)),  eta' = eta (1 + sin(alpha + beta))/2
//	tan(beta) = cos(alpha)/(2 sin(theta)/(eta tan(phi)) + sin(alpha))
//
// with the angles alpha of the bed, theta of the side and phi of repose (M. A. Stevens and D. B. Simons 1971; HEC-15, third edition, section 6.3 and appendix D, where
// it is solved for the size of the stones). It is 0 where the side is as steep as the angle of repose.
func StoneStability(stability, side, tangent, bed float64) float64 {
	sine, cosine := 0.0, 1.0
	if !math.IsInf(side, 1) {
		root := math.Sqrt(1 + side*side)
		sine, cosine = 1/root, side/root
	}
	if !(sine < tangent*cosine) {
		return 0
	}
	level := math.Sqrt((1 - bed) * (1 + bed))
	pull := 2*sine/(stability*tangent) + bed
	length := math.Sqrt(level*level + pull*pull)
	betaSine, betaCosine := level/length, pull/length
	sum := bed*betaCosine + level*betaSine // sin(alpha + beta)
	return cosine * tangent / (stability*(1+sum)/2*tangent + sine*betaCosine)
}
