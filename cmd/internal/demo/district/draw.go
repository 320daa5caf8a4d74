package district

import (
	"math"
	"math/rand/v2"
)

// A pen draws one asset.
type pen struct {
	*rand.Rand
	lattices *lattices
	parish   *parish
	class    class
}

func (p *pen) between(low, high float64) float64 { return low + (high-low)*p.Float64() }
func (p *pen) chance(percent int) bool           { return p.IntN(100) < percent }
func (p *pen) pick(values ...float64) float64    { return values[p.IntN(len(values))] }
func (p *pen) pickText(texts ...string) string   { return texts[p.IntN(len(texts))] }
func (p *pen) step(low, high, step float64) float64 {
	return round(math.Round(p.between(low, high)/step)*step, 3)
}

// manning are the roughnesses that the generator lays slopes out with; the mapping file has the same. Common practice (Chow 1959, table 5-6).
var manning = map[string]float64{
	"EARTH": 0.028, "WEEDY": 0.045, "GRASS": 0.06, "STONE": 0.025, "CONCRETE": 0.013, "BRICK": 0.015, "CLAY": 0.013, "PLASTIC": 0.01, "STEEL": 0.024,
}

// finish gives an asset with area and hydraulic radius at the depth that it was designed for its place, its levels and its flows: the slope at which that
// depth runs at a velocity between slow and fast, by Manning's formula, and a share of what it then carries.
func (p *pen) finish(c Channel, area, radius, slow, fast, length float64) Channel {
	cbrt := math.Cbrt(radius)
	root := p.between(slow, fast) * manning[c.Material] / (cbrt * cbrt)
	slope := max(0.0001, min(0.12, root*root))
	x, y, direction := p.lattices.place(p.parish, p.class.code, p.class.spread)
	bend := 0.0
	if p.class.name == "main_drain" || p.class.name == "swale" {
		bend = 14
	}
	c.Line = line(p.Rand, x, y, direction, length, bend)
	plan := round(c.Line[len(c.Line)-1].M, 1)
	upstream := round(p.parish.ground+p.between(-1.5, 3), 2)
	drop := max(0.005, slope*plan)
	if p.class.name != "sewer" && p.class.name != "gutter" && p.chance(2) {
		drop = 0 // silted up level
	}
	downstream := round(upstream-drop, 3)
	lay(c.Line, upstream, downstream)
	c.UpstreamLevel, c.DownstreamLevel, c.Length = upstream, downstream, plan
	velocity := math.Sqrt(max(0.00005, drop/plan)) / manning[c.Material] * cbrt * cbrt
	share := p.between(0.08, 0.75)
	if p.chance(8) {
		share = p.between(1.05, 1.7) // too small for its flow, as some are
	}
	flow := velocity * area * share
	if n, several := c.Barrels.(int64); several {
		flow *= float64(n)
	}
	c.FlowDesign, c.FlowCheck = digits(flow), digits(flow*p.between(1.2, 1.6))
	return c
}

// digits rounds to three digits that count.
func digits(v float64) float64 {
	decimals := 2
	for x := v; x < 1 && decimals < 6; x *= 10 {
		decimals++
	}
	return round(v, decimals)
}

// trapezoid returns area and hydraulic radius at a depth.
func trapezoid(b, z, d float64) (area, radius float64) {
	area = (b + z*d) * d
	return area, area / (b + 2*d*math.Sqrt(1+z*z))
}

func roadsideDitch(p *pen) Channel {
	c := Channel{Material: p.pickText("EARTH", "EARTH", "EARTH", "WEEDY")}
	bank := p.step(0.5, 1.3, 0.05)
	c.BankHeight = bank
	length := p.between(60, 180)
	switch n := p.IntN(100); {
	case n < 60:
		b, z := p.step(0.3, 0.9, 0.05), p.pick(1, 1.5, 1.5, 2)
		c.Shape, c.BottomWidth, c.SideSlope = "TRAP", b, z
		area, radius := trapezoid(b, z, 0.8*bank)
		return p.finish(c, area, radius, 0.3, 1.1, length)
	case n < 82:
		z := p.pick(1.5, 2, 2, 3)
		c.Shape, c.SideSlope = "VEE", z
		area, radius := trapezoid(0, z, 0.8*bank)
		return p.finish(c, area, radius, 0.3, 1, length)
	}
	return p.surveyed(c, p.step(0.3, 0.9, 0.05), p.between(1.2, 2), bank, 0.3, 1, length)
}

