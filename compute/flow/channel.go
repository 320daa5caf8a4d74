// Package flow computes what one section carries at one discharge: energy, force and Froude number, the normal, critical,
// alternate and sequent depths, capacity and the class of the slope. Barrels are resolved here: discharges that
// cross its face are totals, everything else describes one barrel.
package flow

import (
	"math"

	"leat/compute/friction"
	"leat/compute/section"
)

// Channel is a section with what governs the flow in it. The zero values of the optional fields mean what their comments say.
// It is a value: nothing in it changes, and its methods do not allocate.
type Channel struct {
	Section section.Section
	Law     friction.Law // nil where no roughness is known
	Slope   float64      // the sine of the bed's angle, -1 < Slope < 1, positive when it falls downstream
	Gravity float64      // m/s2
	Barrels int          // equal barrels that share the discharge; 0 counts as 1

	EnergyCoefficient   float64 // alpha as given; 0 leaves it to the law (1 unless zones say otherwise)
	MomentumCoefficient float64 // beta as given; likewise

	Bank float64 // depth at which an open section overtops as given; 0 leaves it to the section
}

// Cosine returns the cosine of the bed's angle.
func (c *Channel) Cosine() float64 { return cosine(c.Slope) }

func cosine(sine float64) float64 { return math.Sqrt((1 - sine) * (1 + sine)) }

// BankHeight returns the depth at which the section overtops, or the crown of a closed one, and whether it is known.
func (c *Channel) BankHeight() (depth float64, known bool) {
	if c.Bank > 0 && !c.Section.Closed() {
		return c.Bank, true
	}
	return c.Section.Bank()
}

// barrels returns their number as a float64.
func (c *Channel) barrels() float64 {
	if c.Barrels < 1 {
		return 1
	}
	return float64(c.Barrels)
}

// coefficients returns alpha and beta and their rates at a geometry: as given, else from the law, else 1.
func (c *Channel) coefficients(g section.Geometry) friction.Coefficients {
	k := friction.Coefficients{Energy: 1, Momentum: 1}
	if c.Law != nil && (c.EnergyCoefficient == 0 || c.MomentumCoefficient == 0) {
		k = c.Law.Coefficients(c.Wetted(g))
	}
	if c.EnergyCoefficient != 0 {
		k.Energy, k.EnergyRate = c.EnergyCoefficient, 0
	}
	if c.MomentumCoefficient != 0 {
		k.Momentum, k.MomentumRate = c.MomentumCoefficient, 0
	}
	return k
}

// constantCoefficients reports whether alpha and beta do not vary with depth.
func (c *Channel) constantCoefficients() bool {
	return c.EnergyCoefficient != 0 && c.MomentumCoefficient != 0 || c.Law == nil || friction.UnitCoefficients(c.Law)
}

// Geometry returns the geometry at a depth. At the crown of a closed section it is full; above, the depth is that of the pressure line: the full
// section with its first moment about that line, and a surface without width.
func (c *Channel) Geometry(depth float64) section.Geometry {
	height := c.Section.Height()
	if !c.Section.Closed() || depth < height {
		return c.Section.At(depth)
	}
	g := c.Section.Full()
	g.Moment += g.Area * (depth - height)
	g.Depth, g.PerimeterRate, g.TopWidthRate = depth, 0, 0
	return g
}

// Wetted returns a geometry as its roughness sees it: under a pressure line the depth is that of the full section.
func (c *Channel) Wetted(g section.Geometry) section.Geometry {
	if c.Section.Closed() {
		g.Depth = min(g.Depth, c.Section.Height())
	}
	return g
}
