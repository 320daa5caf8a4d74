package friction_test

import (
	"errors"
	"math"
	"math/rand/v2"
	"slices"
	"testing"

	"leat/compute"
	"leat/compute/friction"
	"leat/compute/section"
)

// setting is a law with the section it is bound to.
type setting struct {
	name    string
	section section.Section
	law     friction.Law
}

func settings() []setting {
	trapezoid := ditch{width: 3, left: 1.5, right: 2}
	flood := compound()
	untils := []float64{-2, 2}
	coefficients := []float64{0.05, 0.025, 0.07}
	return []setting{
		{"manning", trapezoid, must(friction.NewManning(0.03))},
		{"strickler", trapezoid, must(friction.NewStrickler(45))},
		{"chezy", trapezoid, must(friction.NewChezy(50))},
		{"sand_roughness", trapezoid, must(friction.NewSandRoughness(0.003, 1.14e-6, 9.80665))},
		{"sand_roughness_viscous", trapezoid, must(friction.NewSandRoughness(1e-6, 1e-2, 9.80665))},
		{"grass", trapezoid, must(friction.NewGrass(0.142, 9.80665))},
		{"stones", trapezoid, must(friction.NewStones(0.4, 9.80665, trapezoid))},
		{"stones_in_triangle", ditch{left: 2, right: 2}, must(friction.NewStones(0.1, 9.80665, ditch{left: 2, right: 2}))},
		{"manning_by_depth", trapezoid, must(friction.NewManningByDepth([][2]float64{{0.2, 0.08}, {1, 0.04}, {3, 0.03}}))},
		{"bed_and_sides_horton_einstein", trapezoid, must(friction.NewBedAndSides(trapezoid, 0.025, 0.06, friction.HortonEinstein))},
		{"bed_and_sides_pavlovskii", trapezoid, must(friction.NewBedAndSides(trapezoid, 0.025, 0.06, friction.Pavlovskii))},
		{"zones_divided", flood, must(friction.NewZones(flood, untils, coefficients, friction.Divided))},
		{"zones_horton_einstein", flood, must(friction.NewZones(flood, untils, coefficients, friction.HortonEinstein))},
		{"zones_lotter", flood, must(friction.NewZones(flood, untils, coefficients, friction.Lotter))},
		{"zones_pavlovskii", flood, must(friction.NewZones(flood, untils, coefficients, friction.Pavlovskii))},
	}
}

// slope5 is the derivative by the central difference of fourth order.
func slope5(f func(float64) float64, x, h float64) float64 {
	return (8*(f(x+h)-f(x-h)) - (f(x+2*h) - f(x-2*h))) / (12 * h)
}

// TestRatesAreDerivatives compares every rate with differences of the value itself.
func TestRatesAreDerivatives(t *testing.T) {
	for _, s := range settings() {
		t.Run(s.name, func(t *testing.T) {
			for _, depth := range []float64{0.011, 0.1, 0.35, 0.9, 1.49, 1.51, 1.53, 1.7, 2.4, 2.9, 3.3, 8} {
				h := depth * 1e-4
				at := func(y float64) section.Geometry { return s.section.At(y) }
				g := at(depth)
				type pair struct {
					what       string
					value      func(float64) float64
					rate, size float64
				}
				bySlope, byDischarge, c := s.law.AtSlope(g, 0.002), s.law.AtDischarge(g, 2.5), s.law.Coefficients(g)
				for _, p := range []pair{
					{"K at slope", func(y float64) float64 { return s.law.AtSlope(at(y), 0.002).K }, bySlope.Rate, bySlope.K / depth},
					{"K at discharge", func(y float64) float64 { return s.law.AtDischarge(at(y), 2.5).K }, byDischarge.Rate, byDischarge.K / depth},
					{"alpha", func(y float64) float64 { return s.law.Coefficients(at(y)).Energy }, c.EnergyRate, c.Energy / depth},
					{"beta", func(y float64) float64 { return s.law.Coefficients(at(y)).Momentum }, c.MomentumRate, c.Momentum / depth},
				} {
					near(t, p.what+" rate", p.rate, slope5(p.value, depth, h), 1e-8, p.size)
				}
			}
		})
	}
}

