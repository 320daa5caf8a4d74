package compute_test

import (
	"math"

	"leat/compute/flow"
	"leat/compute/friction"
	"leat/compute/section"
)

func init() {
	covers(criticalDepth, "chow-4-3-circ", "chow-10-1-yc", "subra-2-rect", "subra-2-tri", "subra-2-circ", "own-trap-2-15")
	covers(criticalWide, "cruise-15-1-yc")
	covers(swameeCritical, "swamee-critical-circle")
	covers(threeCritical, "compound-three-critical")
	covers(then(ramp, rampRun), "myo-10-2-ramp")
	covers(then(bump, bumpRun), "white-bump")
	covers(then(lowHump, lowHumpRun), "subra-2-hump-low")
	covers(then(chokedHump, chokedHumpRun), "subra-2-hump-choked")
	covers(then(contraction, contractionRun), "subra-2-contraction-a")
	covers(then(broadCrest, crestRun), "bcw-si", "bcw-us")
	covers(brink, "rouse-brink-number")
	covers(then(sluice, gateRun), "sluice-061")
}

func (c *claim) chezy(coefficient float64) friction.Law {
	law, err := friction.NewChezy(coefficient)
	return sound(c, law, err)
}

func criticalDepth(c *claim) {
	channel := c.channel(c.section())
	discharge := c.given("discharge")
	depth := c.critical(channel, discharge)
	state := channel.State(depth, discharge)
	c.want("critical_depth", depth)
	if _, expected := c.c.Expected["specific_energy"]; expected {
		c.want("specific_energy", state.SpecificEnergy)
	}
	if !(math.Abs(state.FroudeNumber-1) <= 1e-13) {
		c.Errorf("Froude number %.17g at critical depth", state.FroudeNumber)
	}
	for name, got := range map[string]float64{"velocity": state.Velocity, "area": state.Geometry.Area, "specific_energy": state.SpecificEnergy} {
		if want, isNumber := c.c.Independent[name].(float64); isNumber && !(math.Abs(got-want) <= 1e-10*want) {
			c.Errorf("%s = %.12g, independently %.12g", name, got, want)
		}
	}
}

func criticalWide(c *claim) {
	channel := c.channel(c.section())
	c.want("critical_depth", c.critical(channel, c.given("discharge")*vast))
}

// swameeCritical holds the exact critical depth against an approximation: at the discharge for which the formula gives a depth ratio,
// the computed ratio must be the same within what the formula is good for.
func swameeCritical(c *claim) {
	c.is("shape", "circular")
	c.is("formula", "yc/D = (0.77 F^-6 + 1)^(-1/12), F = Q/(D^2 sqrt(g D))")
	channel := &flow.Channel{Section: c.circle(1), Gravity: c.gravity()}
	var ratios []float64
	for _, ratio := range c.list("exact_depth_ratios") {
		parameter := math.Pow(0.77/(math.Pow(ratio, -12)-1), 1./6)
		ratios = append(ratios, c.critical(channel, parameter*math.Sqrt(c.gravity())))
	}
	c.agreement = math.Inf(1) // the independent list holds the formula's own values
	c.want("pairs", ratios...)
}

func threeCritical(c *claim) {
	c.is("shape", "compound")
	c.is("walls", "vertical")
	c.is("division", "vertical, interface not wetted")
	c.aside("formula")
	width, bench, plain := c.given("main_bottom_width"), c.given("bankfull_depth"), c.given("floodplain_width_each_side")
	s, err := section.NewTwoStage(section.TwoStage{BottomWidth: width, BenchHeight: bench, LeftBenchWidth: plain, RightBenchWidth: plain})
	zoned := sound(c, s, err).(section.Zoned)
	outer, inner := c.given("floodplain_roughness"), c.given("main_roughness")
	law, err := friction.NewZones(zoned, []float64{-width / 2, width / 2}, []float64{outer, inner, outer}, friction.Divided)
	channel := &flow.Channel{Section: zoned, Law: sound(c, law, err), Gravity: c.gravity()}
	discharge := c.given("discharge")
	minima, _ := channel.Critical(discharge, nil)
	if len(minima) != 2 {
		c.Fatalf("critical depths %v: the energy has two minima", minima)
	}
	energy := func(depth float64) float64 { return channel.State(depth, discharge).SpecificEnergy }
	// The middle root of F = 1 is a maximum of the energy and so no critical depth; it is found here by looking for it.
	maximum := greatest(bench*(1+1e-9), minima[1], energy)
	c.agreement = 1e-7 // of a golden section
	c.want("critical_depths", minima[0], maximum, minima[1])
	c.want("energies", energy(minima[0]), energy(maximum), energy(minima[1]))
}

