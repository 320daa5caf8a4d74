package compute_test

import (
	"math"

	"leat/compute"
	"leat/compute/appraise"
	"leat/compute/flow"
	"leat/compute/friction"
	"leat/compute/section"
)

func init() {
	covers(fortierScobey, "fortier-scobey")
	covers(fortierScobeySand, "fortier-scobey-sand")
	covers(laneStones, "chow-7-2-lane")
	covers(canalFreeboardFeet, "usbr-freeboard-us")
	covers(canalFreeboardMetres, "usbr-freeboard-si")
	covers(chuteFreeboard, "usbr-freeboard-chute")
	covers(bendRise, "superelevation")
	covers(rapidBendRise, "superelevation-graf")
	covers(rollWaveLimits, "vedernikov-limits")
	covers(rollWaves, "vedernikov-rect")
	covers(grassCoefficients, "hec15-grass-coefficients")
	covers(grassLining, "hec15-4-1-grass")
	covers(bareSoils, "hec15-bare-soils")
	covers(stones, "hec15-stones")
	covers(stoneStability, "hds6-stability-number")
	covers(soilRanges, "hec15-soil-ranges")
	covers(shearFactors, "hec15-shear-factors")
}

const (
	foot  = 0.3048
	pound = 4.4482216152605 // of force, N
)

// unknown is a value that a lining lacks.
var unknown = math.NaN()

// earths maps the materials of the table of permissible velocities to the program's names.
var earths = map[string]appraise.Earth{
	"fine sand, noncolloidal": appraise.FineSand, "sandy loam, noncolloidal": appraise.SandyLoam, "silt loam, noncolloidal": appraise.SiltLoam,
	"alluvial silts, noncolloidal": appraise.AlluvialSilt, "ordinary firm loam": appraise.FirmLoam, "volcanic ash": appraise.VolcanicAsh,
	"stiff clay, very colloidal": appraise.StiffClay, "alluvial silts, colloidal": appraise.ColloidalAlluvialSilt, "shales and hardpans": appraise.ShaleOrHardpan,
	"fine gravel": appraise.FineGravel, "graded loam to cobbles, noncolloidal": appraise.LoamToCobbles, "graded silts to cobbles, colloidal": appraise.SiltToCobbles,
	"coarse gravel, noncolloidal": appraise.CoarseGravel, "cobbles and shingles": appraise.Cobbles,
}

// earthVelocities returns the permissible velocities in ft/s of the case's materials.
func (c *claim) earthVelocities(load appraise.Load) (velocities []float64) {
	c.Helper()
	materials, _ := c.c.Given["material"].([]any)
	c.read["material"] = true
	for _, material := range materials {
		v, known := appraise.PermissibleVelocity(earths[material.(string)], load)
		if !known {
			c.Fatalf("%v is not known", material)
		}
		velocities = append(velocities, v/foot)
	}
	return velocities
}

func fortierScobey(c *claim) {
	clear, silt := c.earthVelocities(appraise.ClearWater), c.earthVelocities(appraise.ColloidalSilt)
	c.want("velocity_clear_water", clear...)
	c.want("velocity_colloidal_silt", silt...)
	c.aside("roughness")
	c.leave("the shears were worked out from the velocities; the program judges by the velocities themselves", "shear_clear_water", "shear_colloidal_silt")
}

func fortierScobeySand(c *claim) {
	c.want("velocity", c.earthVelocities(appraise.SandOrGravel)...)
}

func laneStones(c *claim) {
	c.agreement = 0.005 // the independent values take the side's angle as a rounded 26.5 degrees
	ratio := appraise.TractiveForceRatio(c.given("side_slope"), math.Sin(c.given("angle_of_repose")*math.Pi/180))
	bed := 0.4 * c.given("particle_diameter_inches")
	c.want("tractive_force_ratio", ratio)
	c.want("permissible_bed_shear", bed)
	c.want("permissible_side_shear", bed*ratio)
	c.want("depth", bed*ratio/(c.given("side_shear_factor")*62.4*c.given("bed_slope")))
}

// The coefficients of the rule at its two ends, 20 and 3,000 ft3/s.
func canalFreeboardFeet(c *claim) {
	depths := c.list("depths")
	rule := func(cubicFeet, feet float64) float64 {
		return appraise.CanalFreeboard(cubicFeet*foot*foot*foot, feet*foot) / foot
	}
	c.want("freeboard_small", rule(20, depths[0]))
	c.want("freeboard_large", rule(3000, depths[1]))
	c.want("multiplier_small", rule(5, 1))
	c.want("multiplier_large", rule(1e4, 1))
}

