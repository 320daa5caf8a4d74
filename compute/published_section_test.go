package compute_test

import (
	"math"

	"leat/compute/flow"
	"leat/compute/friction"
	"leat/compute/section"
)

func init() {
	covers(circularRow, "circ-table-0.05", "circ-table-0.10", "circ-table-0.15", "circ-table-0.20", "circ-table-0.25", "circ-table-0.30", "circ-table-0.40",
		"circ-table-0.50", "circ-table-0.60", "circ-table-0.70", "circ-table-0.75", "circ-table-0.80", "circ-table-0.90", "circ-table-0.95")
	covers(circularFull, "circ-full")
	covers(circularMaxima, "circ-maxima")
	covers(circularMaximumChezy, "circ-max-chezy")
	covers(eggFull, "egg-full")
	covers(eggPartial, "egg-partial-own")
	covers(horseshoeFull, "horseshoe-full")
	covers(circularByRadius, "brit-0.20", "brit-0.25", "brit-0.30", "brit-0.40", "brit-0.50", "brit-0.60", "brit-0.70", "brit-0.80", "brit-0.90", "brit-1.0")
	covers(trapezoidElements, "chow-2-1")
	covers(elementsOfTable, "table-2-1-numbers")
	covers(parabola, "parabola-approx")
	covers(bestSections, "best-sections")
}

func sectionFactors(g section.Geometry) (critical, normal float64) {
	radius := math.Cbrt(g.Radius())
	return g.Area * math.Sqrt(g.Area/g.TopWidth), g.Area * radius * radius
}

func circularRow(c *claim) {
	c.is("diameter", 1.0)
	g := c.section().At(c.given("depth_ratio"))
	critical, normal := sectionFactors(g)
	c.want("area_ratio", g.Area)
	c.want("perimeter_ratio", g.Perimeter)
	c.want("hydraulic_radius_ratio", g.Radius())
	c.want("top_width_ratio", g.TopWidth)
	if _, expected := c.c.Expected["hydraulic_depth_ratio"]; expected {
		c.want("hydraulic_depth_ratio", g.Area/g.TopWidth)
	}
	c.want("section_factor_critical", critical)
	c.want("section_factor_normal", normal)
}

func circularFull(c *claim) {
	c.is("diameter", 1.0)
	c.is("depth_ratio", 1.0)
	g := c.section().Full()
	_, normal := sectionFactors(g)
	c.want("area_ratio", g.Area)
	c.want("perimeter_ratio", g.Perimeter)
	c.want("hydraulic_radius_ratio", g.Radius())
	c.want("section_factor_normal", normal)
}

func circularMaxima(c *claim) {
	c.is("shape", "circular")
	c.is("roughness_constant_with_depth", true)
	channel := &flow.Channel{Section: c.circle(1), Law: c.manning(0.013), Slope: 0.01, Gravity: c.gravity()}
	capacity, _ := channel.Capacity()
	full := channel.FullDischarge()
	fullState := channel.State(1, full)
	velocity := func(depth float64) float64 {
		return channel.State(depth, 0).UniformDischarge / channel.Section.At(depth).Area
	}
	fastest := greatest(0.5, 0.999, velocity)
	c.agreement = 1e-7 // golden sections know the place of a maximum to half the digits
	c.want("depth_ratio_max_velocity", fastest)
	c.agreement = 1e-10
	c.want("depth_ratio_max_discharge", capacity.Depth)
	c.want("discharge_ratio_max", capacity.Discharge/full)
	c.want("velocity_ratio_max", velocity(fastest)/fullState.Velocity)
	c.want("depth_ratio_discharge_equals_full", c.normal(channel, full))
}

func circularMaximumChezy(c *claim) {
	c.is("shape", "circular")
	c.is("friction", "chezy")
	law, err := friction.NewChezy(60)
	channel := &flow.Channel{Section: c.circle(1), Law: sound(c, law, err), Slope: 0.01, Gravity: c.gravity()}
	capacity, _ := channel.Capacity()
	c.want("depth_ratio_max_discharge", capacity.Depth)
}

func eggFull(c *claim) {
	c.is("shape", "egg_3_2")
	c.is("crown_radius", "H/3")
	c.is("invert_radius", "H/6")
	c.is("side_radius", "H")
	s, err := section.NewEgg(1, false)
	g := sound(c, s, err).Full()
	width := 1 / c.given("height_over_width")
	c.want("area_over_height_squared", g.Area)
	c.want("perimeter_over_height", g.Perimeter)
	c.want("hydraulic_radius_over_height", g.Radius())
	c.want("area_over_width_squared", g.Area/width/width)
	c.want("perimeter_over_width", g.Perimeter/width)
	c.want("hydraulic_radius_over_width", g.Radius()/width)
}