// unit is a rectangular channel of width 1 or of the given width, without friction.
func (c *claim) unit() *flow.Channel {
	width := 1.0
	if shape := c.c.Given["shape"]; shape != "rectangular" && shape != "wide_rectangular" {
		c.Fatalf("shape %v", shape)
	}
	c.aside("shape")
	if _, given := c.c.Given["bottom_width"]; given {
		width = c.given("bottom_width")
	}
	return &flow.Channel{Section: c.rectangle(width), Gravity: c.gravity()}
}

func ramp(c *claim) {
	channel := c.unit()
	q, step := c.given("discharge_per_width"), c.given("step_height")
	energy := channel.State(c.given("depth_upstream"), q).SpecificEnergy
	depth := c.tranquil(channel, q, energy-step)
	c.want("specific_energy_upstream", energy)
	c.want("depth_on_step", depth)
	c.want("water_level_on_step", depth+step)
	c.want("supercritical_alternate", c.alternate(channel, q, depth))
}

func bump(c *claim) {
	channel := c.unit()
	depth := c.given("depth_upstream")
	q := c.given("velocity_upstream") * depth
	energy := channel.State(depth, q).SpecificEnergy
	on := c.tranquil(channel, q, energy-c.given("step_height"))
	c.want("depth_on_step", on)
	c.want("velocity_on_step", channel.State(on, q).Velocity)
	c.want("largest_step_without_choking", energy-channel.State(c.critical(channel, q), q).SpecificEnergy)
}

func lowHump(c *claim) {
	channel := c.unit()
	discharge := c.given("discharge")
	state := channel.State(c.given("depth_upstream"), discharge)
	c.want("specific_energy_upstream", state.SpecificEnergy)
	c.want("froude_upstream", state.FroudeNumber)
	c.want("critical_depth", c.critical(channel, discharge))
	c.want("depth_on_step", c.tranquil(channel, discharge, state.SpecificEnergy-c.given("step_height")))
}

func chokedHump(c *claim) {
	channel := c.unit()
	discharge, step := c.given("discharge"), c.given("step_height")
	critical := c.critical(channel, discharge)
	least := channel.State(critical, discharge).SpecificEnergy
	if available := channel.State(c.given("depth_upstream"), discharge).SpecificEnergy - step; !(available < least) {
		c.Errorf("energy %g on the step is enough", available)
	}
	c.want("depth_on_step", critical)
	c.want("specific_energy_upstream_new", least+step)
	c.want("depth_upstream_new", c.tranquil(channel, discharge, least+step))
}

func contraction(c *claim) {
	channel := c.unit()
	discharge := c.given("discharge")
	energy := channel.State(c.given("depth_upstream"), discharge).SpecificEnergy
	least := func(width float64) (depth, energy float64) {
		throat := &flow.Channel{Section: c.rectangle(width), Gravity: c.gravity()}
		depth = c.critical(throat, discharge)
		return depth, throat.State(depth, discharge).SpecificEnergy
	}
	c.want("specific_energy_upstream", energy)
	c.want("least_width_without_choking", c.crossing(0.5, 3.5, func(width float64) float64 {
		_, need := least(width)
		return energy - need
	}))
	depth, need := least(c.given("throat_width"))
	c.want("depth_in_throat", depth)
	c.want("depth_upstream_new", c.tranquil(channel, discharge, need))
}

// broadCrest: the discharge per width whose least energy is 1 is the coefficient of the ideal broad-crested weir.
func broadCrest(c *claim) {
	channel := &flow.Channel{Section: c.rectangle(1), Gravity: c.gravity()}
	c.want("coefficient", c.crossing(0.1, 10, func(q float64) float64 {
		return channel.State(c.critical(channel, q), q).SpecificEnergy - 1
	}))
}

func brink(c *claim) {
	c.want("critical_depth", c.critical(c.unit(), c.given("discharge_per_width")))
	c.leave("an overfall is taken at critical depth; the measured brink is a ratio of it", "brink_depth")
}

// sluice: the jet below a gate is the alternate depth of the pool above.
func sluice(c *claim) {
	channel := &flow.Channel{Section: c.rectangle(1), Gravity: c.gravity()}
	depth, opening := c.given("depth_upstream"), c.given("gate_opening")
	jet := opening * c.given("contraction_coefficient")
	q := c.crossing(0.1, 5, func(q float64) float64 { return c.alternate(channel, q, depth) - jet })
	c.want("discharge_per_width", q)
	c.want("depth_at_contraction", c.alternate(channel, q, depth))
	c.want("energy_check", channel.State(jet, q).SpecificEnergy/channel.State(depth, q).SpecificEnergy)
	c.want("discharge_coefficient", q/(opening*math.Sqrt(2*c.gravity()*depth)))
}
