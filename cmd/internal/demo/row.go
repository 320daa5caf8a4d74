package demo

import (
	"math"
	"math/rand/v2"
	"strconv"
)

// A design is a drawn cross-section with what the generator must know to give it a slope and a flow that an engineer would
// believe: sizes in SI at the depth it is meant to run at.
type design struct {
	section   string // JSON
	roughness string // JSON
	depth     float64
	area      float64
	radius    float64
	manning   float64 // of the whole at that depth, roughly
	slow      float64 // velocities, in m/s, between which the slope is laid out
	fast      float64
	closed    bool
	barrels   int
	natural   bool // natural enough for velocity coefficients above 1
	level     int  // of a hundred, how many lie level or fall backwards
}

// A laid is a design as it lies in the ground: its slope and the flow that it was laid out for. Texts are JSON, empty for what is left out.
type laid struct {
	class
	parish
	design
	units, barrels string
	slope          string
	discharge      float64 // m3/s
	seen           string  // a depth that was gauged there
	alpha, beta    string
	steep          bool // laid out to shoot
}

// lay draws an asset. The slope is the one at which the design depth would run at a believable velocity, the discharge a
// share of what the section then carries; both by Manning's formula, which is near enough for other laws too.
func lay(r *rand.Rand, p parish, c class) laid {
	pen := &pen{Rand: r, parish: p}
	d := c.draw(pen)
	velocity := pen.between(d.slow, d.fast)
	cbrt := math.Cbrt(d.radius)
	root := velocity * d.manning / (cbrt * cbrt) // the root of the slope
	slope := max(0.00005, min(0.16, root*root))
	capacity := velocity * d.area

	share := pen.between(0.08, 0.9)
	if pen.chance(9) { // too small for its flow, as some are
		share = pen.between(1.05, 1.5)
		if !d.closed {
			share *= 1.8 // to the bank it carries about so much more than at the depth it was designed for
		}
	}
	barrels := ""
	if d.barrels > 1 {
		barrels = strconv.Itoa(d.barrels)
		capacity *= float64(d.barrels)
	}
	slopeText := digits(slope, 2)
	if pen.chance(d.level) {
		slopeText = "0"
		if pen.chance(50) { // settled or silted, and surveyed as such
			slopeText = "-" + digits(pen.between(0.0001, 0.0012), 2)
		}
	}
	units := ""
	if p.feet {
		units = `"us"`
	}
	seen, alpha, beta := "", "", ""
	if pen.chance(12) { // a depth that was gauged there
		seen = pen.length(d.depth * pen.between(0.2, 0.85))
	}
	if d.natural && pen.chance(15) { // Chow 1959, table 2-1: regular channels, averages
		alpha, beta = "1.15", "1.05"
	}
	return laid{
		class: c, parish: p, design: d, units: units, barrels: barrels, slope: slopeText, discharge: capacity * share, seen: seen, alpha: alpha, beta: beta,
		steep: velocity > 3,
	}
}

// row writes the request for the depths of an asset.
func (l *laid) row(id string) string {
	pen := &pen{parish: l.parish}
	return object(
		"id", id,
		"units", l.units,
		"section", l.section,
		"barrels", l.barrels,
		"roughness", l.roughness,
		"bed_slope", l.slope,
		"discharge", pen.discharge(l.discharge),
		"depth", l.seen,
		"energy_coefficient", l.alpha,
		"momentum_coefficient", l.beta,
	)
}
