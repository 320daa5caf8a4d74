package demo

import "math"

// trapezoid fills in a trapezoidal, rectangular (side slope 0) or triangular (bottom width 0) section that runs at depth d.
func trapezoid(p *pen, b, z, d, bank float64) design {
	area := (b + z*d) * d
	out := design{depth: d, area: area, radius: area / (b + 2*d*math.Sqrt(1+z*z))}
	switch {
	case z == 0:
		out.section = object("kind", `"rectangular"`, "bottom_width", p.length(b), "bank_height", p.length(bank))
	case b == 0:
		out.section = object("kind", `"triangular"`, "side_slope", fixed(z, 2), "bank_height", p.length(bank))
	default:
		out.section = object("kind", `"trapezoidal"`, "bottom_width", p.length(b), "side_slope", fixed(z, 2), "bank_height", p.length(bank))
	}
	return out
}

// roadsideDitch draws a small earth ditch: 0.3 to 0.9 m at the bottom, 0.5 to 1.3 m deep.
func roadsideDitch(p *pen) design {
	bank := p.size(p.between(0.5, 1.3), 0.05)
	d := 0.8 * bank
	var out design
	n := p.pick(0.025, 0.027, 0.03, 0.03, 0.033, 0.035, 0.04)
	switch kind := p.IntN(100); {
	case kind < 58:
		out = trapezoid(p, p.size(p.between(0.3, 0.9), 0.05), p.pick(1, 1.5, 1.5, 2, 2.5), d, bank)
		if p.chance(12) { // the road side is flatter than the field side
			b := p.size(p.between(0.3, 0.6), 0.05)
			out = trapezoid(p, b, 1.75, d, bank)
			out.section = object("kind", `"trapezoidal"`, "bottom_width", p.length(b), "left_side_slope", "2", "right_side_slope", "1.5",
				"bank_height", p.length(bank))
		}
		out.roughness = earthLaw(p, n, out.radius)
	case kind < 78:
		out = trapezoid(p, 0, p.pick(1.5, 2, 2, 3), d, bank)
		out.roughness = earthLaw(p, n, out.radius)
	default:
		s := ditchSurvey(p, p.between(0.3, 0.9), p.between(1.2, 2.2), bank)
		out = s.design(p)
		out.roughness = earthLaw(p, n, out.radius)
	}
	out.manning, out.slow, out.fast, out.level = n, 0.3, 1.1, 3
	return out
}

// earthLaw writes a roughness of earth: Manning mostly, Strickler or Chezy where an older hand kept the register.
func earthLaw(p *pen, n, radius float64) string {
	switch c := p.IntN(100); {
	case c < 84:
		return object("manning", fixed(n, 3))
	case c < 94:
		return object("strickler", fixed(1/n, 0))
	default:
		return object("chezy", p.chezy(math.Sqrt(math.Cbrt(radius))/n))
	}
}

// mainDrain draws a fen drain: 2 to 9 m at the bottom, 1.5 to 3 m deep, slow, sometimes with benches or reeds on one side.
func mainDrain(p *pen) design {
	bank := p.size(p.between(1.5, 3), 0.1)
	n := p.pick(0.025, 0.028, 0.03, 0.03, 0.033, 0.035)
	var out design
	switch kind := p.IntN(100); {
	case kind < 36:
		b, z := p.size(p.between(2, 9), 0.25), p.pick(1.5, 2, 2, 2.5)
		out = trapezoid(p, b, z, 0.75*bank, bank)
		out.roughness = earthLaw(p, n, out.radius)
		if p.chance(25) { // a clean bed between weedy slopes
			combine := ""
			if p.chance(40) {
				combine = `"pavlovskii"`
			}
			out.roughness = object("bed", object("manning", fixed(n, 3)), "sides", object("manning", fixed(p.pick(0.04, 0.045, 0.05), 3)), "combine", combine)
		}
	case kind < 70:
		s := drainSurvey(p, bank)
		out = s.design(p)
		out.roughness = earthLaw(p, n, out.radius)
		if s.zoned {
			out.roughness = zones(p, n, s.left, s.right)
		}
		out.natural = !s.zoned
	case kind < 93:
		out = twoStage(p, n)
	default:
		out = tabulated(p, bank)
		out.roughness = object("manning", fixed(n, 3))
	}
	out.manning, out.slow, out.fast, out.level = n, 0.2, 0.75, 6
	return out
}

