package appraise_test

import (
	"math"
	"math/rand/v2"
	"testing"

	"leat/compute/appraise"
	"leat/compute/flow"
	"leat/compute/friction"
	"leat/compute/section"
)

// spread returns a number spread evenly over orders of magnitude.
func spread(r *rand.Rand, low, high float64) float64 {
	return math.Exp(math.Log(low) + r.Float64()*math.Log(high/low))
}

// linings returns one of each kind that knows everything it needs.
func linings(r *rand.Rand) []appraise.Lining {
	soil := appraise.Soil{Group: appraise.LeanClay, PlasticityIndex: 10 + 20*r.Float64(), VoidRatio: 0.3 + r.Float64(), GrainSize: nan}
	return []appraise.Lining{
		must(appraise.NewShearLimited(spread(r, 5, 500))),
		must(appraise.NewBareSoil(soil)),
		must(appraise.NewBareSoil(appraise.Soil{GrainSize: spread(r, 1e-4, 0.05), PlasticityIndex: nan, VoidRatio: nan})),
		must(appraise.NewVegetation(appraise.Grass{StemHeight: spread(r, 0.03, 0.4), Condition: appraise.Condition(1 + r.IntN(5)), GrowthForm: appraise.GrowthForm(1 + r.IntN(3)), Soil: soil})),
		must(appraise.NewRiprap(appraise.Rock{StoneSize: spread(r, 0.01, 0.5), SpecificGravity: nan, AngleOfRepose: 36 + 6*r.Float64(), Viscosity: nan})),
		must(appraise.NewEarthChannel(appraise.Earth(1+r.IntN(14)), appraise.Load(1+r.IntN(3)))),
	}
}

func randomDitch(r *rand.Rand) section.Section {
	switch r.IntN(5) {
	case 0:
		return must(section.NewTriangular(1.5+3*r.Float64(), 1.5+3*r.Float64()))
	case 1:
		return must(section.NewParabolic(spread(r, 1, 6), spread(r, 0.3, 2)))
	case 2:
		return must(section.NewTwoStage(section.TwoStage{BottomWidth: spread(r, 0.5, 3), LeftSideSlope: 2, RightSideSlope: 1.5, BenchHeight: spread(r, 0.2, 1),
			LeftBenchWidth: r.Float64() * 3, RightBenchWidth: 1, UpperSideSlope: 2}))
	case 3:
		level := 0.1 * r.Float64()
		return must(section.NewSurveyed([][2]float64{{0, 2}, {3, 0.4 + level}, {4, level}, {5, 0}, {5.5, 0.3}, {8, 0.5}, {11, 2.2}}))
	}
	return must(section.NewTrapezoidal(spread(r, 0.3, 4), 1+3*r.Float64(), 1+3*r.Float64()))
}

// TestMoreFlowNeverBearsLess: in channels that widen upwards, more flow runs deeper, with no less shear stress and no more freeboard, and fills no less.
func TestMoreFlowNeverBearsLess(t *testing.T) {
	r := rand.New(rand.NewPCG(4, 1))
	compared := 0
	for range 400 {
		s := must(section.NewTrapezoidal(spread(r, 0.3, 4), 3*r.Float64(), 3*r.Float64()))
		for _, l := range linings(r) {
			a := lined(s, spread(r, 1e-4, 0.04), l)
			a.BendRadius = spread(r, 10, 1000) * float64(r.IntN(2))
			q := spread(r, 0.01, 5)
			more := q * (1 + r.Float64())
			var room, other flow.Room
			before, after := a.Channel.Depths(q, &room), a.Channel.Depths(more, &other)
			if len(before.Normal) != 1 || len(after.Normal) != 1 {
				continue // about a change of formula of stones
			}
			limits := everything
			b, c := a.Judge(q, &before, &limits, appraise.All, nil), a.Judge(more, &after, &limits, appraise.All, nil)
			if stones, own := a.Channel.Law.(*friction.Stones); own && stones.Formula(before.Normal[0]) != stones.Formula(after.Normal[0]) {
				continue
			}
			compared++
			value := func(j appraise.Judgement, c appraise.Criterion) float64 { return j.Findings[c].Value }
			if !math.IsNaN(c.Lining.BedShear) && !(c.Lining.BedShear >= b.Lining.BedShear*(1-0.002)) { // the bend's factor falls by as much at a ratio of 2
				t.Errorf("%T: greatest shear %v at %v, %v at %v", l, b.Lining.BedShear, q, c.Lining.BedShear, more)
			}
			if !(value(c, appraise.GreatestShear) >= value(b, appraise.GreatestShear)) {
				t.Errorf("%T: shear %v at %v, %v at %v", l, value(b, appraise.GreatestShear), q, value(c, appraise.GreatestShear), more)
			}
			if !(value(c, appraise.GreatestFill) >= value(b, appraise.GreatestFill)) {
				t.Errorf("%T: fill falls", l)
			}
			if v := value(b, appraise.LeastFreeboard); !math.IsNaN(v) && b.Findings[appraise.LeastFreeboard].Met == appraise.Yes && !(value(c, appraise.LeastFreeboard) <= v+1e-12) && a.BendRadius == 0 {
				t.Errorf("%T: freeboard rises", l)
			}
		}
	}
	if compared < 1500 {
		t.Errorf("only %d were compared", compared)
	}
}