func canalFreeboardMetres(c *claim) {
	c.want("multiplier_small", appraise.CanalFreeboard(0.5, 1))
	c.want("multiplier_large", appraise.CanalFreeboard(85, 1))
	c.want("coefficient_055", appraise.CanalFreeboard(0.5, 1)/math.Sqrt(1.5))
}

func chuteFreeboard(c *claim) {
	c.want("freeboard", appraise.ChuteFreeboard(c.given("velocity")*foot, c.given("depth")*foot)/foot)
}

// bend returns the rise that a channel on next to no slope has in the case's bend.
func (c *claim) bend(state flow.State) float64 {
	c.Helper()
	return appraise.BendRise(&flow.Channel{Gravity: c.gravity()}, &state, c.given("bend_radius"))
}

func bendRise(c *claim) {
	tranquil := flow.State{Velocity: c.given("velocity"), Geometry: section.Geometry{TopWidth: c.given("top_width")}, FroudeNumber: 0.5, Regime: flow.Subcritical}
	rise := c.bend(tranquil)
	c.want("rise_above_mean", rise)
	c.want("rise_total", 2*rise) // from the inner to the outer bank
}

func rapidBendRise(c *claim) {
	channel := &flow.Channel{Section: c.section(), Gravity: c.gravity()}
	depth := c.given("depth")
	state := channel.State(depth, c.given("velocity")*channel.Section.At(depth).Area)
	c.want("froude", state.FroudeNumber)
	c.want("rise_total", c.bend(state)) // rapid flow rises above the mean level by as much as tranquil flow across the whole width
}

// rollWave returns the Vedernikov number over the Froude number at a depth of a section.
func rollWave(c *claim, s section.Section, law friction.Law, depth float64) float64 {
	channel := flow.Channel{Section: s, Law: law, Slope: 1e-9, Gravity: c.gravity()}
	state := channel.State(depth, 2)
	return appraise.VedernikovNumber(&channel, &state) / state.FroudeNumber
}

func rollWaveLimits(c *claim) {
	const shallow = 0.001 // against the vast width the banks do not count
	chezy, err := friction.NewChezy(50)
	sound(c, chezy, err)
	for name, s := range map[string]section.Section{"wide": c.rectangle(vast), "triangular": c.triangle(1.5)} {
		c.want(name+"_chezy", 1/rollWave(c, s, chezy, shallow))
		c.want(name+"_manning", 1/rollWave(c, s, c.manning(0.02), shallow))
	}
	c.leave("there is no laminar law", "wide_laminar")
}

func rollWaves(c *claim) {
	s, depth := c.section(), c.given("depth")
	g := s.At(depth)
	c.want("shape_factor", 1-g.Radius()*g.PerimeterRate/g.TopWidth)
	c.want("vedernikov_number", rollWave(c, s, c.manning(0.02), depth)*c.given("froude"))
}

var conditions = []struct {
	name      string
	condition appraise.Condition
}{{"excellent", appraise.Excellent}, {"very_good", appraise.VeryGood}, {"good", appraise.Good}, {"fair", appraise.Fair}, {"poor", appraise.Poor}}

func grassCoefficients(c *claim) {
	heights := c.list("stem_heights")
	for _, row := range conditions {
		var coefficients []float64
		for _, height := range heights {
			coefficients = append(coefficients, appraise.GrassCoefficient(height, row.condition))
		}
		c.want(row.name, coefficients...)
	}
}

// judged returns what a lining bears and stands in a straight channel at a discharge, and the normal depth.
func judged(c *claim, s section.Section, lining appraise.Lining, slope, discharge float64) (depth float64, state appraise.LiningState) {
	c.Helper()
	law, err := lining.Roughness(s, c.gravity())
	sound(c, lining, err)
	if law == nil {
		law = c.manning(0.016)
	}
	asset := appraise.Asset{Channel: flow.Channel{Section: s, Law: law, Slope: slope, Gravity: c.gravity()}, Lining: lining}
	var room flow.Room
	depths := asset.Channel.Depths(discharge, &room)
	if len(depths.Normal) != 1 {
		c.Fatalf("normal depths %v", depths.Normal)
	}
	limits := appraise.Limits{Given: appraise.Of(appraise.LeastLiningSafety), LeastLiningSafety: 1}
	return depths.Normal[0], asset.Judge(discharge, &depths, &limits, appraise.All, nil).Lining
}

