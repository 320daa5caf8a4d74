package compute_test

import (
	"math"

	"leat/compute/friction"
	"leat/compute/section"
)

func init() {
	covers(colebrookPipe, "colebrook-0.150-0.01-0.6", "colebrook-0.225-0.01-0.6", "colebrook-0.300-0.01-0.6", "colebrook-0.150-0.01-1.5")
	covers(moody, "moody-1e5-0", "moody-1e4-0", "moody-1e6-0", "moody-1e5-0.001", "moody-1e8-0.001", "moody-1e8-0.01", "moody-1e8-0.05", "moody-1e8-0.002")
	covers(colebrookChannel, "colebrook-open-channel")
	covers(bedAndSides, "subra-3-composite-b")
	covers(lotter, "lotter")
	covers(threePanels, "alpha-three-panels")
	covers(kutter, "chow-5-1-kutter")
	belongs("tabulated practice; nothing computes it", "alpha-ranges")
}

func (c *claim) sand(height float64) friction.Law {
	law, err := friction.NewSandRoughness(height, c.given("kinematic_viscosity"), c.gravity())
	return sound(c, law, err)
}

func colebrookPipe(c *claim) {
	g := c.section().Full()
	slope := c.given("hydraulic_gradient")
	discharge := c.sand(c.given("roughness_height")).AtSlope(g, slope).K * math.Sqrt(slope)
	c.want("velocity", discharge/g.Area)
	c.want("discharge_litres_per_second", 1000*discharge)
}

func moody(c *claim) {
	reynolds, relative := c.given("reynolds"), c.given("relative_roughness")
	f, exists := friction.DarcyFactor(reynolds, relative)
	if !exists {
		c.Fatal("no friction factor")
	}
	c.want("darcy_friction_factor", f)
	if relative == 0 {
		return
	}
	// The law of a channel says the same: f = 8 g R Sf/V^2 with Sf = (Q/K)^2, in a pipe of diameter 1.
	const viscosity = 1e-6
	g := c.circle(1).Full()
	law, err := friction.NewSandRoughness(relative, viscosity, c.gravity())
	discharge := reynolds * viscosity * g.Area
	ratio := g.Area / sound(c, law, err).AtDischarge(g, discharge).K
	c.want("darcy_friction_factor", 8*c.gravity()*g.Radius()*ratio*ratio)
}

func colebrookChannel(c *claim) {
	g := c.section().At(c.given("depth"))
	slope := c.given("bed_slope")
	k := c.sand(c.given("roughness_height")).AtSlope(g, slope).K
	c.want("discharge", k*math.Sqrt(slope))
	c.want("velocity", k*math.Sqrt(slope)/g.Area)
	c.want("equivalent_roughness", equivalent(g, k))
}

// equivalent returns the Manning coefficient that gives a section a conveyance (SI).
func equivalent(g section.Geometry, k float64) float64 {
	root := math.Cbrt(g.Radius())
	return g.Area * root * root / k
}

func bedAndSides(c *claim) {
	s := c.section()
	g := s.At(c.given("depth"))
	for _, how := range []friction.Combination{friction.HortonEinstein, friction.Pavlovskii} {
		law, err := friction.NewBedAndSides(s.(section.Bedded), c.given("bed_roughness"), c.given("side_roughness"), how)
		c.want(how.String(), equivalent(g, sound(c, law, err).AtSlope(g, 0.001).K))
	}
}

// dividedTrapezoid is a trapezoid as a surveyed section with zones parted at the toes of its sides.
func (c *claim) dividedTrapezoid(width, slope, top, bed, sides float64, how friction.Combination) (section.Section, friction.Law) {
	s, err := section.NewSurveyed([][2]float64{{-width/2 - slope*top, top}, {-width / 2, 0}, {width / 2, 0}, {width/2 + slope*top, top}})
	zoned := sound(c, s, err).(section.Zoned)
	law, err := friction.NewZones(zoned, []float64{-width / 2, width / 2}, []float64{sides, bed, sides}, how)
	return zoned, sound(c, law, err)
}

func lotter(c *claim) {
	c.is("shape", "trapezoidal")
	s, law := c.dividedTrapezoid(c.given("bottom_width"), c.given("side_slope"), 2, c.given("bed_roughness"), c.given("side_roughness"), friction.Lotter)
	g := s.At(c.given("depth"))
	c.want("lotter", equivalent(g, law.AtSlope(g, 0.001).K))
	c.leave("weighting by area is no rule of combination here", "area_weighted")
}

// panel is a part of a section of which only area and velocity are told: its perimeter is its area, so that R is 1.
type panel float64

func (p panel) At(depth float64) section.Geometry {
	return section.Geometry{Depth: depth, Area: float64(p), Perimeter: float64(p), TopWidth: float64(p) / depth}
}
func (p panel) Full() section.Geometry { return section.Geometry{} }
func (p panel) Height() float64        { return math.Inf(1) }
func (p panel) Closed() bool           { return false }
func (p panel) Bank() (float64, bool)  { return 0, false }
func (p panel) Breaks() []float64      { return nil }
func (p panel) Form() section.Form     { return section.Irregular }

// panels stand side by side.
type panels struct {
	panel
	parts []section.Section
}

func (p panels) Part([]float64) ([]section.Section, error) { return p.parts, nil }

func threePanels(c *claim) {
	var whole panels
	var n []float64
	velocities := c.list("panel_velocities")
	for i, area := range c.list("panel_areas") {
		whole.panel += panel(area)
		whole.parts = append(whole.parts, panel(area))
		n = append(n, 1/velocities[i])
	}
	law, err := friction.NewZones(whole, make([]float64, len(n)-1), n, friction.Divided)
	g := whole.At(1)
	k, coefficients := sound(c, law, err).AtSlope(g, 0.5), law.Coefficients(g)
	c.want("mean_velocity", k.K/g.Area)
	c.want("energy_coefficient", coefficients.Energy)
	c.want("momentum_coefficient", coefficients.Momentum)
}

// kutter: the formula of Ganguillet and Kutter (1869), in feet, gives a Chezy coefficient; what follows from that is checked.
func kutter(c *claim) {
	c.is("friction", "ganguillet_kutter")
	g := c.section().At(c.given("depth"))
	n, slope := c.given("roughness"), c.given("bed_slope")
	coefficient := (41.65 + 0.00281/slope + 1.811/n) / (1 + (41.65+0.00281/slope)*n/math.Sqrt(g.Radius()))
	law, err := friction.NewChezy(coefficient)
	discharge := sound(c, law, err).AtSlope(g, slope).K * math.Sqrt(slope)
	c.want("chezy_c", coefficient)
	c.want("velocity", discharge/g.Area)
	c.want("discharge", discharge)
}