// zones writes a clean low channel between two rough banks that begin at the offsets left and right.
func zones(p *pen, n, left, right float64) string {
	combine := ""
	switch c := p.IntN(100); {
	case c < 12:
		combine = `"horton_einstein"`
	case c < 20:
		combine = `"pavlovskii"`
	case c < 26:
		combine = `"lotter"`
	}
	rough := p.pick(0.045, 0.05, 0.06, 0.08)
	return object("zones", list(
		object("until", p.length(left), "manning", fixed(rough, 3)),
		object("until", p.length(right), "manning", fixed(n, 3)),
		object("manning", fixed(p.pick(rough, 0.05, 0.07), 3)),
	), "combine", combine)
}

// twoStage draws a two-stage ditch: a low channel for common flows between level benches.
func twoStage(p *pen, n float64) design {
	b := p.size(p.between(1.2, 4), 0.1)
	low := p.size(p.between(0.5, 1.1), 0.05)
	z, upper := p.pick(1, 1.5, 2), p.pick(1.5, 2, 2.5)
	left, right := p.size(p.between(1.5, 5), 0.25), p.size(p.between(1.5, 5), 0.25)
	same := p.chance(60)
	if same {
		right = left
	}
	bank := low + p.size(p.between(0.8, 1.5), 0.1)
	wide := b + 2*z*low
	over := 0.7 * (bank - low)
	area := (b+z*low)*low + (wide+left+right+upper*over)*over
	perimeter := b + 2*low*math.Sqrt(1+z*z) + left + right + 2*over*math.Sqrt(1+upper*upper)
	out := design{depth: low + over, area: area, radius: area / perimeter}
	benches := []string{"bench_width", p.length(left)}
	if !same {
		benches = []string{"left_bench_width", p.length(left), "right_bench_width", p.length(right)}
	}
	pairs := append([]string{"kind", `"two_stage"`, "bottom_width", p.length(b), "side_slope", fixed(z, 2), "bench_height", p.length(low)}, benches...)
	pairs = append(pairs, "upper_side_slope", fixed(upper, 2))
	if p.chance(85) {
		pairs = append(pairs, "bank_height", p.length(bank))
	}
	out.section = object(pairs...)
	out.roughness = object("manning", fixed(n, 3))
	if p.chance(65) {
		out.roughness = zones(p, n, -wide/2, wide/2)
	}
	return out
}

// tabulated draws a drain that is known only by a table, as older hydraulic studies left them: area = b*y + z*y^2 + c*y^3.
func tabulated(p *pen, bank float64) design {
	b, z, c := p.between(1.5, 5), p.between(1.2, 2), p.between(0, 0.15)
	var rows []string
	perimeter, before, last := b, 0.0, b
	out := design{}
	const steps = 8
	for i := 1; i <= steps; i++ {
		y := bank * float64(i) / steps
		width := b + 2*z*y + 3*c*y*y
		perimeter += 2 * math.Hypot((width-last)/2, y-before)
		before, last = y, width
		area := ((c*y+z)*y + b) * y
		rows = append(rows, list(p.length(y), p.area(area), p.length(perimeter), p.length(width)))
		if i == steps-2 {
			out.depth, out.area, out.radius = y, area, area/perimeter
		}
	}
	out.section = object("kind", `"tabulated"`, "rows", list(rows...))
	return out
}

