package compute_test

import (
	"math"
	"slices"

	"leat/compute/flow"
	"leat/compute/profile"
)

func init() {
	covers(depthFunctionRun, "macdonald-rect-subcritical", "macdonald-rect-jump", "macdonald-trap-periodic", "delestre2013-long-subcritical", "delestre2013-long-jump")
	covers(transitionRun, "delestre2013-short-transition-jump")
}

// depthFunction is an analytic solution: a depth over the chainage, from which the bed follows (MacDonald et al. 1997; Delestre et al. 2013).
type depthFunction struct {
	words []string // as the cases give it
	at    func(x, g float64, a []float64) float64
	jump  float64 // chainage; 0 for none
}

var depthFunctions = []depthFunction{
	{words: []string{"(4/g)^(1/3) * (1 + exp(-16 (x/1000 - 1/2)^2)/2)", "(4/g)^(1/3) (1 + exp(-16(x/1000-1/2)^2)/2)"},
		at: func(x, g float64, _ []float64) float64 {
			return math.Cbrt(4/g) * (1 + math.Exp(-16*(x/1000-0.5)*(x/1000-0.5))/2)
		}},
	{words: []string{"9/8 + sin(pi x/500)/4"}, at: func(x, _ float64, _ []float64) float64 { return 9./8 + math.Sin(math.Pi*x/500)/4 }},
	{words: []string{"x<=500: (4/g)^(1/3) (9/10 - exp(-x/250)/6); x>500: (4/g)^(1/3) (1 + sum_{k=1..3} a_k exp(-20k(x/1000-1/2)) + (4/5) exp(x/1000-1))",
		"as macdonald-rect-jump with the jump at 500 m"}, jump: 500,
		at: func(x, g float64, a []float64) float64 {
			if x <= 500 {
				return math.Cbrt(4/g) * (0.9 - math.Exp(-x/250)/6)
			}
			sum := 1 + 0.8*math.Exp(x/1000-1)
			for k, c := range a {
				sum += c * math.Exp(-20*float64(k+1)*(x/1000-0.5))
			}
			return math.Cbrt(4/g) * sum
		}},
	{words: []string{"x<=200/3: (4/g)^(1/3)(4/3-x/100) - (9x/1000)(x/100-2/3); x>200/3: (4/g)^(1/3)(a1 (x/100-2/3)^4 + a1 (x/100-2/3)^3 - a2 (x/100-2/3)^2 + a3 (x/100-2/3) + a4)"},
		jump: 200. / 3, at: func(x, g float64, a []float64) float64 {
			if x <= 200./3 {
				return math.Cbrt(4/g)*(4./3-x/100) - 9*x/1000*(x/100-2./3)
			}
			t := x/100 - 2./3
			return math.Cbrt(4/g) * ((((a[0]*t+a[0])*t-a[1])*t+a[2])*t + a[3])
		}},
}

// analytic is a case as a function, with its channel.
type analytic struct {
	depthFunction
	channel   *flow.Channel
	discharge float64
	length    float64
	depth     func(x float64) float64 // at the jump the depth before it
	after     float64                 // the depth after the jump
}

func (c *claim) analytic() *analytic {
	c.Helper()
	words, _ := c.c.Given["depth_function"].(string)
	i := slices.IndexFunc(depthFunctions, func(f depthFunction) bool { return slices.Contains(f.words, words) })
	if i < 0 {
		c.Fatalf("unknown depth function %q", words)
	}
	c.aside("depth_function", "bed_slope_from", "boundary", "number_of_nodes")
	f := &analytic{depthFunction: depthFunctions[i], length: c.given("length")}
	var coefficients []float64
	if _, given := c.c.Given["coefficients"]; given {
		coefficients = c.list("coefficients")
	}
	f.channel = c.channel(c.section())
	if _, given := c.c.Given["discharge"]; given {
		f.discharge = c.given("discharge")
	} else {
		c.is("friction", "R = h")
		f.discharge = c.given("discharge_per_width") * vast
	}
	f.depth = func(x float64) float64 { return f.at(x, c.gravity(), coefficients) }
	if f.jump > 0 {
		f.after = f.depth(f.jump * (1 + 1e-15))
	}
	return f
}

