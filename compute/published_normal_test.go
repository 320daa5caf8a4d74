package compute_test

import (
	"math"

	"leat/compute/flow"
)

func init() {
	covers(normalDepth, "chow-6-2", "subra-3-sewer", "myo-10-4", "apsley-1-2b", "bengtson-rect", "hds3-ex1")
	covers(normalWide, "cruise-15-1-yn")
	covers(widthForDepth, "subra-3-bottom-width")
	covers(halfHexagon, "subra-3-most-efficient")
	covers(bestRectangle, "white-best-rect")
	covers(slopeForDepth, "hwang-6-1")
	covers(diameterFull, "hec22-7-1-conc-si", "hec22-7-1-cmp-si")
	covers(velocityFull, "hec22-7-1-v")
	covers(widthForVelocity, "chow-7-1-velocity")
	covers(cosine, "cos-correction")
}

func normalDepth(c *claim) {
	channel := c.channel(c.section())
	discharge := c.given("discharge")
	depth := c.normal(channel, discharge)
	state := channel.State(depth, discharge)
	c.want("normal_depth", depth)
	if _, expected := c.c.Expected["area"]; expected {
		c.want("area", state.Geometry.Area)
	}
	if _, expected := c.c.Expected["velocity"]; expected {
		c.want("velocity", state.Velocity)
	}
	if _, expected := c.c.Expected["froude"]; expected {
		c.want("froude", flat(*channel).State(depth, discharge).FroudeNumber)
	}
	if froude, isNumber := c.c.Independent["froude"].(float64); isNumber {
		// The independent value leaves out the cosine.
		if got := flat(*channel).State(depth, discharge).FroudeNumber; !(math.Abs(got-froude) <= 1e-9*froude) {
			c.Errorf("Froude number %.12g, independently %.12g", got, froude)
		}
	}
	if got := state.UniformDischarge; !(math.Abs(got-discharge) <= 1e-12*discharge) {
		c.Errorf("the normal depth carries %g, not %g", got, discharge)
	}
}

func normalWide(c *claim) {
	c.agreement = 1e-7 // the width is finite
	channel := c.channel(c.section())
	c.want("normal_depth", c.normal(channel, c.given("discharge")*vast))
}

func widthForDepth(c *claim) {
	c.is("shape", "trapezoidal")
	slope, discharge, depth := c.given("side_slope"), c.given("discharge"), c.given("normal_depth")
	c.want("bottom_width", c.crossing(1, 100, func(width float64) float64 {
		return c.normal(c.channel(c.trapezoid(width, slope)), discharge) - depth
	}))
}

func halfHexagon(c *claim) {
	c.is("criterion", "half hexagon")
	discharge := c.given("discharge")
	depth := func(width float64) float64 {
		return c.normal(c.channel(c.trapezoid(width, 1/math.Sqrt(3))), discharge)
	}
	width := c.crossing(1, 10, func(width float64) float64 { return width - 2/math.Sqrt(3)*depth(width) })
	c.want("bottom_width", width)
	c.want("normal_depth", depth(width))
}

func bestRectangle(c *claim) {
	c.is("criterion", "best rectangle")
	discharge := c.given("discharge")
	depth := func(width float64) float64 { return c.normal(c.channel(c.rectangle(width)), discharge) }
	width := c.crossing(0.5, 10, func(width float64) float64 { return width - 2*depth(width) })
	c.want("bottom_width", width)
	c.want("normal_depth", depth(width))
}

func slopeForDepth(c *claim) {
	channel := c.channel(c.section())
	state := channel.State(c.given("normal_depth"), c.given("discharge"))
	c.want("bed_slope", state.FrictionSlope)
	channel.Slope = state.FrictionSlope
	if got, want := c.normal(channel, c.given("discharge")), c.given("normal_depth"); !(math.Abs(got-want) <= 1e-13*want) {
		c.Errorf("on that slope the normal depth is %g, not %g", got, want)
	}
}

func diameterFull(c *claim) {
	c.is("shape", "circular_full")
	c.agreement = 1e-3 // the publication rounds the coefficient of full flow to 0.312
	discharge := c.given("discharge")
	c.want("diameter", c.crossing(0.1, 3, func(diameter float64) float64 {
		return c.channel(c.circle(diameter)).FullDischarge() - discharge
	}))
}

func velocityFull(c *claim) {
	c.agreement = 1e-3 // the publication rounds the coefficient of full flow to 0.397
	channel := c.channel(c.section())
	c.want("velocity", channel.FullDischarge()/channel.Section.Full().Area)
}

func widthForVelocity(c *claim) {
	discharge, side, velocity := c.given("discharge"), c.given("side_slope"), c.given("permissible_velocity")
	at := func(width float64) flow.State {
		channel := c.channel(c.trapezoid(width, side))
		return channel.State(c.normal(channel, discharge), discharge)
	}
	// Wider than the best hydraulic section, the velocity falls with the width.
	width := c.crossing(5, 100, func(width float64) float64 { return velocity - at(width).Velocity })
	state := at(width)
	c.want("bottom_width", width)
	c.want("depth", state.Geometry.Depth)
	c.want("area", state.Geometry.Area)
	c.want("wetted_perimeter", state.Geometry.Perimeter)
	c.want("hydraulic_radius", state.Radius)
}

func bresseNormal(c *claim) {
	c.is("friction", "chezy")
	c.agreement = 1e-7 // the width is finite
	channel := c.channel(c.section())
	channel.Law = c.chezy(c.given("chezy_c"))
	discharge := c.given("discharge_per_width") * vast
	c.want("normal_depth", c.normal(channel, discharge))
	c.agreement = 1e-10
	c.want("critical_depth", c.critical(flat(*channel), discharge))
}

func cosine(c *claim) {
	tangent := c.given("bed_slope_tangent")
	channel := flow.Channel{Section: c.rectangle(1), Slope: tangent / math.Sqrt(1+tangent*tangent), Gravity: 9.80665}
	c.want("cos_squared", channel.Cosine()*channel.Cosine())
}