// TestNumbersDoNotDependOnScale: by Froude's law a channel r times as large, of n r^(1/6) times as large, with r^(5/2) times the discharge, has the same fill,
// Froude and Vedernikov numbers, r times the freeboard and the rise, r times the shear stress.
func TestNumbersDoNotDependOnScale(t *testing.T) {
	r := rand.New(rand.NewPCG(4, 2))
	for range 300 {
		bottom, left, right, slope, n, q := spread(r, 0.2, 5), 3*r.Float64(), 3*r.Float64(), spread(r, 1e-4, 0.3), spread(r, 0.01, 0.1), spread(r, 0.01, 20)
		large := spread(r, 0.1, 10)
		root := math.Sqrt(large)
		build := func(scale, sixth float64) *appraise.Asset {
			return &appraise.Asset{Channel: flow.Channel{Section: must(section.NewTrapezoidal(bottom*scale, left, right)), Law: manning(n * sixth), Slope: slope,
				Gravity: 9.80665, Bank: 3 * scale}, BendRadius: 200 * scale, Lining: must(appraise.NewShearLimited(100 * scale))}
		}
		small, big := findings(t, build(1, 1), q, everything), findings(t, build(large, math.Cbrt(root)), q*large*large*root, everything)
		for c, scale := range map[appraise.Criterion]float64{appraise.GreatestFill: 1, appraise.CriticalBand: 1, appraise.GreatestVedernikovNumber: 1,
			appraise.LeastLiningSafety: 1, appraise.GreatestShear: large, appraise.GreatestVelocity: root} {
			near(t, c.String(), big[c].Value, scale*small[c].Value, 1e-12)
		}
		if f := big[appraise.LeastFreeboard].Value - large*small[appraise.LeastFreeboard].Value; !(math.Abs(f) <= 1e-12*3*large*(1+small[appraise.GreatestFill].Value)) {
			t.Errorf("freeboard %v and %v", big[appraise.LeastFreeboard].Value, small[appraise.LeastFreeboard].Value)
		}
	}
}

// TestWideBendsRiseNothing: the rise is inverse to the radius, so that it vanishes in straight channels; rapid flow rises twice as much as tranquil flow of the same speed.
func TestWideBendsRiseNothing(t *testing.T) {
	c := &flow.Channel{Section: must(section.NewTrapezoidal(3, 1, 1)), Gravity: 9.80665, Slope: 0.01}
	state := c.State(0.8, 3)
	tranquil := appraise.BendRise(c, &state, 50)
	near(t, "rise at a greater radius", appraise.BendRise(c, &state, 50e9), tranquil/1e9, 1e-14)
	if straight := appraise.BendRise(c, &state, math.Inf(1)); straight != 0 {
		t.Errorf("rise %v in a straight channel", straight)
	}
	state.FroudeNumber, state.Regime = 1.5, flow.Supercritical
	near(t, "rapid rise", appraise.BendRise(c, &state, 50), 2*tranquil, 1e-14)
	state.FroudeNumber = nan
	near(t, "rise without a Froude number", appraise.BendRise(c, &state, 50), 2*tranquil, 1e-14)

	a := canal(2)
	straight := findings(t, a, 2, everything)
	a.BendRadius = 1e12
	bent := findings(t, a, 2, everything)
	near(t, "freeboard in a wide bend", bent[appraise.LeastFreeboard].Value, straight[appraise.LeastFreeboard].Value, 1e-11)
	a.BendRadius = 20
	if !(findings(t, a, 2, everything)[appraise.LeastFreeboard].Value < straight[appraise.LeastFreeboard].Value) {
		t.Error("the rise is not taken off the freeboard")
	}
}

// TestFactorsAreContinuous: the published factors meet at the ends of their ranges within their rounding, and run one way.
func TestFactorsAreContinuous(t *testing.T) {
	for _, at := range []float64{2, 10} {
		if jump := math.Abs(appraise.BendFactor(at) - appraise.BendFactor(math.Nextafter(at, 3))); !(jump <= 0.003) {
			t.Errorf("the bend factor jumps by %v at %v", jump, at)
		}
	}
	for _, at := range []float64{1.5, 5} {
		if jump := math.Abs(appraise.SideFactor(at) - appraise.SideFactor(math.Nextafter(at, 3))); !(jump <= 0.0011) {
			t.Errorf("the side factor jumps by %v at %v", jump, at)
		}
	}
	previous, shields, demand := 3.0, 0.0, 0.0
	for x := 0.0; x < 12; x += 0.01 {
		if f := appraise.BendFactor(x); !(f <= previous && f >= 1.05-1e-12) {
			t.Errorf("bend factor %v at %v after %v", f, x, previous)
		} else {
			previous = f
		}
		s, d := appraise.ShieldsNumber(x * 2e4)
		if !(s >= shields && d >= demand && s >= 0.047 && s <= 0.15 && d >= 1 && d <= 1.5) {
			t.Errorf("Shields parameter %v, safety %v", s, d)
		}
		shields, demand = s, d
	}
}