// slope returns the published bed slope, which leaves out the cosine: S0 = (1 - F^2) dh/dx + Sf.
func (f *analytic) slope(x float64) float64 {
	h := f.depth(x)
	s := flat(*f.channel).State(h, f.discharge)
	const e = 0.01
	at := func(k float64) float64 { return f.depth(x + k*e) }
	// One-sided at the ends, at a jump and beside them: the piece before goes on smoothly in its formula on that side only.
	var rate float64
	switch {
	case x == f.jump && x > 0:
		rate = (25./12*h - 4*at(-1) + 3*at(-2) - 4./3*at(-3) + 1./4*at(-4)) / e
	default:
		rate = (at(-2) - 8*at(-1) + 8*at(1) - at(2)) / (12 * e)
	}
	return (1-s.FroudeNumber*s.FroudeNumber)*rate + s.FrictionSlope
}

// published asserts what the case says of the depth function and the published bed.
func (f *analytic) published(c *claim) {
	c.Helper()
	const intervals = 10
	var depths, slopes, levels []float64
	fall := func(a, b float64) float64 {
		energy := func(x float64) float64 {
			s := flat(*f.channel).State(f.depth(x), f.discharge)
			return s.SpecificEnergy
		}
		loss := simpson(a, b, func(x float64) float64 { return f.channel.State(f.depth(x), f.discharge).FrictionSlope })
		return loss + energy(b) - energy(a)
	}
	for k := range intervals + 1 {
		x := f.length * float64(k) / intervals
		depths, slopes = append(depths, f.depth(x)), append(slopes, f.slope(x))
		var level float64
		if f.jump > x { // the bed goes on where the energy steps down
			level = fall(x, f.jump) + fall(f.jump*(1+1e-15), f.length)
		} else {
			start := x
			if x == f.jump && x > 0 {
				start = x * (1 + 1e-15)
			}
			level = fall(start, f.length)
		}
		levels = append(levels, level)
	}
	c.want("depth_at_nodes", depths...)
	c.want("bed_slope_at_nodes", slopes...)
	c.want("bed_level_at_nodes", levels...)
	const printed = "half a unit of its last place"
	c.near("depth_upstream", f.depth(0), 5e-10, printed)
	c.near("depth_downstream", f.depth(f.length), 5e-10, printed)
	if f.jump > 0 {
		c.near("depth_before_jump", f.depth(f.jump), 5e-10, printed)
		c.near("depth_after_jump", f.after, 5e-10, printed)
	}
}

// The bed of a run is made of reaches of one slope, each such that the contract's equation with its cosine leads from the depth function at one end
// to it at the other: upstream where the flow is subcritical, downstream where it is supercritical. Integration is by Runge's and
// Kutta's rule here, not the program's.
type bedMaker struct {
	*claim
	f      *analytic
	reach  float64 // length of a reach
	slopes []float64
}

// march leads a depth along a slope.
func (b *bedMaker) march(slope, depth, distance float64) float64 {
	channel := *b.f.channel
	channel.Slope = slope
	rate := func(y float64) float64 {
		s := channel.State(y, b.f.discharge)
		return (slope - s.FrictionSlope) / (channel.Cosine() * (1 - s.FroudeNumber*s.FroudeNumber))
	}
	const n = 32
	h := distance / n
	for range n {
		k1 := rate(depth)
		k2 := rate(depth + h/2*k1)
		k3 := rate(depth + h/2*k2)
		k4 := rate(depth + h*k3)
		depth += h / 6 * (k1 + 2*k2 + 2*k3 + k4)
	}
	return depth
}

// across returns the depth on another slope with the energy of a depth on one.
func (b *bedMaker) across(from, to, depth float64) float64 {
	one, two := *b.f.channel, *b.f.channel
	one.Slope, two.Slope = from, to
	energy := one.State(depth, b.f.discharge).SpecificEnergy
	for range 50 {
		s := two.State(depth, b.f.discharge)
		step := (s.SpecificEnergy - energy) / (two.Cosine() * (1 - s.FroudeNumber*s.FroudeNumber))
		depth -= step
		if math.Abs(step) < 1e-15*depth {
			break
		}
	}
	return depth
}

