package compute_test

import (
	"math"

	"leat/compute/flow"
	"leat/compute/section"
)

func init() {
	covers(circularByRadius, "brit-0.15", "brit-0.35", "brit-0.45", "brit-0.55", "brit-0.65", "brit-0.75", "brit-0.85", "brit-0.95")
	covers(criticalDepth, "leeds-e2-1", "chow-4-2", "chaudhry-critical")
	covers(largestStep, "leeds-e2-2")
	covers(uniformFlow, "ponce-2007-2-1", "ponce-2008-2-1", "ponce-2008-1-4", "myo-10-3")
	covers(jumpByFroude, "ponce-2004-2-2", "ponce-2005-2-2")
	covers(criticalUnit, "ponce-2008-2-2", "ponce-2015-2-1", "sydney-11-2", "white-earth")
	covers(normalDepth, "ottawa-5-1-1", "ottawa-5-1-2", "apsley-q1a", "apsley-q1b", "apsley-1-2a", "chaudhry-normal")
	covers(criticalSlope, "apsley-q1cd", "white-vee")
	covers(slopeForVelocity, "rock-canal")
	covers(hydraulicElements, "camp-elements")
	covers(dischargeFactors, "brater-king-7-14")
	covers(eggThirds, "egg-thirds")
	covers(darcyChannel, "white-10-1")
	covers(moody, "myo-8-5", "moody-4e3-0", "moody-1e7-0", "moody-1e8-0", "moody-1e9-0.0001", "moody-1e9-0.0002", "moody-1e8-0.02", "moody-1e8-0.03")
	covers(circleAngles, "circle-angles")
	covers(bestElements, "best-triangle", "best-semicircle")
}

// wants asserts those of the computed values that the case expects.
func (c *claim) wants(got map[string]float64) {
	c.Helper()
	for name := range c.c.Expected {
		if value, computed := got[name]; computed {
			c.want(name, value)
		}
	}
}

func largestStep(c *claim) {
	channel := c.channel(c.section())
	discharge := c.given("discharge")
	depth := c.normal(channel, discharge)
	level := flat(*channel)
	least := level.State(c.critical(level, discharge), discharge).SpecificEnergy
	c.want("normal_depth", depth)
	c.want("largest_step_without_choking", level.State(depth, discharge).SpecificEnergy-least)
}

func uniformFlow(c *claim) {
	channel := c.channel(c.section())
	state := channel.State(c.given("depth"), 0)
	c.want("hydraulic_radius", state.Radius)
	c.want("velocity", state.UniformDischarge/state.Geometry.Area)
	c.want("discharge", state.UniformDischarge)
}

func jumpByFroude(c *claim) {
	channel := c.unit()
	q, froude := c.given("discharge_per_width"), c.given("froude_upstream")
	depth := c.crossing(1e-3, 10, func(depth float64) float64 { return channel.State(depth, q).FroudeNumber - froude })
	c.want("depth_upstream", depth)
	c.want("sequent_depth", c.sequent(channel, q, depth))
}

func criticalUnit(c *claim) {
	channel := c.unit()
	q := c.given("discharge_per_width")
	depth := c.critical(channel, q)
	c.wants(map[string]float64{"critical_depth": depth, "critical_velocity": channel.State(depth, q).Velocity})
}

func criticalSlope(c *claim) {
	channel := c.channel(c.section())
	discharge := c.given("discharge")
	depth := c.critical(channel, discharge)
	slope, known := channel.CriticalSlope(discharge)
	if !known {
		c.Fatal("no critical slope")
	}
	c.wants(map[string]float64{"critical_depth": depth, "critical_velocity": channel.State(depth, discharge).Velocity, "critical_slope": slope})
}

func slopeForVelocity(c *claim) {
	channel := c.channel(c.section())
	discharge := c.given("discharge")
	velocity := c.given("velocity")
	depth := c.crossing(0.01, 10, func(depth float64) float64 { return velocity - channel.State(depth, discharge).Velocity })
	c.want("bed_slope", channel.State(depth, discharge).FrictionSlope)
}

func hydraulicElements(c *claim) {
	c.is("shape", "circular")
	channel := &flow.Channel{Section: c.circle(1), Law: c.manning(0.013), Slope: 0.01, Gravity: c.gravity()}
	full := channel.FullDischarge()
	area := channel.Section.Full().Area
	var velocities, discharges []float64
	for _, ratio := range c.list("depth_ratios") {
		state := channel.State(ratio, 0)
		discharges = append(discharges, state.UniformDischarge/full)
		velocities = append(velocities, state.UniformDischarge/state.Geometry.Area/(full/area))
	}
	c.want("discharge_ratio", discharges...)
	c.want("velocity_ratio", velocities...)
}

func dischargeFactors(c *claim) {
	c.is("shape", "circular")
	channel := &flow.Channel{Section: c.circle(1), Law: c.manning(1), Slope: 0.01, Gravity: c.gravity()}
	var factors []float64
	for _, ratio := range c.list("depth_ratios") {
		factors = append(factors, channel.State(ratio, 0).Conveyance)
	}
	c.want("discharge_factor", factors...)
}

func eggThirds(c *claim) {
	c.is("shape", "egg_3_2")
	height := c.given("height_over_width")
	s, err := section.NewEgg(height, false)
	egg := sound(c, s, err)
	var areas, perimeters, radii []float64
	for _, g := range []section.Geometry{egg.At(height / 3), egg.At(2 * height / 3), egg.Full()} {
		areas, perimeters, radii = append(areas, g.Area), append(perimeters, g.Perimeter), append(radii, g.Radius())
	}
	c.want("area", areas...)
	c.want("perimeter", perimeters...)
	c.want("hydraulic_radius", radii...)
}

// darcyChannel: C = sqrt(8 g/f).
func darcyChannel(c *claim) {
	coefficient := math.Sqrt(8 * c.gravity() / c.given("friction_factor"))
	channel := c.channel(c.section())
	channel.Law = c.chezy(coefficient)
	c.want("chezy_c", coefficient)
	c.want("discharge", channel.State(c.given("depth"), 0).UniformDischarge)
}

func circleAngles(c *claim) {
	c.is("shape", "circular")
	pipe := c.circle(1)
	angle := func(depth float64) float64 { return 2 * math.Acos(1-2*depth) * 180 / math.Pi }
	fastest := greatest(0.5, 0.999, func(depth float64) float64 { return pipe.At(depth).Radius() })
	c.want("angle_max_velocity", angle(fastest))
	c.want("hydraulic_radius_ratio_max", pipe.At(fastest).Radius())
	channel := &flow.Channel{Section: pipe, Law: c.manning(0.013), Slope: 0.01, Gravity: c.gravity()}
	byManning, _ := channel.Capacity()
	c.want("angle_max_discharge_manning", angle(byManning.Depth))
	channel.Law = c.chezy(60)
	byChezy, _ := channel.Capacity()
	c.want("angle_max_discharge_chezy", angle(byChezy.Depth))
}

func bestElements(c *claim) {
	var s section.Section
	if c.c.Given["shape"] == "u_shaped" {
		c.is("shape", "u_shaped")
		u, err := section.NewUShaped(2)
		s = sound(c, u, err)
	} else {
		s = c.section()
	}
	g := s.At(1)
	critical, _ := sectionFactors(g)
	elements := []float64{g.Area, g.Perimeter, g.Radius(), g.TopWidth, g.Area / g.TopWidth, critical}
	c.want("elements", elements[:len(c.numbers(c.c.Expected["elements"]))]...)
}
