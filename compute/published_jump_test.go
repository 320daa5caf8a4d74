package compute_test

import (
	"fmt"
	"math"
	"strings"

	"leat/compute/flow"
)

func init() {
	covers(jump, "myo-jump", "myo-jump-power", "white-jump", "subra-6-1", "usbr-em25-basin2")
	covers(jumpClasses, "jump-class-losses")
	covers(triangularJump, "tri-jump")
	covers(straub, "straub-circ")
}

func jump(c *claim) {
	channel := c.unit()
	depth := c.given("depth_upstream")
	area := channel.Section.At(depth).Area
	var discharge float64
	if _, given := c.c.Given["velocity_upstream"]; given {
		discharge = c.given("velocity_upstream") * area
	} else {
		discharge = c.given("discharge_per_width") * area / depth
	}
	other := c.sequent(channel, discharge, depth)
	before, after := channel.State(depth, discharge), channel.State(other, discharge)
	loss := before.SpecificEnergy - after.SpecificEnergy
	got := map[string]float64{
		"froude_upstream": before.FroudeNumber, "sequent_depth": other, "velocity_downstream": after.Velocity,
		"froude_downstream": after.FroudeNumber, "energy_loss": loss, "depth_ratio": other / depth,
	}
	if _, given := c.c.Given["unit_weight"]; given {
		got["power_horsepower"] = c.given("unit_weight") * discharge * loss / 550 // 1 hp = 550 ft lbf/s
	}
	for name := range c.c.Expected {
		value, computed := got[name]
		if !computed {
			c.Errorf("%s is not computed", name)
			continue
		}
		c.want(name, value)
	}
	if back := c.sequent(channel, discharge, other); !(math.Abs(back-depth) <= 1e-12*depth) {
		c.Errorf("the sequent depth of the sequent depth is %g, not %g", back, depth)
	}
}

func jumpClasses(c *claim) {
	c.aside("columns")
	channel := &flow.Channel{Section: c.rectangle(1), Gravity: c.gravity()}
	for name := range c.c.Expected {
		var froude float64
		if _, err := fmt.Sscanf(strings.ReplaceAll(name, "_", "."), "froude.%g", &froude); err != nil {
			c.Fatal(name, err)
		}
		q := froude * math.Sqrt(c.gravity())
		other := c.sequent(channel, q, 1)
		before, after := channel.State(1, q), channel.State(other, q)
		c.want(name, other, 1-after.SpecificEnergy/before.SpecificEnergy)
	}
}

func triangularJump(c *claim) {
	channel := c.channel(c.section())
	depth := c.given("depth_upstream")
	want := depth * c.given("depth_ratio")
	discharge := c.crossing(0.3, 3, func(discharge float64) float64 { return c.sequent(channel, discharge, depth) - want })
	c.want("discharge", discharge)
	c.want("froude_upstream", channel.State(depth, discharge).FroudeNumber)
	c.want("sequent_depth", c.sequent(channel, discharge, depth))
}

// straub: explicit formulas for the circle, good to a few percent, against the exact depths.
func straub(c *claim) {
	channel := c.channel(c.section())
	discharge, depth := c.given("discharge"), c.given("depth_upstream")
	const reason = "the formulas are approximations"
	critical := c.critical(channel, discharge)
	c.near("critical_depth_approximate", critical, 0.02*critical, reason)
	froude := channel.State(depth, discharge).FroudeNumber
	c.near("froude_approximate", froude, 0.05*froude, reason)
	// The last formula has a dimension. In feet it agrees with the exact depth, in metres, as the case has it, it is 8 percent off.
	const foot = 0.3048
	sequent := c.sequent(channel, discharge, depth)
	inFeet := math.Pow(critical/foot, 1.8) / math.Pow(depth/foot, 0.73) * foot
	if !(math.Abs(sequent-inFeet) <= 0.02*inFeet) {
		c.Errorf("sequent depth %g, by the formula in feet %g", sequent, inFeet)
	}
	c.leave("the formula holds in feet only, and was worked out in metres", "sequent_depth_approximate")
}