// secant finds a slope near a guess.
func (b *bedMaker) secant(guess float64, miss func(slope float64) float64) float64 {
	b.Helper()
	s0, s1 := guess, guess+1e-6
	m0, m1 := miss(s0), miss(s1)
	for range 50 {
		if m1 == m0 || math.Abs(s1-s0) < 1e-16 {
			break
		}
		s2 := s1 - m1*(s1-s0)/(m1-m0)
		s0, m0, s1 = s1, m1, s2
		m1 = miss(s1)
	}
	if !(math.Abs(m1) < 1e-13) {
		b.Fatalf("no slope leads to the depth: off by %g", m1)
	}
	return s1
}

// make fills the slopes of n reaches and returns the depths at their upstream ends and at the last one's downstream end.
func (b *bedMaker) make() {
	f := b.f
	n := int(math.Round(f.length / b.reach))
	b.slopes = make([]float64, n)
	split := int(math.Round(f.jump / b.reach)) // reaches before it are supercritical
	depth, slope := f.depth(0), math.NaN()
	for i := range split {
		x := float64(i) * b.reach
		target := f.depth(x + b.reach)
		b.slopes[i] = b.secant(f.slope(x+b.reach/2), func(s float64) float64 {
			y := depth
			if i > 0 {
				y = b.across(slope, s, depth)
			}
			return b.march(s, y, b.reach) - target
		})
		depth, slope = target, b.slopes[i]
	}
	depth, slope = f.depth(f.length), math.NaN()
	for i := n - 1; i >= split; i-- {
		x := float64(i) * b.reach
		target := f.depth(x)
		if i == split && split > 0 {
			target = f.after
		}
		b.slopes[i] = b.secant(f.slope(x+b.reach/2), func(s float64) float64 {
			y := depth
			if i < n-1 {
				y = b.across(slope, s, depth)
			}
			return b.march(s, y, -b.reach) - target
		})
		depth, slope = target, b.slopes[i]
	}
}

// depthFunctionRun rebuilds the bed and asks for the depths back, once as reaches and once as stations.
func depthFunctionRun(c *claim) {
	f := c.analytic()
	f.published(c)
	bed := &bedMaker{claim: c, f: f, reach: f.length / 400}
	bed.make()
	n := len(bed.slopes)
	run := &profile.Run{Discharge: f.discharge, Downstream: profile.Boundary{Kind: profile.Depth, Value: f.depth(f.length)}}
	if f.jump > 0 {
		run.Upstream = profile.Boundary{Kind: profile.Depth, Value: f.depth(0)}
	}
	stations := *run
	level := 0.0
	for _, slope := range bed.slopes {
		level += slope * bed.reach
	}
	for i, slope := range bed.slopes {
		channel := *f.channel
		channel.Slope = slope
		run.Reaches = append(run.Reaches, profile.Reach{Channel: channel, Length: bed.reach})
		stations.Stations = append(stations.Stations, profile.Station{Channel: *f.channel, Chainage: float64(i) * bed.reach, BedLevel: level})
		level -= slope * bed.reach
	}
	stations.Stations = append(stations.Stations, profile.Station{Channel: *f.channel, Chainage: f.length, BedLevel: level})
	split := int(math.Round(f.jump / bed.reach))
	for name, asked := range map[string]*profile.Run{"reaches": run, "stations": &stations} {
		tolerance := 1e-10
		if name == "stations" {
			tolerance = 1e-8 // levels near 10 m leave the slopes 1e-15 of their own
		}
		answer := c.solve(asked)
		worst := 0.0
		for i := range n + 1 {
			if i == split && f.jump > 0 {
				continue
			}
			x := float64(i) * bed.reach
			want := f.depth(x)
			near := math.Inf(1)
			for j := range answer.Stations {
				if p := &answer.Stations[j]; math.Abs(p.Chainage-x) < 1e-6 {
					near = min(near, math.Abs(p.State.Geometry.Depth-want)/want)
				}
			}
			worst = max(worst, near)
		}
		c.Logf("%s: worst depth at %d places %.2g", name, n+1, worst)
		if !(worst <= tolerance) {
			c.Errorf("as %s the depths come back within %g only", name, worst)
		}
		if f.jump == 0 {
			if len(answer.Jumps) != 0 {
				c.Errorf("as %s it jumps: %+v", name, answer.Jumps)
			}
			continue
		}
		if len(answer.Jumps) != 1 {
			c.Errorf("as %s: jumps %+v", name, answer.Jumps)
			continue
		}
		c.near("jump_position", answer.Jumps[0].Chainage, 5e-3, "the slopes of the bed step there")
		c.near("depth_before_jump", answer.Jumps[0].UpstreamDepth, 1e-4, "the bed changes its slope there by a step, and so the depth")
		c.near("depth_after_jump", answer.Jumps[0].DownstreamDepth, 1e-4, "likewise")
	}
}

