package demo

import "math"

// A pipe's slope is laid out for 0.7 to 2.4 m/s when full: self-cleansing below, kind to the pipe above. Common practice.
const (
	pipeSlow = 0.7
	pipeFast = 2.4
)

// sewer draws a storm sewer: circular mostly, old brick eggs, a few ellipses under roads with little cover, horseshoes.
func sewer(p *pen) design {
	var out design
	switch kind := p.IntN(100); {
	case kind < 74:
		out = circular(p, p.pick(0.225, 0.3, 0.3, 0.375, 0.45, 0.45, 0.525, 0.6, 0.6, 0.75, 0.9, 1.05, 1.2, 1.5))
	case kind < 91:
		out = egg(p)
	case kind < 96:
		out = elliptical(p)
	default:
		out = horseshoe(p)
	}
	if out.roughness == "" {
		out.roughness = pipeLaw(p, out.manning)
	}
	out.slow, out.fast, out.level = pipeSlow, pipeFast, 1
	return out
}

// pipeLaw writes a roughness of pipe material that goes with a Manning n: sand roughness for four in ten.
func pipeLaw(p *pen, n float64) string {
	if p.chance(40) {
		height := map[float64]float64{0.009: 0.00006, 0.01: 0.00015, 0.011: 0.0003, 0.012: 0.0006, 0.013: 0.0015, 0.015: 0.003, 0.017: 0.005, 0.024: 0.04}[n]
		viscosity := ""
		if !p.parish.feet && p.chance(20) {
			viscosity = "0.00000131" // water at 10 degrees C
		}
		return object("sand_roughness", p.roughnessHeight(height), "kinematic_viscosity", viscosity)
	}
	if p.chance(10) {
		return object("strickler", fixed(1/n, 0))
	}
	return object("manning", fixed(n, 3))
}

func circular(p *pen, diameter float64) design {
	diameter = p.size(diameter, 0.025)
	return design{
		section: object("kind", `"circular"`, "diameter", p.length(diameter)),
		depth:   diameter, area: math.Pi / 4 * diameter * diameter, radius: diameter / 4,
		manning: p.pick(0.009, 0.01, 0.011, 0.012, 0.013, 0.013, 0.015), closed: true,
	}
}

// egg draws a brick sewer. Full area 0.5105 h^2 and radius 0.1931 h of the standard ovoid: common practice.
func egg(p *pen) design {
	h := p.size(p.pick(0.6, 0.75, 0.9, 0.9, 1.05, 1.2, 1.5), 0.05)
	inverted := ""
	if p.chance(12) {
		inverted = "true"
	}
	return design{
		section: object("kind", `"egg"`, "height", p.length(h), "inverted", inverted),
		depth:   h, area: 0.5105 * h * h, radius: 0.1931 * h, manning: p.pick(0.013, 0.015, 0.017), closed: true,
	}
}

func elliptical(p *pen) design {
	h := p.size(p.pick(0.5, 0.6, 0.75, 0.9), 0.05)
	w := p.size(h*1.5, 0.05)
	if p.chance(25) { // upright
		w, h = h, w
	}
	area := math.Pi / 4 * w * h
	return design{
		section: object("kind", `"elliptical"`, "width", p.length(w), "height", p.length(h)),
		depth:   h, area: area, radius: area / (math.Pi * math.Sqrt((w*w+h*h)/2)), manning: p.pick(0.012, 0.013), closed: true,
	}
}

// horseshoe draws an old brick tunnel. Full area 0.829 h^2 and radius 0.254 h: common practice.
func horseshoe(p *pen) design {
	h := p.size(p.between(1.2, 2.4), 0.1)
	return design{
		section: object("kind", `"horseshoe"`, "height", p.length(h)),
		depth:   h, area: 0.829 * h * h, radius: 0.254 * h, manning: p.pick(0.013, 0.015, 0.017), closed: true,
	}
}

// culvert draws the barrel of a culvert under a road or a rail line.
func culvert(p *pen) design {
	var out design
	switch kind := p.IntN(100); {
	case kind < 66:
		out = box(p)
	case kind < 86: // concrete, or corrugated steel
		out = circular(p, p.pick(0.45, 0.6, 0.75, 0.9, 1.2, 1.5, 1.8))
		out.manning = p.pick(0.012, 0.013, 0.024)
	case kind < 93:
		out = elliptical(p)
	default:
		out = horseshoe(p)
	}
	if out.roughness == "" {
		out.roughness = pipeLaw(p, out.manning)
	}
	if p.chance(25) {
		out.barrels = 2 + p.IntN(3)
	}
	out.slow, out.fast, out.level = 0.6, 2.6, 8
	return out
}

func box(p *pen) design {
	w := p.size(p.pick(0.9, 1.2, 1.5, 1.8, 2.1, 2.4, 3, 3.6, 4), 0.3)
	h := p.size(min(w, p.pick(0.6, 0.9, 1.2, 1.5, 1.8, 2.4)), 0.3)
	haunch, leg := "", 0.0
	if p.chance(55) {
		leg = p.size(p.pick(0.1, 0.15, 0.2), 0.05)
		haunch = p.length(leg)
	}
	area := w*h - leg*leg
	out := design{
		section: object("kind", `"box"`, "width", p.length(w), "height", p.length(h), "haunch", haunch),
		depth:   h, area: area, radius: area / (w + 2*h), manning: p.pick(0.012, 0.013, 0.013, 0.015), closed: true,
	}
	if p.chance(18) { // natural bed let into the floor
		out.manning = 0.022
		out.roughness = object("bed", object("manning", "0.035"), "sides", object("manning", "0.013"))
	}
	return out
}