// linedChannel draws a concrete or stone channel, a fifth of them chutes on the scarp.
func linedChannel(p *pen) design {
	bank := p.size(p.between(0.4, 1.8), 0.05)
	z := p.pick(0, 0, 0, 0.5, 1, 1.5)
	b := p.size(p.between(0.5, 4), 0.1)
	out := trapezoid(p, b, z, 0.8*bank, bank)
	n := p.pick(0.012, 0.013, 0.014, 0.015, 0.017, 0.02, 0.025)
	switch c := p.IntN(100); {
	case c < 60:
		out.roughness = object("manning", fixed(n, 3))
	case c < 80:
		out.roughness = object("strickler", fixed(1/n, 0))
	case c < 88:
		out.roughness = object("chezy", p.chezy(math.Sqrt(math.Cbrt(out.radius))/n))
	default: // gravel let lie between concrete walls
		n = 0.022
		out.roughness = object("bed", object("manning", "0.03"), "sides", object("manning", "0.014"))
	}
	out.manning, out.slow, out.fast = n, 0.6, 2.2
	if p.chance(20) {
		out.slow, out.fast = 3.5, 7
	}
	return out
}

// gutter draws a street gutter, wet to the middle of the lane at most; half have a steeper gutter strip.
func gutter(p *pen) design {
	cross := p.pick(0.02, 0.02, 0.025, 0.03)
	curb := p.pick(0.1, 0.12, 0.125, 0.15)
	if p.parish.feet {
		curb = 0.5 * foot
	}
	d := p.between(0.04, 0.08)
	area := d * d / (2 * cross)
	out := design{depth: d, area: area, radius: area / (d + d/cross)}
	pairs := []string{"kind", `"gutter"`, "cross_slope", fixed(cross, 3), "curb_height", p.length(curb)}
	if p.chance(50) {
		pairs = append(pairs, "gutter_width", p.length(p.size(p.between(0.3, 0.6), 0.05)), "gutter_slope", p.pickText("0.04", "0.05", "0.06", "0.08"))
	}
	out.section = object(pairs...)
	out.manning = p.pick(0.013, 0.015, 0.016)
	out.roughness = object("manning", fixed(out.manning, 3))
	out.slow, out.fast = 0.5, 1.4
	return out
}

// flume draws a U-shaped precast flume.
func flume(p *pen) design {
	w := p.pick(0.4, 0.5, 0.6, 0.8, 1, 1.2)
	if p.parish.feet {
		w = p.size(w, 0.1)
	}
	bank := p.size(w*p.between(0.8, 1.1), 0.05)
	d := 0.75 * w
	area := math.Pi*w*w/8 + w*(d-w/2)
	out := design{depth: d, area: area, radius: area / (math.Pi*w/2 + 2*d - w)}
	out.section = object("kind", `"u_shaped"`, "width", p.length(w), "bank_height", p.length(bank))
	out.manning, out.slow, out.fast = p.pick(0.012, 0.013, 0.015), 0.7, 2.5
	out.roughness = object("manning", fixed(out.manning, 3))
	if p.chance(35) {
		out.roughness = object("sand_roughness", p.roughnessHeight(p.pick(0.0006, 0.001, 0.0015)))
	}
	return out
}

// swale draws a parabolic grassed swale. Grass stands up in shallow water and lies down in deep, so n falls with depth: common
// practice for vegetated channels, the figures are ours.
func swale(p *pen) design {
	h := p.size(p.between(0.3, 0.6), 0.05)
	t := p.size(h*p.between(5, 9), 0.1)
	d := 0.75 * h
	width := t * math.Sqrt(d/h)
	area := 2.0 / 3 * width * d
	out := design{depth: d, area: area, radius: area / (width + 8*d*d/(3*width))}
	out.section = object("kind", `"parabolic"`, "top_width", p.length(t), "height", p.length(h), "bank_height", p.length(h))
	stiff := p.between(0.8, 1.3)
	var table []string
	for _, row := range [][2]float64{{0.05, 0.2}, {0.1, 0.13}, {0.2, 0.075}, {0.35, 0.05}, {0.5, 0.04}} {
		table = append(table, list(p.length(row[0]), fixed(row[1]*stiff, 3)))
	}
	out.roughness = object("manning_by_depth", list(table...))
	if p.chance(15) {
		out.roughness = object("manning", "0.045")
	}
	out.manning, out.slow, out.fast, out.level = 0.055*stiff, 0.25, 0.9, 2
	return out
}