// TestLawsAgreeWhereTheyMustBeEqual relates laws that say the same.
func TestLawsAgreeWhereTheyMustBeEqual(t *testing.T) {
	random := rand.New(rand.NewPCG(1, 1))
	for range 300 {
		n := math.Sqrt(random.Float64())*0.2 + 0.005
		trapezoid := ditch{width: random.Float64() * 5, left: random.Float64() * 3, right: 0.1 + random.Float64()*3}
		flood := compound()
		depth := 3*random.Float64() + 1e-6
		g, f := trapezoid.At(depth), flood.At(depth)
		manning := must(friction.NewManning(n))
		want, wantFlood := manning.AtSlope(g, 0.01), manning.AtSlope(f, 0.01)
		same := func(what string, got, want friction.Conveyance) {
			t.Helper()
			near(t, what+" K", got.K, want.K, 1e-14, 0)
			near(t, what+" rate", got.Rate, want.Rate, 1e-13, want.K/depth)
		}
		same("strickler", must(friction.NewStrickler(1/n)).AtSlope(g, 0.01), want)
		same("by depth", must(friction.NewManningByDepth([][2]float64{{0.5, n}, {2, n}})).AtSlope(g, 0.01), want)
		same("one row", must(friction.NewManningByDepth([][2]float64{{0, n}})).AtSlope(g, 0.01), want)
		for _, how := range []friction.Combination{friction.HortonEinstein, friction.Pavlovskii} {
			same(how.String()+" of equals", must(friction.NewBedAndSides(trapezoid, n, n, how)).AtSlope(g, 0.01), want)
			same(how.String()+" zones of equals", must(friction.NewZones(flood, []float64{-2, 2}, []float64{n, n, n}, how)).AtSlope(f, 0.01), wantFlood)
			if c := must(friction.NewZones(flood, []float64{-2, 2}, []float64{n, 2 * n, n}, how)).Coefficients(f); c != (friction.Coefficients{Energy: 1, Momentum: 1}) {
				t.Errorf("%v as one section has coefficients %v", how, c)
			}
		}
		single := must(friction.NewZones(whole{parts: []section.Section{trapezoid}}, nil, []float64{n}, friction.Divided))
		same("single zone", single.AtSlope(g, 0.01), want)
		c := single.Coefficients(g)
		near(t, "alpha of a single zone", c.Energy, 1, 0, 0)
		near(t, "alpha's rate of a single zone", c.EnergyRate, 0, 1e-13, 1/depth)
		near(t, "beta of a single zone", c.Momentum, 1, 0, 0)
		divided := must(friction.NewZones(flood, []float64{-2, 2}, []float64{n, 0.03, 0.1}, friction.Divided))
		lotter := must(friction.NewZones(flood, []float64{-2, 2}, []float64{n, 0.03, 0.1}, friction.Lotter))
		if divided.AtSlope(f, 0.1) != lotter.AtSlope(f, 0.1) || divided.Coefficients(f) != lotter.Coefficients(f) {
			t.Error("lotter differs from divided")
		}
		// Cauchy's inequality: velocity coefficients are at least 1, and alpha - 1 exceeds beta - 1.
		if c := divided.Coefficients(f); !(c.Energy >= c.Momentum-1e-15 && c.Momentum >= 1-1e-15) {
			t.Errorf("coefficients %v", c)
		}
		// A wider flood plain combined as one stands between its roughest and smoothest zone.
		for _, how := range []friction.Combination{friction.HortonEinstein, friction.Pavlovskii} {
			k := must(friction.NewZones(flood, []float64{-2, 2}, []float64{0.02, 0.05, 0.1}, how)).AtSlope(f, 0.1).K
			smooth, rough := must(friction.NewManning(0.02)).AtSlope(f, 0.1).K, must(friction.NewManning(0.1)).AtSlope(f, 0.1).K
			if !(k <= smooth*(1+1e-14) && k >= rough*(1-1e-14)) {
				t.Errorf("%v: %g outside %g to %g", how, k, rough, smooth)
			}
		}
	}
}