// transitionRun passes through critical depth inside; its bed is the published one with the cosine's share, on many short reaches, and so good
// to the tolerance of the depths.
func transitionRun(c *claim) {
	f := c.analytic()
	f.published(c)
	const n = 3000
	// With the cosine the energy's rate is that of h*cos: dz = -Sf - d(h*cos)/dx - d(velocity head)/dx. The slope in it is taken
	// from the published one first and then from itself.
	rise := f.length / n
	slopes := make([]float64, n)
	split := int(math.Round(f.jump / rise))
	depths := make([]float64, n+1)
	for i := range depths {
		depths[i] = f.depth(rise * float64(i))
	}
	cosine := func(i int) float64 { // at node i
		a, b := slopes[max(i-1, 0)], slopes[min(i, n-1)]
		s := (a + b) / 2
		if i == split {
			s = b
		}
		return math.Sqrt(1 - s*s)
	}
	level := flat(*f.channel)
	for range 8 {
		next := make([]float64, n)
		for i := range next {
			a, b := rise*float64(i), rise*float64(i+1)
			ya, yb := depths[i], depths[i+1]
			if i == split {
				a, ya = f.jump*(1+1e-12), f.after
			}
			sa, sm, sb := level.State(ya, f.discharge), level.State(f.depth((a+b)/2), f.discharge), level.State(yb, f.discharge)
			loss := rise * (sa.FrictionSlope + 4*sm.FrictionSlope + sb.FrictionSlope) / 6
			next[i] = (loss + yb*cosine(i+1) + sb.VelocityHead - ya*cosine(i) - sa.VelocityHead) / rise
		}
		copy(slopes, next)
	}
	run := &profile.Run{Discharge: f.discharge, Downstream: profile.Boundary{Kind: profile.Depth, Value: f.depth(f.length)}}
	for _, slope := range slopes {
		channel := *f.channel
		channel.Slope = slope
		run.Reaches = append(run.Reaches, profile.Reach{Channel: channel, Length: rise})
	}
	answer := c.solve(run)
	var got []float64
	for k := range 11 {
		x, best := f.length*float64(k)/10, math.NaN()
		for j := range answer.Stations {
			if p := &answer.Stations[j]; math.Abs(p.Chainage-x) < 1e-6 && !(math.Abs(p.State.Geometry.Depth-f.depth(x)) > math.Abs(best-f.depth(x))) {
				best = p.State.Geometry.Depth
			}
		}
		got = append(got, best)
	}
	c.want("depth_at_nodes", got...)
	// Where the flow passes critical depth on steps of slope it may fall a hair below it and come back.
	jumps := slices.DeleteFunc(slices.Clone(answer.Jumps), func(j profile.Jump) bool { return j.EnergyLoss < 1e-6 })
	if len(jumps) != 1 {
		c.Fatalf("jumps %+v", answer.Jumps)
	}
	c.near("jump_position", jumps[0].Chainage, 0.05, "reaches are 0.03 m long")
	c.near("depth_before_jump", jumps[0].UpstreamDepth, 1e-3, "likewise")
	c.near("depth_after_jump", jumps[0].DownstreamDepth, 4e-3, "the depth rises by a tenth of the distance there")
	var control *profile.Control
	for i := range answer.Controls {
		if answer.Controls[i].Kind == "critical" {
			control = &answer.Controls[i]
		}
	}
	if control == nil || !(math.Abs(control.Chainage-c.given("critical_section")) <= 0.5) {
		c.Errorf("controls %+v, want critical depth at %g", answer.Controls, c.given("critical_section"))
	}
}
