package flow

import (
	"math"

	"leat/compute/friction"
	"leat/compute/section"
)

// quantity says what a curve shows over depth.
type quantity uint8

const (
	uniformConveyance quantity = iota // the conveyance at the channel's slope: what flows uniformly
	specificEnergy                    // E at a discharge
	specificForce                     // M at a discharge
)

// turning says what is known of the sign changes of a curve's rate on one smooth piece.
type turning uint8

const (
	searched turning = iota // nothing: sample
	parted                  // the rate is monotone between the depths that parts gives
	once                    // the rate changes its sign at most once
	never                   // the rate keeps its sign
)

// A curve is a quantity over depth, as the search for its branches sees it. Energy and force fall from the bed, conveyance rises from it;
// without end all rise.
type curve struct {
	motion  Motion
	of      quantity
	turning turning
	a, b    float64 // for a power law the conveyance is proportional to A^a/P^b to a constant power; else 0
	margin  float64 // the greatest negative rate that was met at an end of a stretch
}

// uniform returns the curve of conveyance at the channel's slope.
func (c *Channel) uniform() curve {
	f := curve{motion: Motion{channel: c}, of: uniformConveyance}
	form, law := c.Section.Form(), c.Law.Form()
	switch law {
	case friction.Manning:
		f.a, f.b = 5, 2
	case friction.Chezy:
		f.a, f.b = 3, 1
	}
	switch {
	case form == section.Rising && law != friction.General:
		f.turning = never
	case form == section.Arched && f.a > 0:
		f.turning = once
	case form == section.Banded && f.a > 0:
		f.turning = parted
	}
	return f
}

// hollow returns the curve of energy or force. Where the coefficients are constant both have a derivative of the sign of
// cos - constant*T/A^3.
func (m *Motion) hollow(of quantity) curve {
	f := curve{motion: *m, of: of, margin: math.Inf(-1)}
	if m.fixed {
		switch m.channel.Section.Form() {
		case section.Rising, section.Arched:
			f.turning = once
		case section.Banded:
			f.turning = parted
		}
	}
	return f
}

// risesFromZero reports whether the quantity rises as the depth leaves zero.
func (f *curve) risesFromZero() bool { return f.of == uniformConveyance }

// value returns the quantity at a geometry.
func (f *curve) value(g section.Geometry) float64 {
	switch f.of {
	case specificEnergy:
		return f.motion.Energy(g)
	case specificForce:
		return f.motion.Force(g)
	}
	return f.motion.channel.Law.AtSlope(g, f.motion.channel.Slope).K
}

// rises reports whether the quantity rises at a geometry, and keeps the margin.
func (f *curve) rises(g section.Geometry) bool {
	rate := f.rate(g)
	if rate >= 0 {
		return true
	}
	f.margin = max(f.margin, rate)
	return false
}

// slope returns the derivative of the quantity with depth at a geometry.
func (f *curve) slope(g section.Geometry) float64 {
	switch f.of {
	case specificEnergy:
		return f.motion.EnergyRate(g)
	case specificForce:
		return f.motion.ForceRate(g)
	}
	return f.motion.channel.Law.AtSlope(g, f.motion.channel.Slope).Rate
}

// rate returns a smooth number of moderate size that has the sign of the derivative.
func (f *curve) rate(g section.Geometry) float64 {
	switch f.of {
	case specificEnergy:
		return f.motion.EnergyRate(g)
	case specificForce:
		return f.motion.ForceRate(g) / g.Area
	}
	switch {
	case f.turning == once: // finite at the crown too, where the perimeter's rate has no bound
		return f.a*g.TopWidth*(g.Perimeter/g.PerimeterRate) - f.b*g.Area
	case f.a > 0:
		return f.a*g.TopWidth*g.Perimeter - f.b*g.PerimeterRate*g.Area
	}
	k := f.motion.channel.Law.AtSlope(g, f.motion.channel.Slope)
	if !(k.K > 0) {
		return 1 // no conveyance yet: it can only begin
	}
	return g.Depth * k.Rate / k.K
}

// parts returns the depths inside a band at which the rate itself may turn, given the geometry at any depth r of the band; NaN for none. There area
// is a quadratic and perimeter and width are linear in depth.
func (f *curve) parts(r section.Geometry) (first, second float64) {
	s := r.TopWidthRate
	if f.of == uniformConveyance {
		bend := (2*f.a - f.b) * s * r.PerimeterRate
		return r.Depth - (f.a*s*r.Perimeter+(f.a-f.b)*r.PerimeterRate*r.TopWidth)/bend, math.NaN()
	}
	// T/A^3 turns where 3T^2 = A*dT/ddepth.
	root := math.Sqrt(10*s*r.Area - 5*r.TopWidth*r.TopWidth)
	return r.Depth - (5*r.TopWidth+root)/(5*s), r.Depth - (5*r.TopWidth-root)/(5*s)
}