// TestSlopeAndDischargeAreOneLaw checks Colebrook and White both ways: the discharge that a slope gives has that friction slope.
func TestSlopeAndDischargeAreOneLaw(t *testing.T) {
	random := rand.New(rand.NewPCG(2, 1))
	spread := func(low, high float64) float64 {
		return math.Exp(math.Ln10 * (low + (high-low)*random.Float64()))
	}
	compared := 0
	for range 20000 {
		law := must(friction.NewSandRoughness(spread(-7, 0), spread(-7, -3), 9.80665)).(friction.SandRoughness)
		g := ditch{width: spread(-2, 2), left: 1, right: 1}.At(spread(-3, 1))
		slope := spread(-8, -0.01)
		lack := 1 - law.Argument(g, slope)
		k := law.AtSlope(g, slope)
		if (k.K > 0) != (lack > 0) && math.Abs(lack) > 1e-15 {
			t.Fatalf("argument %g and conveyance %g", 1-lack, k.K)
		}
		if lack < 1e-9 {
			continue
		}
		compared++
		discharge := k.K * math.Sqrt(slope)
		near(t, "K", law.AtDischarge(g, discharge).K, k.K, 1e-14/lack, 0)
	}
	if compared < 10000 {
		t.Errorf("only %d compared", compared)
	}
}

// TestNoConveyance checks where Colebrook and White give none, and that nothing there is NaN.
func TestNoConveyance(t *testing.T) {
	law := must(friction.NewSandRoughness(1.48, 1.14e-6, 9.80665)).(friction.SandRoughness)
	near(t, "least radius", law.LeastRadius(), 0.1, 1e-15, 0)
	shallow := section.Geometry{Depth: 0.09999, Area: 0.09999, Perimeter: 1, TopWidth: 1}
	deep := section.Geometry{Depth: 0.11, Area: 0.11, Perimeter: 1, TopWidth: 1}
	if law.AtDischarge(shallow, 1) != (friction.Conveyance{}) || law.AtSlope(shallow, 0.1) != (friction.Conveyance{}) || !(law.Argument(shallow, 0.1) >= 1) {
		t.Error("conveyance where the roughness is as large as the flow")
	}
	if !(law.AtDischarge(deep, 1).K > 0) || !(law.AtSlope(deep, 0.1).K > 0) || !(law.Argument(deep, 0.1) < 1) {
		t.Error("no conveyance just above")
	}
	// So slow that only viscosity counts: none at a slope, but always one at a discharge.
	smooth := must(friction.NewSandRoughness(1e-9, 1e-2, 9.80665)).(friction.SandRoughness)
	film := section.Geometry{Depth: 1e-3, Area: 1e-3, Perimeter: 1, TopWidth: 1}
	if smooth.AtSlope(film, 1e-4).K != 0 || !(smooth.Argument(film, 1e-4) >= 1) || !(smooth.AtDischarge(film, 1e-9).K > 0) {
		t.Error("viscous film")
	}
	for _, s := range settings() {
		for _, g := range []section.Geometry{{}, {Depth: 1}} {
			for _, k := range []friction.Conveyance{s.law.AtSlope(g, 0.1), s.law.AtDischarge(g, 1)} {
				if k != (friction.Conveyance{}) {
					t.Errorf("%s: dry section has %v", s.name, k)
				}
			}
			if c := s.law.Coefficients(g); c != (friction.Coefficients{Energy: 1, Momentum: 1}) {
				t.Errorf("%s: dry section has %v", s.name, c)
			}
		}
	}
	if _, exists := friction.DarcyFactor(1e5, 3.7); exists {
		t.Error("friction factor at a relative roughness of 3.7")
	}
	if _, exists := friction.DarcyFactor(math.NaN(), 0.01); exists {
		t.Error("friction factor at NaN")
	}
}

