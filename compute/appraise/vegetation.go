package appraise

import (
	"leat/compute/friction"
	"leat/compute/section"
	"leat/compute/solve"
)

// Condition is how good a stand of grass is.
type Condition uint8

const (
	NoCondition Condition = iota
	Excellent
	VeryGood
	Good
	Fair
	Poor
	conditions = iota
)

var conditionNames = [conditions]string{"", "excellent", "very_good", "good", "fair", "poor"}

// String returns the condition's name in snake_case.
func (c Condition) String() string { return conditionNames[c] }

// GrowthForm is how grass grows.
type GrowthForm uint8

const (
	NoGrowthForm GrowthForm = iota
	Sod
	Bunch
	Mixed
	growthForms = iota
)

var growthFormNames = [growthForms]string{"", "sod", "bunch", "mixed"}

// String returns the form's name in snake_case.
func (g GrowthForm) String() string { return growthFormNames[g] }

// density holds the density-stiffness coefficient of grass by its condition (HEC-15, third edition, table 4.2).
var density = [conditions]float64{Excellent: 580, VeryGood: 290, Good: 106, Fair: 24, Poor: 8.6}

// cover holds the cover factor of grass by growth form and condition (HEC-15, third edition, table 4.5).
var cover = [growthForms][conditions]float64{
	Sod:   {Excellent: 0.98, VeryGood: 0.95, Good: 0.90, Fair: 0.84, Poor: 0.75},
	Bunch: {Excellent: 0.55, VeryGood: 0.53, Good: 0.50, Fair: 0.47, Poor: 0.41},
	Mixed: {Excellent: 0.82, VeryGood: 0.79, Good: 0.75, Fair: 0.70, Poor: 0.62},
}

// Grass describes a stand of grass and the soil under it.
type Grass struct {
	StemHeight float64 // m
	Condition  Condition
	GrowthForm GrowthForm // NoGrowthForm where it is missing
	Soil       Soil
}

// Vegetation is a grass lining, which sets its own roughness.
type Vegetation struct {
	coefficient float64 // Cn
	factor      float64 // what the soil stands over (1 - Cf) ns^2, N/m2
	reason      Reason
}

// NewVegetation returns a grass lining. It fails with compute.Faults, also where stem_height or condition are missing, from which its roughness follows.
func NewVegetation(grass Grass) (Lining, error) {
	var c check
	c.needed("stem_height", grass.StemHeight)
	switch {
	case grass.Condition == NoCondition:
		c.add("condition", "missing", "The condition is missing: the lining's roughness follows from it.")
	case grass.Condition >= conditions:
		c.add("condition", "unknown_value", "The condition must be excellent, very_good, good, fair or poor.")
	}
	if grass.GrowthForm >= growthForms {
		c.add("growth_form", "unknown_value", "growth_form must be sod, bunch or mixed.")
	}
	grass.Soil.check(&c)
	if err := c.err(); err != nil {
		return nil, err
	}
	l := Vegetation{coefficient: GrassCoefficient(grass.StemHeight, grass.Condition)}
	shear, roughness, reason := grass.Soil.Stands()
	switch {
	case grass.GrowthForm == NoGrowthForm:
		l.reason = missing("growth_form")
	case reason.Code != "":
		l.reason = reason
	default:
		l.factor = shear / ((1 - cover[grass.GrowthForm][grass.Condition]) * roughness * roughness)
	}
	return l, nil
}

// GrassCoefficient returns the roughness coefficient of grass from its stem height in m and its condition: 0.35 Cs^0.10 h^0.528 (HEC-15, third edition,
// section 4.1).
func GrassCoefficient(stemHeight float64, condition Condition) float64 {
	return 0.35 * solve.Power(density[condition], 0.10) * solve.Power(stemHeight, 0.528)
}

// Roughness implements Lining.
func (l Vegetation) Roughness(s section.Section, gravity float64) (friction.Law, error) {
	if s.Closed() {
		return nil, closedSection("vegetation")
	}
	return friction.NewGrass(l.coefficient, gravity)
}

// resist implements Lining: tau = soil/(1 - Cf) (n/ns)^2 (HEC-15, third edition, chapter 4).
func (l Vegetation) resist(_ attack, s LiningState) (LiningState, Reason) {
	if l.reason.Code == "" {
		s = s.standing(l.factor * s.Roughness * s.Roughness)
	}
	return s, l.reason
}
