package compute_test

import (
	"math"

	"leat/compute/flow"
	"leat/compute/friction"
	"leat/compute/section"
)

// The formulas are the same in every system of units, so each case is computed in the units of its source, with its gravity; only Manning's
// constant has to be told.

// sound returns a section or law that has to be possible.
func sound[T any](c *claim, value T, err error) T {
	c.Helper()
	if err != nil {
		c.Fatal(err)
	}
	return value
}

func (c *claim) rectangle(width float64) section.Section {
	c.Helper()
	s, err := section.NewRectangular(width)
	return sound(c, s, err)
}

func (c *claim) trapezoid(width, slope float64) section.Section {
	c.Helper()
	s, err := section.NewTrapezoidal(width, slope, slope)
	return sound(c, s, err)
}

func (c *claim) triangle(slope float64) section.Section {
	c.Helper()
	s, err := section.NewTriangular(slope, slope)
	return sound(c, s, err)
}

func (c *claim) circle(diameter float64) section.Section {
	c.Helper()
	s, err := section.NewCircular(diameter)
	return sound(c, s, err)
}

// vast is the width of a channel so wide that its banks do not matter (R = depth within 1e-8): the discharge per width times it is
// what flows.
const vast = 1e9

// section returns the section that the case gives.
func (c *claim) section() section.Section {
	c.Helper()
	shape, _ := c.c.Given["shape"].(string)
	c.read["shape"] = true
	switch shape {
	case "rectangular":
		return c.rectangle(c.given("bottom_width"))
	case "wide_rectangular":
		return c.rectangle(vast)
	case "trapezoidal":
		return c.trapezoid(c.given("bottom_width"), c.given("side_slope"))
	case "triangular":
		return c.triangle(c.given("side_slope"))
	case "circular", "circular_full":
		return c.circle(c.given("diameter"))
	}
	c.Fatalf("unknown shape %q", shape)
	return nil
}

// manning returns Manning's law with the constant of the case, K = constant/n A R^(2/3).
func (c *claim) manning(n float64) friction.Law {
	c.Helper()
	constant := c.c.Constants["manning_constant"]
	if !(constant > 0) {
		c.Fatal("the case has no Manning constant")
	}
	law, err := friction.NewManning(n / constant)
	return sound(c, law, err)
}

// channel returns the channel that the case gives, with whatever of roughness, slope and energy coefficient it has.
func (c *claim) channel(s section.Section) *flow.Channel {
	c.Helper()
	channel := &flow.Channel{Section: s, Gravity: c.gravity()}
	if _, given := c.c.Given["roughness"]; given {
		channel.Law = c.manning(c.given("roughness"))
	}
	if _, given := c.c.Given["bed_slope"]; given {
		channel.Slope = c.given("bed_slope")
	}
	if _, given := c.c.Given["energy_coefficient"]; given {
		channel.EnergyCoefficient = c.given("energy_coefficient")
	}
	return channel
}

// flat is the channel without its cosine: publications measure small slopes' depths so.
func flat(channel flow.Channel) *flow.Channel {
	channel.Slope = 0
	return &channel
}

// normal returns the lowest normal depth.
func (c *claim) normal(channel *flow.Channel, discharge float64) float64 {
	c.Helper()
	depths, absent := channel.Normal(discharge, nil)
	if len(depths) == 0 {
		c.Fatalf("no normal depth: %v", absent)
	}
	return depths[0]
}

// critical returns the lowest critical depth.
func (c *claim) critical(channel *flow.Channel, discharge float64) float64 {
	c.Helper()
	depths, absent := channel.Critical(discharge, nil)
	if len(depths) == 0 {
		c.Fatalf("no critical depth: %v", absent)
	}
	return depths[0]
}

// sequent returns the sequent depth.
func (c *claim) sequent(channel *flow.Channel, discharge, depth float64) float64 {
	c.Helper()
	other, absent := channel.Sequent(discharge, depth)
	if absent != flow.Present {
		c.Fatalf("no sequent depth: %v", absent)
	}
	return other
}

// alternate returns the alternate depth.
func (c *claim) alternate(channel *flow.Channel, discharge, depth float64) float64 {
	c.Helper()
	other, absent := channel.Alternate(discharge, depth)
	if absent != flow.Present {
		c.Fatalf("no alternate depth: %v", absent)
	}
	return other
}

// tranquil returns the subcritical depth of a specific energy.
func (c *claim) tranquil(channel *flow.Channel, discharge, energy float64) float64 {
	c.Helper()
	return c.crossing(c.critical(channel, discharge), energy, func(depth float64) float64 {
		return channel.State(depth, discharge).SpecificEnergy - energy
	})
}

// crossing returns where f changes its sign between two places, by halving: as plain as a check can be.
func (c *claim) crossing(lo, hi float64, f func(float64) float64) float64 {
	c.Helper()
	rising := f(hi) > 0
	if f(lo) > 0 == rising {
		c.Fatalf("no change of sign between %g and %g", lo, hi)
	}
	for range 200 {
		mid := lo + (hi-lo)/2
		if f(mid) > 0 == rising {
			hi = mid
		} else {
			lo = mid
		}
	}
	return lo + (hi-lo)/2
}

// greatest returns where f is greatest between two places, by golden sections (good to half the digits).
func greatest(lo, hi float64, f func(float64) float64) float64 {
	ratio := (math.Sqrt(5) - 1) / 2
	for range 100 {
		a, b := hi-ratio*(hi-lo), lo+ratio*(hi-lo)
		if f(a) < f(b) {
			lo = a
		} else {
			hi = b
		}
	}
	return (lo + hi) / 2
}