// TestColebrookConvergesInAHandfulOfSteps counts Newton's steps over the whole plane and checks the equation there.
func TestColebrookConvergesInAHandfulOfSteps(t *testing.T) {
	most, sum, count := 0, 0, 0
	roughs := []float64{0}
	for e := -15.0; e < 0; e += 0.25 {
		roughs = append(roughs, math.Exp(e*math.Ln10), 1-math.Exp(e*math.Ln10))
	}
	for _, rough := range roughs {
		for e := -14.0; e < 14; e += 0.05 {
			smooth := math.Exp(e * math.Ln10)
			x, steps := friction.Colebrook(rough, 1-rough, smooth)
			most, sum, count = max(most, steps), sum+steps, count+1
			if !(x > 0) {
				t.Fatalf("rough %g, smooth %g: %g", rough, smooth, x)
			}
			argument := rough + smooth*x
			log := math.Log(argument)
			if argument > 0.5 {
				log = math.Log1p(smooth*x - (1 - rough))
			}
			residual := x + 2/math.Ln10*log
			if !(math.Abs(residual) <= 4e-15*math.Max(x, 2/math.Ln10*smooth*x/argument)) {
				t.Errorf("rough %g, smooth %g: residual %g at %g", rough, smooth, residual, x)
			}
		}
	}
	t.Logf("%d points, %d steps at most, %.2f on average", count, most, float64(sum)/float64(count))
	if most > 6 {
		t.Errorf("%d steps", most)
	}
}

// TestManningByDepth checks the interpolation itself.
func TestManningByDepth(t *testing.T) {
	law := must(friction.NewManningByDepth([][2]float64{{0, 0.1}, {0.5, 0.06}, {2, 0.03}})).(*friction.ManningByDepth)
	for _, row := range []struct{ depth, n, rate float64 }{
		{1e-9, 0.1 - 0.08e-9, -0.08}, {0.25, 0.08, -0.08}, {0.5, 0.06, -0.08}, {0.8, 0.054, -0.02}, {2, 0.03, -0.02}, {2.1, 0.03, 0}, {900, 0.03, 0},
	} {
		n, rate := law.Coefficient(row.depth)
		near(t, "n", n, row.n, 1e-15, 0)
		near(t, "dn/dy", rate, row.rate, 1e-14, 0)
	}
	if n, _ := law.Coefficient(0.5); n != 0.06 {
		t.Errorf("at a row n = %v", n)
	}
	if want := []float64{0.5, 2}; !slices.Equal(law.Breaks(), want) {
		t.Errorf("Breaks() = %v, want %v", law.Breaks(), want)
	}
}

// TestNearlyDryZone floods a level plain by less and less: the coefficients tend to those of the main channel alone, the rates stay finite.
func TestNearlyDryZone(t *testing.T) {
	flood := compound()
	law := must(friction.NewZones(flood, []float64{-2, 2}, []float64{0.05, 0.025, 0.07}, friction.Divided))
	below, belowC := law.AtSlope(flood.At(1.5), 0.01), law.Coefficients(flood.At(1.5))
	if belowC.Energy != 1 || belowC.Momentum != 1 {
		t.Errorf("main channel alone: %v", belowC)
	}
	for film := 1e-3; film > 1e-14; film /= 10 {
		g := flood.At(1.5 + film)
		k, c := law.AtSlope(g, 0.01), law.Coefficients(g)
		if math.IsNaN(c.EnergyRate) || math.IsInf(c.EnergyRate, 0) || math.IsNaN(k.Rate) || math.IsInf(k.Rate, 0) {
			t.Errorf("film %g: %v %v", film, k, c)
		}
		near(t, "K", k.K, below.K, 10*film, 0)
		near(t, "alpha", c.Energy, 1, 100*film, 0)
		near(t, "beta", c.Momentum, 1, 100*film, 0)
	}
}

