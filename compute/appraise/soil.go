package appraise

import (
	"math"

	"leat/compute/friction"
	"leat/compute/section"
)

// SoilGroup is a group of cohesive soils by the names of ASTM D2487.
type SoilGroup uint8

const (
	NoSoilGroup  SoilGroup = iota
	SiltyGravel            // GM
	ClayeyGravel           // GC
	SiltySand              // SM
	ClayeySand             // SC
	Silt                   // ML
	LeanClay               // CL
	ElasticSilt            // MH
	FatClay                // CH
	soilGroups   = iota
)

var soilGroupNames = [soilGroups]string{"", "silty_gravel", "clayey_gravel", "silty_sand", "clayey_sand", "silt", "lean_clay", "elastic_silt", "fat_clay"}

// String returns the group's name in snake_case.
func (g SoilGroup) String() string { return soilGroupNames[g] }

// Soil is the ground of a channel: cohesive, known by its group, plasticity index and void ratio, or not, known by its grain size. Missing values are NaN.
type Soil struct {
	Group           SoilGroup
	PlasticityIndex float64 // percent
	VoidRatio       float64
	GrainSize       float64 // 75 % by weight is finer, m
}

// cohesive holds the coefficients of
//
//	tau = (c1 PI^2 + c2 PI + c3) (c4 + c5 e)^2 c6   in N/m2
//
// for a plasticity index from 10 to 20 and above (HEC-15, third edition, table 4.6, after USDA 1987).
var cohesive = [soilGroups]struct {
	plastic      [3]float64 // c1, c2, c3 from 10 to 20
	plasticScale float64    // c6
	above        float64    // c3 above 20, where c1 and c2 are 0 and c6 is 48
	dense, loose float64    // c4, c5
}{
	SiltyGravel:  {[3]float64{1.07, 14.3, 47.7}, 4.8e-3, 0.076, 1.42, -0.61},
	ClayeyGravel: {[3]float64{0.0477, 2.86, 42.9}, 4.8e-2, 0.119, 1.42, -0.61},
	SiltySand:    {[3]float64{1.07, 7.15, 11.9}, 4.8e-3, 0.058, 1.42, -0.61},
	ClayeySand:   {[3]float64{1.07, 14.3, 47.7}, 4.8e-3, 0.076, 1.42, -0.61},
	Silt:         {[3]float64{1.07, 7.15, 11.9}, 4.8e-3, 0.058, 1.48, -0.57},
	LeanClay:     {[3]float64{1.07, 14.3, 47.7}, 4.8e-3, 0.076, 1.48, -0.57},
	ElasticSilt:  {[3]float64{0.0477, 1.43, 10.7}, 4.8e-2, 0.058, 1.38, -0.373},
	FatClay:      {[3]float64{math.NaN(), math.NaN(), math.NaN()}, math.NaN(), 0.097, 1.38, -0.373},
}

// The grain sizes in m between which, without cohesion, what the ground stands is in proportion to its grain (HEC-15, third edition, chapter 4).
const (
	fineGrain     = 0.0013
	greatestGrain = 0.050
)

// cohesiveRoughness is Manning's n of the grains of a fine or cohesive soil (HEC-15, third edition, chapter 4).
const cohesiveRoughness = 0.016

func (s *Soil) check(c *check) {
	c.size("grain_size", s.GrainSize)
	if s.Group >= soilGroups {
		c.add("soil_group", "unknown_value", "soil_group must be one of the groups of cohesive soils.")
	}
	if s.Group != NoSoilGroup && !math.IsNaN(s.GrainSize) {
		c.add("grain_size", "conflict", "Either soil_group, plasticity_index and void_ratio or grain_size describe the soil; give one kind of them.")
	}
	if s.PlasticityIndex < 0 || s.PlasticityIndex > 1000 {
		c.add("plasticity_index", "out_of_range", "plasticity_index must be a percentage of 0 or more.")
	}
	if s.VoidRatio <= 0 || s.VoidRatio > 2 {
		c.add("void_ratio", "out_of_range", "void_ratio must be greater than 0 and at most 2.")
	}
}

// Stands returns the permissible shear stress of the bare soil in N/m2 and Manning's n of its grains, or the reason why they are not known:
// for cohesive soils as the coefficients above say; else 1 N/m2 below 1.3 mm, and 0.75 N/m2 for each mm of the grain size up to 50 mm (HEC-15, third
// edition, chapter 4); n = 0.016, for coarse grains 0.015 D^(1/6) with D in mm.
func (s *Soil) Stands() (shear, roughness float64, reason Reason) {
	switch {
	case s.Group == NoSoilGroup && math.IsNaN(s.GrainSize):
		if !math.IsNaN(s.PlasticityIndex) || !math.IsNaN(s.VoidRatio) {
			return math.NaN(), math.NaN(), missing("soil_group")
		}
		return math.NaN(), math.NaN(), Reason{"missing_soil",
			"The soil under the lining is not known: soil_group, plasticity_index and void_ratio, or grain_size, are missing."}
	case s.Group == NoSoilGroup:
		return looseGround(s.GrainSize)
	}
	plasticity, void := math.IsNaN(s.PlasticityIndex), math.IsNaN(s.VoidRatio)
	switch {
	case plasticity && void:
		return math.NaN(), math.NaN(), missing("plasticity_index", "void_ratio")
	case plasticity:
		return math.NaN(), math.NaN(), missing("plasticity_index")
	case void:
		return math.NaN(), math.NaN(), missing("void_ratio")
	}
	row, pi := &cohesive[s.Group], s.PlasticityIndex
	density := row.dense + row.loose*s.VoidRatio
	switch {
	case pi >= 20:
		shear = row.above * density * density * 48
	case pi >= 10 && s.Group == FatClay:
		return math.NaN(), math.NaN(), Reason{"plasticity_below_range", "The permissible shear stress of fat clay is known from a plasticity index of 20 on."}
	case pi >= 10:
		shear = (row.plastic[0]*pi*pi + row.plastic[1]*pi + row.plastic[2]) * density * density * row.plasticScale
	default:
		return math.NaN(), math.NaN(), Reason{"plasticity_below_range",
			"Below a plasticity index of 10 a soil does not count as cohesive; give its grain_size instead."}
	}
	return shear, cohesiveRoughness, Reason{}
}

// looseGround is Stands for a soil without cohesion.
func looseGround(grain float64) (shear, roughness float64, reason Reason) {
	switch {
	case grain < fineGrain:
		return 1, cohesiveRoughness, Reason{}
	case grain <= greatestGrain:
		millimetres := grain * 1000
		return 0.75 * millimetres, 0.015 * math.Sqrt(math.Cbrt(millimetres)), Reason{}
	}
	return math.NaN(), math.NaN(), Reason{"grain_above_range", "The soil's grains are larger than those whose permissible shear stress is known; stones are judged as gravel or riprap."}
}

// BareSoil is a channel without a lining.
type BareSoil struct {
	shear  float64
	reason Reason
}

// NewBareSoil returns a channel in bare soil. It fails with compute.Faults.
func NewBareSoil(soil Soil) (Lining, error) {
	var c check
	soil.check(&c)
	if err := c.err(); err != nil {
		return nil, err
	}
	shear, _, reason := soil.Stands()
	return BareSoil{shear, reason}, nil
}

// Roughness implements Lining: it sets none.
func (l BareSoil) Roughness(section.Section, float64) (friction.Law, error) { return nil, nil }

func (l BareSoil) resist(_ attack, s LiningState) (LiningState, Reason) {
	if l.reason.Code == "" {
		s = s.standing(l.shear)
	}
	return s, l.reason
}