func eggPartial(c *claim) {
	c.is("shape", "egg_3_2")
	c.aside("columns")
	s, err := section.NewEgg(c.given("height"), false)
	egg := sound(c, s, err)
	ratios := c.list("depth_ratios")
	for i, name := range []string{"at_0_25", "at_0_5", "at_0_75"} {
		g := egg.At(ratios[i])
		c.want(name, g.Area, g.Perimeter, g.Radius(), g.TopWidth)
	}
	channel := &flow.Channel{Section: egg, Law: c.manning(0.013), Slope: 0.01, Gravity: c.gravity()}
	capacity, _ := channel.Capacity()
	c.want("depth_ratio_max_discharge", capacity.Depth)
	c.want("discharge_ratio_max", capacity.Discharge/channel.FullDischarge())
}

func horseshoeFull(c *claim) {
	c.is("shape", "horseshoe_standard")
	s, err := section.NewHorseshoe(c.given("diameter"))
	g, half := sound(c, s, err).Full(), s.At(0.5)
	c.want("area_over_diameter_squared", g.Area)
	c.want("perimeter_over_diameter", g.Perimeter)
	c.want("hydraulic_radius_over_diameter", g.Radius())
	c.want("half_depth_area", half.Area)
}

func circularByRadius(c *claim) {
	c.is("shape", "circular")
	radius := c.given("radius")
	g := c.circle(2 * radius).At(c.given("depth_over_radius") * radius)
	c.want("hydraulic_radius_over_radius", g.Radius()/radius)
	c.want("area_over_radius_squared", g.Area/radius/radius)
}

func trapezoidElements(c *claim) {
	g := c.section().At(c.given("depth"))
	critical, _ := sectionFactors(g)
	c.want("area", g.Area)
	c.want("wetted_perimeter", g.Perimeter)
	c.want("hydraulic_radius", g.Radius())
	c.want("top_width", g.TopWidth)
	c.want("hydraulic_depth", g.Area/g.TopWidth)
	c.want("section_factor_critical", critical)
}

func elementsOfTable(c *claim) {
	c.aside("columns")
	depth := c.given("depth")
	unequal, err := section.NewTrapezoidal(c.part("trapezoidal_unequal_sides", "bottom_width"),
		c.part("trapezoidal_unequal_sides", "left_side_slope"), c.part("trapezoidal_unequal_sides", "right_side_slope"))
	sound(c, unequal, err)
	parabolic, err := section.NewParabolic(c.part("parabolic", "top_width"), depth)
	sound(c, parabolic, err)
	for name, s := range map[string]section.Section{
		"rectangular":               c.rectangle(c.part("rectangular", "bottom_width")),
		"triangular":                c.triangle(c.part("triangular", "side_slope")),
		"trapezoidal":               c.trapezoid(c.part("trapezoidal", "bottom_width"), c.part("trapezoidal", "side_slope")),
		"trapezoidal_unequal_sides": unequal,
		"parabolic_exact_perimeter": parabolic,
	} {
		g := s.At(depth)
		critical, _ := sectionFactors(g)
		c.want(name, g.Area, g.Perimeter, g.TopWidth, g.Radius(), g.Area/g.TopWidth, critical, g.Moment/g.Area)
	}
}

func parabola(c *claim) {
	c.is("shape", "parabolic")
	depth := c.given("depth")
	s, err := section.NewParabolic(c.given("top_width"), depth)
	g := sound(c, s, err).At(depth)
	critical, _ := sectionFactors(g)
	c.want("exact_perimeter", g.Perimeter)
	c.want("section_factor_critical", critical)
	// The note says by how much: 0.77 percent at this depth.
	c.near("approximate_perimeter", g.Perimeter, 0.0078*g.Perimeter, "the short formula is an approximation")
	c.near("hydraulic_radius_approximate", g.Radius(), 0.0078*g.Radius(), "the short formula is an approximation")
}

// bestSections looks for the least perimeter with the derivatives that the sections give. With bottom width b at a fixed depth,
// dA/db = depth and dP/db = 1, so P^2/A is least where 2A = P*depth.
func bestSections(c *claim) {
	c.is("criterion", "least perimeter for given area")
	best := func(slope float64) (width float64, g section.Geometry) {
		width = c.crossing(1e-3, 10, func(b float64) float64 {
			g := c.trapezoid(b, slope).At(1)
			return 2*g.Area - g.Perimeter
		})
		return width, c.trapezoid(width, slope).At(1)
	}
	width, g := best(0)
	c.want("rectangle_width_over_depth", width)
	c.want("rectangle_hydraulic_radius_over_depth", g.Radius())
	slope := greatest(0, 3, func(slope float64) float64 {
		_, g := best(slope)
		return g.Area / (g.Perimeter * g.Perimeter)
	})
	width, g = best(slope)
	c.agreement = 1e-6 // of a golden section
	c.want("trapezoid_side_slope", slope)
	c.want("trapezoid_bottom_width_over_depth", width)
	c.want("trapezoid_area_over_depth_squared", g.Area)
}