// TestExtremes checks that sizes far beyond any channel overflow nothing.
func TestExtremes(t *testing.T) {
	for _, size := range []float64{1e-60, 1e-30, 1e30, 1e60} {
		parts := []section.Section{still{section.Geometry{Depth: size, Area: size * size, Perimeter: 3 * size, TopWidth: size, PerimeterRate: 2}},
			still{section.Geometry{Depth: size, Area: size * size / 2, Perimeter: 2 * size, TopWidth: size, PerimeterRate: 1}}}
		w := whole{parts: parts}
		g := w.At(size)
		for _, n := range [][]float64{{1e-6, 1e3}, {1e3, 1e-6}, {0.03, 0.03}} {
			c := must(friction.NewZones(w, []float64{0}, n, friction.Divided)).Coefficients(g)
			for _, x := range []float64{c.Energy, c.Momentum, c.EnergyRate * size, c.MomentumRate * size} {
				if math.IsNaN(x) || math.Abs(x) > 100 {
					t.Errorf("size %g, n %v: %v", size, n, c)
				}
			}
		}
	}
}

// TestRefusals pins which member breaks which rule, all of them at once.
func TestRefusals(t *testing.T) {
	nan, inf := math.NaN(), math.Inf(1)
	flood := compound()
	pipe, err := section.NewCircular(1)
	if err != nil {
		t.Fatal(err)
	}
	failing := flood
	failing.parting = compute.Faults{{Member: "1", Code: "outside"}}
	for _, row := range []struct {
		name string
		err  error
		want []string
	}{
		{"manning 0", second(friction.NewManning(0)), []string{"manning not_positive"}},
		{"manning negative", second(friction.NewManning(-0.03)), []string{"manning not_positive"}},
		{"manning NaN", second(friction.NewManning(nan)), []string{"manning not_finite"}},
		{"manning wild", second(friction.NewManning(1.1e3)), []string{"manning out_of_range"}},
		{"manning tiny", second(friction.NewManning(9e-7)), []string{"manning out_of_range"}},
		{"strickler", second(friction.NewStrickler(inf)), []string{"strickler not_finite"}},
		{"chezy", second(friction.NewChezy(2e6)), []string{"chezy out_of_range"}},
		{"grass", second(friction.NewGrass(0, nan)), []string{"grass_roughness not_positive", "gravity not_finite"}},
		{"stones", second(friction.NewStones(-1, 0, ditch{width: 1})), []string{"stone_size not_positive", "gravity not_positive"}},
		{"stones in a pipe", second(friction.NewStones(0.2, 9.8, pipe)), []string{" closed_section"}},
		{"sand", second(friction.NewSandRoughness(0, 2, nan)), []string{"sand_roughness not_positive", "kinematic_viscosity out_of_range", "gravity not_finite"}},
		{"no rows", second(friction.NewManningByDepth(nil)), []string{"manning_by_depth empty"}},
		{"rows", second(friction.NewManningByDepth([][2]float64{{-1, 0.03}, {1, 0}, {1, 0.03}, {nan, inf}, {inf, 0.1}, {1e101, 0.1}})),
			[]string{"manning_by_depth/0/0 negative", "manning_by_depth/1/1 not_positive", "manning_by_depth/2/0 not_rising", "manning_by_depth/3/0 not_finite", "manning_by_depth/3/1 not_finite", "manning_by_depth/4/0 not_finite", "manning_by_depth/5/0 out_of_range"}},
		{"bed and sides", second(friction.NewBedAndSides(ditch{}, 0, nan, friction.Divided)), []string{"bed/manning not_positive", "sides/manning not_finite", "combine unknown_rule"}},
		{"bed and sides lotter", second(friction.NewBedAndSides(ditch{}, 0.1, 0.1, friction.Lotter)), []string{"combine unknown_rule"}},
		{"zones count", second(friction.NewZones(flood, []float64{1}, []float64{0.1, 0, 0.1}, friction.Divided)), []string{"zones/1/manning not_positive", "zones wrong_count"}},
		{"zones none", second(friction.NewZones(flood, nil, nil, friction.Divided)), []string{"zones wrong_count"}},
		{"zones parting", second(friction.NewZones(failing, []float64{1, 99}, []float64{0.1, nan, 0.1}, 9)), []string{"combine unknown_rule", "zones/1/manning not_finite", "zones/1/until outside"}},
	} {
		t.Run(row.name, func(t *testing.T) {
			var faults compute.Faults
			if !errors.As(row.err, &faults) {
				t.Fatalf("error %v", row.err)
			}
			var got []string
			for _, fault := range faults {
				got = append(got, fault.Member+" "+fault.Code)
				if fault.Detail == "" && fault.Code != "outside" {
					t.Errorf("%s has no detail", fault.Member)
				}
			}
			if !slices.Equal(got, row.want) {
				t.Errorf("got %q, want %q", got, row.want)
			}
		})
	}
	odd := flood
	odd.parting = errors.New("odd")
	if _, err := friction.NewZones(odd, []float64{-2, 2}, []float64{0.1, 0.1, 0.1}, friction.Divided); err == nil || err.Error() != "odd" {
		t.Errorf("error %v", err)
	}
	for _, edge := range []error{second(friction.NewManning(1e-6)), second(friction.NewManning(1e3)), second(friction.NewStrickler(1e-3)), second(friction.NewChezy(1e6))} {
		if edge != nil {
			t.Error(edge)
		}
	}
}