func grassLining(c *claim) {
	grass, err := appraise.NewVegetation(appraise.Grass{StemHeight: c.given("stem_height"), Condition: appraise.Good, GrowthForm: appraise.Sod,
		Soil: appraise.Soil{Group: appraise.ClayeySand, PlasticityIndex: c.given("plasticity_index"), VoidRatio: c.given("void_ratio"), GrainSize: unknown}})
	sound(c, grass, err)
	c.is("condition", "good")
	c.is("growth_form", "sod")
	c.is("soil_group", "clayey_sand")
	soil := appraise.Soil{Group: appraise.ClayeySand, PlasticityIndex: c.given("plasticity_index"), VoidRatio: c.given("void_ratio"), GrainSize: unknown}
	bare, _, _ := soil.Stands()
	depth, state := judged(c, c.section(), grass, c.given("bed_slope"), c.given("discharge"))
	c.want("depth", depth)
	c.want("roughness", state.Roughness)
	c.want("bed_shear", state.BedShear)
	c.want("permissible_soil_shear", bare)
	c.want("permissible_shear", state.PermissibleShear)
}

var soilGroups = map[string]appraise.SoilGroup{"clayey_sand": appraise.ClayeySand, "silty_sand": appraise.SiltySand, "silt": appraise.Silt, "fat_clay": appraise.FatClay,
	"lean_clay": appraise.LeanClay, "clayey_gravel": appraise.ClayeyGravel, "elastic_silt": appraise.ElasticSilt}

// groups returns what the case's soils stand at a plasticity index.
func (c *claim) groups(member string, plasticity, void float64) (shears []float64) {
	c.Helper()
	names, _ := c.c.Given[member].([]any)
	c.read[member] = true
	for _, name := range names {
		soil := appraise.Soil{Group: soilGroups[name.(string)], PlasticityIndex: plasticity, VoidRatio: void, GrainSize: unknown}
		if soil.Group == appraise.NoSoilGroup {
			c.Fatalf("%v is not known", name)
		}
		shear, _, reason := soil.Stands()
		if reason.Code != "" {
			c.Fatalf("%v: %v", name, reason)
		}
		shears = append(shears, shear)
	}
	return shears
}

func bareSoils(c *claim) {
	void := c.given("void_ratio")
	c.want("plastic", c.groups("plastic_groups", 20, void)...)
	c.want("little_plastic", c.groups("little_plastic_groups", 10, void)...)
	var loose []float64
	for _, size := range c.list("grain_sizes") {
		soil := appraise.Soil{GrainSize: size, PlasticityIndex: unknown, VoidRatio: unknown}
		shear, _, reason := soil.Stands()
		if reason.Code != "" {
			c.Fatal(reason)
		}
		loose = append(loose, shear)
	}
	c.want("loose", loose...)
}

// The two rows that the table gives each group must meet at a plasticity index of 20.
func soilRanges(c *claim) {
	groups := c.groups("groups", math.Nextafter(20, 0), 0.5)
	above := c.groups("groups", 20, 0.5)
	var ratios []float64
	for i := range groups {
		ratios = append(ratios, groups[i]/above[i])
	}
	c.want("ratio_below_to_above", ratios...)
}

func stones(c *claim) {
	var permissible []float64
	for _, size := range c.list("stone_sizes") {
		rock, err := appraise.NewRiprap(appraise.Rock{StoneSize: size, SpecificGravity: c.given("rock_weight") / (compute.WaterDensity * c.gravity()),
			AngleOfRepose: unknown, Viscosity: unknown})
		_, state := judged(c, c.trapezoid(2, 4), sound(c, rock, err), 0.0003, 10)
		permissible = append(permissible, state.PermissibleShear)
	}
	c.want("permissible_shear", permissible...)
}

func shearFactors(c *claim) {
	var sides, bends []float64
	for _, slope := range c.list("side_slopes") {
		sides = append(sides, appraise.SideFactor(slope))
	}
	for _, ratio := range c.list("radius_to_width") {
		bends = append(bends, appraise.BendFactor(ratio))
	}
	c.want("side_factor", sides...)
	c.want("bend_factor", bends...)
}

// The source solves for the stability number; at that number the safety is the one it set out from.
func stoneStability(c *claim) {
	side, repose := c.given("side_angle")*math.Pi/180, c.given("angle_of_repose")*math.Pi/180
	safety := func(number float64) float64 {
		return appraise.StoneStability(number, 1/math.Tan(side), math.Tan(repose), 0)
	}
	c.want("stability_number", c.crossing(0.01, 1, func(number float64) float64 { return safety(number) - c.given("safety_factor") }))
}