// TestCanalRule: the rule's coefficient neither falls nor jumps.
func TestCanalRule(t *testing.T) {
	before := 0.0
	for q := 0.01; q < 300; q *= 1.02 {
		f := appraise.CanalFreeboard(q, 1.5)
		if !(f >= before && (before == 0 || f < before*1.01)) {
			t.Errorf("freeboard %v at %v after %v", f, q, before)
		}
		before = f
	}
}

// TestUniformFlowOfLinings: on sections of every kind, each normal depth carries the discharge by the lining's law, and none is given where the law has none.
func TestUniformFlowOfLinings(t *testing.T) {
	r := rand.New(rand.NewPCG(4, 3))
	several, none := 0, 0
	for range 700 {
		s := randomDitch(r)
		for _, l := range linings(r) {
			law := must(l.Roughness(s, 9.80665))
			if law == nil {
				continue
			}
			for i, depth := range law.Breaks() {
				if !(depth > 0) || i > 0 && depth <= law.Breaks()[i-1] {
					t.Fatalf("breaks %v", law.Breaks())
				}
			}
			c := flow.Channel{Section: s, Law: law, Slope: spread(r, 1e-3, 0.3), Gravity: 9.80665}
			q := spread(r, 1e-3, 20)
			depths, absent := c.Normal(q, nil)
			switch {
			case len(depths) == 0 && (absent == flow.Unsolved || absent == flow.Present):
				t.Errorf("%T on %T: %v", l, s, absent)
			case len(depths) == 0:
				none++
			case len(depths) > 1:
				several++
			}
			for _, depth := range depths {
				g := s.At(depth)
				here := law.AtSlope(g, c.Slope)
				// As far as the place of the depth decides the discharge.
				if !(math.Abs(here.K*math.Sqrt(c.Slope)-q) <= 1e-12*q*(1+depth*math.Abs(here.Rate)/here.K)) {
					t.Errorf("%T on %T: depth %v carries %v, not %v", l, s, depth, here.K*math.Sqrt(c.Slope), q)
				}
				// The conveyance at this discharge is the same: normal depth is one thing.
				near(t, "conveyance at the discharge", law.AtDischarge(g, here.K*math.Sqrt(c.Slope)).K, here.K, 1e-12)
			}
		}
	}
	t.Logf("%d with several normal depths, %d with none", several, none)
	if several < 20 || none < 20 {
		t.Error("the cases are too tame")
	}
}

// TestNoAllocations holds judging to none.
func TestNoAllocations(t *testing.T) {
	r := rand.New(rand.NewPCG(4, 4))
	room, list := flow.Room{}, make([]appraise.Finding, 0, 10)
	for _, l := range linings(r) {
		a := lined(must(section.NewTrapezoidal(1, 2, 2)), 0.02, l)
		a.BendRadius = 30
		depths := a.Channel.Depths(1, &room)
		limits := everything
		if got := testing.AllocsPerRun(100, func() {
			j := a.Judge(1, &depths, &limits, appraise.All, list)
			var o appraise.Overall
			o.Add(0, j.Findings)
			sink += int(o.Verdict())
		}); got != 0 {
			t.Errorf("%T: %v allocations", l, got)
		}
	}
}

var sink int

// BenchmarkJudge gives the time of all ten criteria for one flow whose depths are known.
func BenchmarkJudge(b *testing.B) {
	r := rand.New(rand.NewPCG(4, 5))
	list := make([]appraise.Finding, 0, 10)
	for i, l := range linings(r) {
		name := []string{"shear_limited", "cohesive", "loose", "vegetation", "riprap", "earth"}[i]
		a := lined(must(section.NewTrapezoidal(1, 2, 2)), 0.02, l)
		limits := everything
		var rooms [64]flow.Room
		var depths [64]flow.Depths
		for k := range depths {
			depths[k] = a.Channel.Depths(0.5+0.05*float64(k), &rooms[k])
		}
		b.Run(name, func(b *testing.B) {
			b.ReportAllocs()
			for i := range b.N {
				j := a.Judge(0.5+0.05*float64(i&63), &depths[i&63], &limits, appraise.All, list)
				sink += len(j.Findings)
			}
		})
		b.Run(name+"/depths", func(b *testing.B) {
			b.ReportAllocs()
			var room flow.Room
			for i := range b.N {
				d := a.Channel.Depths(0.5+0.05*float64(i&63), &room)
				sink += len(d.Normal)
			}
		})
	}
}