func second(_ friction.Law, err error) error { return err }

// TestBreaksOfZones checks that only depths are told that the section does not know itself.
func TestBreaksOfZones(t *testing.T) {
	w := whole{breaks: []float64{1, 3}, parts: []section.Section{
		ditch{width: 1, breaks: []float64{1, 2}}, ditch{width: 1, breaks: []float64{0.5, 2, 3}},
	}}
	law := must(friction.NewZones(w, []float64{0}, []float64{0.1, 0.1}, friction.Divided))
	if want := []float64{0.5, 2}; !slices.Equal(law.Breaks(), want) {
		t.Errorf("Breaks() = %v, want %v", law.Breaks(), want)
	}
}

// TestForms checks the promises on which solvers build.
func TestForms(t *testing.T) {
	want := map[string]friction.Form{"manning": friction.Manning, "strickler": friction.Manning, "chezy": friction.Chezy,
		"sand_roughness": friction.Whole, "sand_roughness_viscous": friction.Whole, "grass": friction.Whole}
	for _, s := range settings() {
		if s.law.Form() != want[s.name] {
			t.Errorf("%s: form %v", s.name, s.law.Form())
		}
		if divided := s.name == "zones_divided" || s.name == "zones_lotter"; friction.UnitCoefficients(s.law) == divided {
			t.Errorf("%s: unit coefficients %v", s.name, !divided)
		}
		power, isPower := s.law.(friction.Power)
		if isPower != (s.law.Form() == friction.Manning || s.law.Form() == friction.Chezy) {
			t.Errorf("%s: Power %v", s.name, isPower)
		}
		if isPower {
			g := s.section.At(0.7)
			near(t, s.name, power.C*g.Area*math.Exp(power.Exponent()*math.Log(g.Radius())), s.law.AtSlope(g, 0.1).K, 1e-14, 0)
		}
	}
}

// TestNoAllocations holds every evaluation to none.
func TestNoAllocations(t *testing.T) {
	for _, s := range settings() {
		g := s.section.At(1.7)
		allocations := testing.AllocsPerRun(100, func() {
			sink += s.law.AtSlope(g, 0.002).K + s.law.AtDischarge(g, 2.5).K + s.law.Coefficients(g).Energy
		})
		if allocations != 0 {
			t.Errorf("%s: %v allocations", s.name, allocations)
		}
	}
	if !(sink > 0) {
		t.Error("nothing was computed")
	}
}