// surveyed books a section across the channel: the ends are the banks.
func (p *pen) surveyed(c Channel, bed, z, bank, slow, fast, length float64) Channel {
	c.Shape, c.BankHeight = "SURVEY", nil
	area, radius := trapezoid(bed, z, 0.8*bank)
	c = p.finish(c, area, radius, slow, fast, length)
	low := (c.UpstreamLevel.(float64) + c.DownstreamLevel.(float64)) / 2
	wobble := func(size float64) float64 { return p.between(-size, size) }
	offset := 0.0
	add := func(step, level float64) {
		offset = round(offset+step, 2)
		c.Points = append(c.Points, Point{len(c.Points) + 1, offset, round(level, 3)})
	}
	add(0, low+bank+p.between(0, 0.1))
	add(z*bank*0.5, low+bank*0.5+wobble(0.05*bank))
	add(z*bank*0.5, low+p.between(0, 0.03))
	add(bed*0.5, low)
	add(bed*0.5, low+p.between(0, 0.03))
	add(z*bank*0.6, low+bank*0.55+wobble(0.05*bank))
	add(z*bank*0.5, low+bank+p.between(-0.05, 0.15))
	return c
}

func mainDrain(p *pen) Channel {
	c := Channel{Material: p.pickText("EARTH", "EARTH", "WEEDY")}
	bank := p.step(1.5, 3, 0.1)
	b, z := p.step(2, 9, 0.25), p.pick(1.5, 2, 2, 2.5)
	length := p.between(250, 400)
	if p.chance(45) {
		return p.surveyed(c, b, z, bank, 0.2, 0.7, length)
	}
	c.Shape, c.BottomWidth, c.SideSlope, c.BankHeight = "TRAP", b, z, bank
	area, radius := trapezoid(b, z, 0.75*bank)
	return p.finish(c, area, radius, 0.2, 0.7, length)
}

func linedChannel(p *pen) Channel {
	c := Channel{Material: p.pickText("CONCRETE", "CONCRETE", "STONE", "BRICK")}
	bank := p.step(0.4, 1.8, 0.05)
	b, z := p.step(0.5, 4, 0.1), p.pick(0, 0, 0.5, 1)
	c.Shape, c.BottomWidth, c.BankHeight = "RECT", b, bank
	if z > 0 {
		c.Shape, c.SideSlope = "TRAP", z
	}
	area, radius := trapezoid(b, z, 0.8*bank)
	slow, fast := 0.6, 2.2
	if p.chance(20) { // chutes down the scarp
		slow, fast = 3, 6
	}
	return p.finish(c, area, radius, slow, fast, p.between(40, 200))
}

func sewer(p *pen) Channel {
	length := p.between(35, 62)
	if p.chance(15) { // old brick sewers; full area and radius of the standard ovoid are common practice
		h := p.pick(0.6, 0.75, 0.9, 1.05, 1.2)
		c := Channel{Shape: "EGG", Material: "BRICK", Height: int64(math.Round(h * 1000))}
		return p.finish(c, 0.5105*h*h, 0.1931*h, 0.75, 2.2, length)
	}
	d := p.pick(0.225, 0.3, 0.3, 0.375, 0.45, 0.45, 0.525, 0.6, 0.75, 0.9, 1.05)
	c := Channel{Shape: "PIPE", Material: p.pickText("CLAY", "CONCRETE", "CONCRETE", "PLASTIC"), Height: int64(math.Round(d * 1000))}
	return p.finish(c, math.Pi/4*d*d, d/4, 0.75, 2.4, length)
}

func culvert(p *pen) Channel {
	var c Channel
	if p.chance(25) {
		c.Barrels = int64(2 + p.IntN(2))
	}
	length := p.between(9, 24)
	if p.chance(55) {
		w, h := p.step(0.9, 3.6, 0.3), p.step(0.6, 1.8, 0.3)
		c.Shape, c.Material = "BOX", "CONCRETE"
		c.Width, c.Height = int64(math.Round(w*1000)), int64(math.Round(h*1000))
		return p.finish(c, w*h*0.9, w*h*0.9/(w+1.8*h), 0.6, 2.4, length)
	}
	d := p.pick(0.45, 0.6, 0.75, 0.9, 1.2, 1.5)
	c.Shape, c.Material, c.Height = "PIPE", p.pickText("CONCRETE", "CONCRETE", "STEEL"), int64(math.Round(d*1000))
	return p.finish(c, math.Pi/4*d*d, d/4, 0.6, 2.2, length)
}

func gutter(p *pen) Channel {
	cross, curb := p.pick(2, 2, 2.5, 3), p.pick(100, 120, 125, 150)
	c := Channel{Shape: "GUTTER", Material: "CONCRETE", CrossFall: cross, Height: int64(curb)}
	d := p.between(0.04, 0.08)
	area := d * d / (2 * cross / 100)
	return p.finish(c, area, area/(d+d/(cross/100)), 0.5, 1.4, p.between(40, 68))
}

func swale(p *pen) Channel {
	h := p.step(0.3, 0.6, 0.05)
	t := round(h*p.step(5, 9, 0.5), 2)
	c := Channel{Shape: "SWALE", Material: "GRASS", TopWidth: t, BankHeight: h}
	d := 0.75 * h
	width := t * math.Sqrt(d/h)
	area := 2.0 / 3 * width * d
	return p.finish(c, area, area/(width+8*d*d/(3*width)), 0.25, 0.8, p.between(60, 160))
}