var sink float64

// BenchmarkLaw gives the time of one conveyance with its derivative, over 256 depths.
func BenchmarkLaw(b *testing.B) {
	for _, s := range settings() {
		var geometries [256]section.Geometry
		for i := range geometries {
			geometries[i] = s.section.At(0.05 + float64(i)*0.01)
		}
		b.Run(s.name+"/slope", func(b *testing.B) {
			b.ReportAllocs()
			slope := 0.002
			for i := range b.N {
				k := s.law.AtSlope(geometries[i&255], slope)
				slope = 0.002 + 1e-300*k.K
				sink += k.Rate
			}
		})
		b.Run(s.name+"/discharge", func(b *testing.B) {
			b.ReportAllocs()
			discharge := 2.5
			for i := range b.N {
				k := s.law.AtDischarge(geometries[i&255], discharge)
				discharge = 2.5 + 1e-300*k.K
				sink += k.Rate
			}
		})
		if s.law.Coefficients(s.section.At(2)) != (friction.Coefficients{Energy: 1, Momentum: 1}) {
			b.Run(s.name+"/coefficients", func(b *testing.B) {
				for i := range b.N {
					sink += s.law.Coefficients(geometries[i&255]).EnergyRate
				}
			})
		}
	}
}

// TestEveryLawIsFiniteEverywhere walks far beyond what occurs: no answer is NaN or infinite, and no conveyance negative.
func TestEveryLawIsFiniteEverywhere(t *testing.T) {
	random := rand.New(rand.NewPCG(3, 1))
	spread := func(low, high float64) float64 {
		return math.Exp(math.Ln10 * (low + (high-low)*random.Float64()))
	}
	for range 20000 {
		n := []float64{spread(-6, 3), spread(-6, 3), spread(-6, 3)}
		size := spread(-40, 40)
		var parts []section.Section
		for range n {
			parts = append(parts, still{section.Geometry{Depth: size, Area: size * size * spread(-20, 3), Perimeter: size * spread(-3, 3), TopWidth: size * spread(-9, 3), PerimeterRate: spread(-3, 9)}})
		}
		w := whole{parts: parts}
		g := w.At(size)
		laws := []friction.Law{
			must(friction.NewManning(n[0])), must(friction.NewChezy(spread(-3, 6))),
			must(friction.NewSandRoughness(spread(-12, 4), spread(-9, 0), spread(-3, 4))),
			must(friction.NewManningByDepth([][2]float64{{size / 2, n[0]}, {size * 1.5, n[1]}})),
			must(friction.NewBedAndSides(bedded{still{g}, g.Perimeter * random.Float64()}, n[0], n[1], friction.HortonEinstein)),
			must(friction.NewBedAndSides(bedded{still{g}, g.Perimeter * random.Float64()}, n[0], n[1], friction.Pavlovskii)),
			must(friction.NewZones(w, []float64{-1, 1}, n, friction.Divided)),
			must(friction.NewZones(w, []float64{-1, 1}, n, friction.HortonEinstein)),
			must(friction.NewZones(w, []float64{-1, 1}, n, friction.Pavlovskii)),
		}
		for _, law := range laws {
			slope, discharge := spread(-100, -0.001), spread(-100, 100)
			for _, k := range []friction.Conveyance{law.AtSlope(g, slope), law.AtDischarge(g, discharge)} {
				if !(k.K >= 0) || math.IsInf(k.K, 0) || math.IsNaN(k.Rate) || math.IsInf(k.Rate, 0) {
					t.Fatalf("%T: %v at %+v, slope %g, discharge %g", law, k, g, slope, discharge)
				}
			}
			c := law.Coefficients(g)
			for _, x := range []float64{c.Energy, c.EnergyRate, c.Momentum, c.MomentumRate} {
				if math.IsNaN(x) || math.IsInf(x, 0) {
					t.Fatalf("%T: %v at %+v", law, c, g)
				}
			}
		}
	}
}
