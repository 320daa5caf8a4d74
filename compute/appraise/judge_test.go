package appraise_test

import (
	"math"
	"strings"
	"testing"

	"leat/compute/appraise"
	"leat/compute/flow"
	"leat/compute/friction"
	"leat/compute/section"
)

var nan = math.NaN()

// everything holds every criterion, with limits that a moderate channel meets.
var everything = appraise.Limits{Given: appraise.All, LeastFreeboard: 0.1, FreeboardRule: appraise.Canal, GreatestFill: 0.85, LeastVelocity: 0.3, GreatestVelocity: 3,
	LeastShear: 1, GreatestShear: 100, CriticalBand: [2]float64{0.86, 1.13}, GreatestVedernikovNumber: 1, LeastLiningSafety: 1}

// findings judges a discharge and returns the findings by criterion.
func findings(t *testing.T, a *appraise.Asset, discharge float64, limits appraise.Limits) map[appraise.Criterion]appraise.Finding {
	t.Helper()
	var room flow.Room
	depths := a.Channel.Depths(discharge, &room)
	judgement := a.Judge(discharge, &depths, &limits, appraise.All, nil)
	found := map[appraise.Criterion]appraise.Finding{}
	for i, f := range judgement.Findings {
		if i > 0 && f.Criterion <= judgement.Findings[i-1].Criterion {
			t.Errorf("%v comes after %v", f.Criterion, judgement.Findings[i-1].Criterion)
		}
		if f.Met == appraise.Unknown && f.Reason.Code == "" {
			t.Errorf("%v is unknown without a reason", f.Criterion)
		}
		if f.Met == appraise.Yes && (math.IsNaN(f.Value) || math.IsNaN(f.Limit)) {
			t.Errorf("%v is met by %v against %v", f.Criterion, f.Value, f.Limit)
		}
		if f.Reason.Code != "" && (strings.ToLower(f.Reason.Code) != f.Reason.Code || !strings.HasSuffix(f.Reason.Detail, ".")) {
			t.Errorf("%v: reason %+v", f.Criterion, f.Reason)
		}
		found[f.Criterion] = f
	}
	return found
}

func manning(n float64) friction.Law { return must(friction.NewManning(n)) }

func canal(bank float64) *appraise.Asset {
	return &appraise.Asset{Channel: flow.Channel{Section: must(section.NewTrapezoidal(2, 1.5, 1.5)), Law: manning(0.025), Slope: 0.001, Gravity: 9.80665, Bank: bank},
		Lining: must(appraise.NewShearLimited(20))}
}

func pipe() *appraise.Asset {
	return &appraise.Asset{Channel: flow.Channel{Section: must(section.NewCircular(0.6)), Law: manning(0.013), Slope: 0.002, Gravity: 9.80665}}
}

// TestJudgements walks through the cases of which each criterion tells: what is expected as criterion, met and reason, "-" for anything else.
func TestJudgements(t *testing.T) {
	table := must(section.NewTabulated([][4]float64{{0.5, 0.5, 2, 1}, {1, 1, 3, 1}}))
	for _, row := range []struct {
		name      string
		asset     func() *appraise.Asset
		discharge float64
		limits    func(l *appraise.Limits)
		want      map[appraise.Criterion]string
	}{
		{name: "a canal that is good enough", asset: func() *appraise.Asset { return canal(2) }, discharge: 2, want: map[appraise.Criterion]string{
			appraise.LeastFreeboard: "yes ", appraise.FreeboardRule: "yes ", appraise.GreatestFill: "yes ", appraise.LeastVelocity: "yes ", appraise.GreatestVelocity: "yes ",
			appraise.LeastShear: "yes ", appraise.GreatestShear: "yes ", appraise.CriticalBand: "yes ", appraise.GreatestVedernikovNumber: "yes ", appraise.LeastLiningSafety: "yes "}},
		{name: "an overtopped canal", asset: func() *appraise.Asset { return canal(0.4) }, discharge: 4, limits: func(l *appraise.Limits) { l.LeastFreeboard, l.GreatestFill = 0, 5 },
			want: map[appraise.Criterion]string{appraise.LeastFreeboard: "no overtopped", appraise.FreeboardRule: "no overtopped", appraise.GreatestFill: "no overtopped",
				appraise.LeastVelocity: "yes ", appraise.GreatestVelocity: "yes "}},
		{name: "a canal without a known bank", asset: func() *appraise.Asset { return canal(0) }, discharge: 2, want: map[appraise.Criterion]string{
			appraise.LeastFreeboard: "unknown missing_bank_height", appraise.FreeboardRule: "unknown missing_bank_height", appraise.GreatestFill: "unknown missing_bank_height",
			appraise.LeastVelocity: "yes "}},
		{name: "a canal without roughness", asset: func() *appraise.Asset {
			a := canal(2)
			a.Channel.Law = manning(0.025)
			a.Lining = nil
			return a
		}, discharge: 2, want: map[appraise.Criterion]string{appraise.LeastLiningSafety: "unknown missing_lining", appraise.LeastVelocity: "yes "}},
		{name: "a level bed", asset: func() *appraise.Asset {
			a := canal(2)
			a.Channel.Slope = 0
			return a
		}, discharge: 2, want: map[appraise.Criterion]string{
			appraise.LeastFreeboard: "unknown horizontal_bed", appraise.FreeboardRule: "unknown horizontal_bed", appraise.GreatestFill: "unknown horizontal_bed",
			appraise.LeastVelocity: "unknown horizontal_bed", appraise.GreatestVelocity: "unknown horizontal_bed", appraise.LeastShear: "unknown horizontal_bed",
			appraise.GreatestShear: "unknown horizontal_bed", appraise.CriticalBand: "unknown horizontal_bed", appraise.GreatestVedernikovNumber: "unknown horizontal_bed",
			appraise.LeastLiningSafety: "unknown horizontal_bed"}},
		{name: "an adverse bed", asset: func() *appraise.Asset {
			a := canal(2)
			a.Channel.Slope = -0.001
			return a
		}, discharge: 2, want: map[appraise.Criterion]string{appraise.LeastFreeboard: "unknown adverse_bed", appraise.CriticalBand: "unknown adverse_bed"}},
		{name: "a pipe", asset: pipe, discharge: 0.1, want: map[appraise.Criterion]string{
			appraise.LeastFreeboard: "yes ", appraise.FreeboardRule: "unknown not_applicable", appraise.GreatestFill: "yes ", appraise.CriticalBand: "yes ",
			appraise.GreatestVedernikovNumber: "yes ", appraise.LeastLiningSafety: "unknown not_applicable"}},
		{name: "a surcharged pipe", asset: pipe, discharge: 0.8, limits: func(l *appraise.Limits) { l.LeastFreeboard, l.GreatestFill = 0, 1 }, want: map[appraise.Criterion]string{
			appraise.LeastFreeboard: "no surcharged", appraise.FreeboardRule: "unknown not_applicable", appraise.GreatestFill: "no surcharged",
			appraise.LeastVelocity: "yes surcharged", appraise.GreatestVelocity: "yes surcharged", appraise.LeastShear: "yes surcharged", appraise.GreatestShear: "yes surcharged",
			appraise.CriticalBand: "unknown full", appraise.GreatestVedernikovNumber: "unknown full", appraise.LeastLiningSafety: "unknown not_applicable"}},
		{name: "a pipe in a bend", asset: func() *appraise.Asset {
			a := pipe()
			a.BendRadius = 20
			return a
		}, discharge: 0.1, want: map[appraise.Criterion]string{appraise.LeastFreeboard: "unknown bend_in_closed_section", appraise.FreeboardRule: "unknown not_applicable",
			appraise.GreatestFill: "yes "}},
		{name: "a canal in too tight a bend", asset: func() *appraise.Asset {
			a := canal(2)
			a.BendRadius = 1
			return a
		}, discharge: 2, want: map[appraise.Criterion]string{appraise.LeastFreeboard: "unknown bend_too_tight", appraise.LeastLiningSafety: "unknown bend_too_tight",
			appraise.GreatestFill: "yes "}},
		{name: "beyond the last row of a table", asset: func() *appraise.Asset {
			return &appraise.Asset{Channel: flow.Channel{Section: table, Law: manning(0.02), Slope: 0.001, Gravity: 9.80665}}
		}, discharge: 50, want: map[appraise.Criterion]string{appraise.LeastFreeboard: "no overtopped", appraise.GreatestFill: "no overtopped",
			appraise.LeastVelocity: "unknown beyond_table"}},
	} {
		t.Run(row.name, func(t *testing.T) {
			limits := everything
			if row.limits != nil {
				row.limits(&limits)
			}
			found := findings(t, row.asset(), row.discharge, limits)
			for criterion, want := range row.want {
				f := found[criterion]
				if got := f.Met.String() + " " + f.Reason.Code; got != want {
					t.Errorf("%v is %q (%v against %v), want %q", criterion, got, f.Value, f.Limit, want)
				}
			}
		})
	}
}

// A surcharged conduit's velocity and shear stress are those of full flow.
func TestSurchargedValues(t *testing.T) {
	a := pipe()
	const discharge = 0.8
	found := findings(t, a, discharge, everything)
	area := math.Pi * 0.3 * 0.3
	near(t, "velocity", found[appraise.LeastVelocity].Value, discharge/area, 1e-14)
	slope := a.Channel.FullFrictionSlope(discharge)
	near(t, "shear", found[appraise.LeastShear].Value, 1000*9.80665*0.15*slope, 1e-14)
	if f := found[appraise.LeastFreeboard]; f.Value != 0 {
		t.Errorf("freeboard %v", f.Value)
	}
	if f := found[appraise.GreatestFill]; f.Value != 1 {
		t.Errorf("fill %v", f.Value)
	}
}

// A conduit rougher than it is wide lets nothing through: its shear stress is not known, and it is said why.
func TestNoConveyance(t *testing.T) {
	a := pipe()
	a.Channel.Law = must(friction.NewSandRoughness(100, 1.14e-6, 9.80665))
	found := findings(t, a, 0.1, everything)
	if f := found[appraise.LeastShear]; f.Met != appraise.Unknown || f.Reason.Code != "no_conveyance" {
		t.Errorf("shear: %v %v", f.Met, f.Reason)
	}
	if f := found[appraise.GreatestFill]; f.Met != appraise.No || f.Reason.Code != "surcharged" {
		t.Errorf("fill: %v %v", f.Met, f.Reason)
	}
}

// The rules of freeboard are worked out from the flow that is judged: depth, and discharge of one barrel or velocity.
func TestRulesOfFreeboard(t *testing.T) {
	a := canal(2)
	a.Channel.Slope, a.Channel.Barrels = 0.05, 2
	limits := everything
	depth := must2(a.Channel.Normal(8, nil))
	near(t, "canal", findings(t, a, 8, limits)[appraise.FreeboardRule].Limit, appraise.CanalFreeboard(4, depth), 1e-14)
	limits.FreeboardRule = appraise.Chute
	f := findings(t, a, 8, limits)[appraise.FreeboardRule]
	near(t, "chute", f.Limit, appraise.ChuteFreeboard(4/a.Channel.Section.At(depth).Area, depth), 1e-14)
	near(t, "freeboard", f.Value, 2-depth, 1e-14)
	if f.Met != appraise.Yes {
		t.Errorf("chute: %v", f.Met)
	}
}

// Where the energy coefficient rises steeply with depth, no Froude number is there to be held against a band.
func TestNoFroudeNumber(t *testing.T) {
	flood := must(section.NewTwoStage(section.TwoStage{BottomWidth: 0.5, BenchHeight: 1, LeftBenchWidth: 1, RightBenchWidth: 1, UpperSideSlope: 1}))
	law := must(friction.NewZones(flood.(section.Zoned), []float64{0.224, 1.06}, []float64{0.2, 0.02, 0.4}, friction.Divided))
	a := &appraise.Asset{Channel: flow.Channel{Section: flood, Law: law, Slope: 0.001, Gravity: 9.80665, Bank: 3}}
	depths := flow.Depths{Normal: []float64{1.0001}, Bank: 3}
	discharge, _ := a.Channel.UniformAt(1.0001)
	f := a.Judge(discharge, &depths, &everything, appraise.Of(appraise.CriticalBand), nil).Findings[0]
	if f.Met != appraise.Unknown || f.Reason != appraise.NoFroudeNumber {
		t.Errorf("%v at %v: %v", f.Met, f.Value, f.Reason)
	}
}

// A channel without a law can be judged in nothing, and says so.
func TestNoRoughness(t *testing.T) {
	a := canal(2)
	a.Channel.Law = nil
	depths := flow.Depths{Bank: 2}
	for _, f := range a.Judge(2, &depths, &everything, appraise.All, nil).Findings {
		if f.Met != appraise.Unknown || f.Reason != appraise.MissingLaw {
			t.Errorf("%v: %v %v", f.Criterion, f.Met, f.Reason)
		}
	}
}

// A value that equals its limit meets it; one place beyond does not.
func TestLimitsAreMetExactly(t *testing.T) {
	a := canal(2)
	a.Lining = must(appraise.NewShearLimited(20))
	first := findings(t, a, 2, everything)
	value := func(c appraise.Criterion) float64 { return first[c].Value }
	exact := appraise.Limits{Given: appraise.All, LeastFreeboard: value(appraise.LeastFreeboard), FreeboardRule: appraise.Canal, GreatestFill: value(appraise.GreatestFill),
		LeastVelocity: value(appraise.LeastVelocity), GreatestVelocity: value(appraise.GreatestVelocity), LeastShear: value(appraise.LeastShear),
		GreatestShear: value(appraise.GreatestShear), CriticalBand: [2]float64{value(appraise.CriticalBand), 2},
		GreatestVedernikovNumber: value(appraise.GreatestVedernikovNumber), LeastLiningSafety: value(appraise.LeastLiningSafety)}
	for c, f := range findings(t, a, 2, exact) {
		if f.Met != appraise.Yes || c != appraise.FreeboardRule && f.Distance() != 0 {
			t.Errorf("%v at its limit: %v, distance %v", c, f.Met, f.Distance())
		}
	}
	up, down := func(x float64) float64 { return math.Nextafter(x, 1e9) }, func(x float64) float64 { return math.Nextafter(x, 0) }
	beyond := appraise.Limits{Given: appraise.All, LeastFreeboard: up(exact.LeastFreeboard), FreeboardRule: appraise.Canal, GreatestFill: down(exact.GreatestFill),
		LeastVelocity: up(exact.LeastVelocity), GreatestVelocity: down(exact.GreatestVelocity), LeastShear: up(exact.LeastShear), GreatestShear: down(exact.GreatestShear),
		CriticalBand: [2]float64{down(exact.CriticalBand[0]), 2}, GreatestVedernikovNumber: down(exact.GreatestVedernikovNumber), LeastLiningSafety: up(exact.LeastLiningSafety)}
	for c, f := range findings(t, a, 2, beyond) {
		if c != appraise.FreeboardRule && f.Met != appraise.No {
			t.Errorf("%v just beyond its limit: %v", c, f.Met)
		}
	}
}

// Only what is given, and only what is asked of this flow, is judged.
func TestOnlyWhatIsAsked(t *testing.T) {
	a := canal(2)
	limits := everything
	limits.Given = appraise.Of(appraise.LeastVelocity, appraise.GreatestFill)
	if limits.Given.Len() != 2 || !limits.Given.Has(appraise.GreatestFill) || limits.Given.Has(appraise.LeastShear) {
		t.Fatal("the set is wrong")
	}
	var room flow.Room
	depths := a.Channel.Depths(2, &room)
	only := a.Judge(2, &depths, &limits, appraise.Of(appraise.LeastVelocity, appraise.LeastShear), nil).Findings
	if len(only) != 1 || only[0].Criterion != appraise.LeastVelocity {
		t.Errorf("findings %v", only)
	}
}

// The verdict and what governs it.
func TestOverall(t *testing.T) {
	yes := func(c appraise.Criterion, value, limit float64) appraise.Finding {
		return appraise.Finding{Criterion: c, Value: value, Limit: limit, Met: appraise.Yes}
	}
	no := func(c appraise.Criterion, value, limit float64) appraise.Finding {
		return appraise.Finding{Criterion: c, Value: value, Limit: limit, Met: appraise.No}
	}
	unknown := appraise.Finding{Criterion: appraise.LeastShear, Value: nan, Limit: 2, Reason: appraise.MissingBank}
	aside := appraise.Finding{Criterion: appraise.FreeboardRule, Value: nan, Limit: nan, Reason: appraise.NotApplicable}
	type flowFindings []appraise.Finding
	for _, row := range []struct {
		name      string
		flows     []flowFindings
		verdict   string
		flow      int
		criterion string // none where nothing governs
	}{
		{"nothing", nil, "undetermined", 0, ""},
		{"nothing applies", []flowFindings{{aside}}, "undetermined", 0, ""},
		{"only unknown", []flowFindings{{unknown}}, "undetermined", 0, ""},
		{"the nearest governs", []flowFindings{{yes(appraise.LeastVelocity, 1, 0.5), aside}, {yes(appraise.GreatestFill, 0.7, 0.8), yes(appraise.GreatestShear, 5, 10)}}, "meets", 1, "greatest_fill"},
		{"unknown beside met", []flowFindings{{yes(appraise.LeastVelocity, 1, 0.5)}, {unknown}}, "undetermined", 0, "least_velocity"},
		{"unmet beside unknown", []flowFindings{{unknown, yes(appraise.LeastVelocity, 1, 0.99)}, {no(appraise.GreatestFill, 0.9, 0.8)}}, "falls_short", 1, "greatest_fill"},
		{"the furthest governs", []flowFindings{{no(appraise.GreatestFill, 0.9, 0.8)}, {no(appraise.LeastVelocity, 0.1, 1), yes(appraise.GreatestShear, 10, 10)}, {no(appraise.GreatestShear, 15, 10)}}, "falls_short", 1, "least_velocity"},
		{"unmet displaces met", []flowFindings{{yes(appraise.LeastVelocity, 1, 0.2)}, {no(appraise.GreatestFill, 0.801, 0.8)}}, "falls_short", 1, "greatest_fill"},
		{"of equals the first", []flowFindings{{no(appraise.GreatestFill, 1.5, 1)}, {no(appraise.GreatestVelocity, 3, 2)}}, "falls_short", 0, "greatest_fill"},
		{"no value is furthest", []flowFindings{{no(appraise.GreatestFill, 100, 0.8)}, {no(appraise.LeastFreeboard, nan, 0.3)}}, "falls_short", 1, "least_freeboard"},
		{"a limit of zero", []flowFindings{{yes(appraise.LeastFreeboard, 0.2, 0), yes(appraise.GreatestFill, 0.1, 0.9)}}, "meets", 0, "greatest_fill"},
	} {
		t.Run(row.name, func(t *testing.T) {
			var o appraise.Overall
			for i, f := range row.flows {
				o.Add(i, f)
			}
			flow, f, exists := o.Governing()
			name := ""
			if exists {
				name = f.Criterion.String()
			}
			if o.Verdict().String() != row.verdict || flow != row.flow || name != row.criterion {
				t.Errorf("%v, flow %d, %q; want %s, flow %d, %q", o.Verdict(), flow, name, row.verdict, row.flow, row.criterion)
			}
		})
	}
}

// The band's limit is its edge nearer to the value, inside and outside.
func TestBand(t *testing.T) {
	a := canal(2)
	froude := findings(t, a, 2, everything)[appraise.CriticalBand].Value
	for _, row := range []struct {
		low, high, limit float64 // times the Froude number
		met              appraise.Met
	}{{1.1, 2, 1.1, appraise.Yes}, {0.3, 0.9, 0.9, appraise.Yes}, {0.9, 3, 0.9, appraise.No}, {0.2, 1.05, 1.05, appraise.No}} {
		limits := everything
		limits.CriticalBand = [2]float64{row.low * froude, row.high * froude}
		f := findings(t, a, 2, limits)[appraise.CriticalBand]
		if f.Met != row.met || f.Band != limits.CriticalBand {
			t.Errorf("%v in %v: %v", f.Value, f.Band, f.Met)
		}
		near(t, "edge", f.Limit, row.limit*froude, 1e-14)
	}
}

// TestChecks gives limits and linings that are refused, by member and code.
func TestChecks(t *testing.T) {
	all := func(change func(*appraise.Limits)) error {
		l := everything
		change(&l)
		return l.Check()
	}
	none := appraise.Soil{PlasticityIndex: nan, VoidRatio: nan, GrainSize: nan}
	lining := func(_ appraise.Lining, err error) error { return err }
	roughness := func(l appraise.Lining, s section.Section) error {
		_, err := l.Roughness(s, 9.8)
		return err
	}
	grass := appraise.Grass{StemHeight: 0.1, Condition: appraise.Good, Soil: none}
	stones := appraise.Rock{StoneSize: 0.2, SpecificGravity: nan, AngleOfRepose: nan, Viscosity: nan}
	round := must(section.NewCircular(1))
	for _, row := range []struct {
		err  error
		want string
	}{
		{all(func(*appraise.Limits) {}), ""},
		{all(func(l *appraise.Limits) { l.Given = 0 }), "empty"},
		{all(func(l *appraise.Limits) { l.LeastFreeboard = -1 }), "least_freeboard negative"},
		{all(func(l *appraise.Limits) { l.GreatestFill = 0 }), "greatest_fill not_positive"},
		{all(func(l *appraise.Limits) { l.GreatestVelocity = nan }), "greatest_velocity not_finite"},
		{all(func(l *appraise.Limits) { l.LeastShear = math.Inf(1) }), "least_shear not_finite"},
		{all(func(l *appraise.Limits) { l.CriticalBand = [2]float64{1.1, 0.9} }), "critical_band not_rising"},
		{all(func(l *appraise.Limits) { l.CriticalBand = [2]float64{nan, 0.9} }), "critical_band not_rising"},
		{all(func(l *appraise.Limits) { l.FreeboardRule = appraise.NoRule }), "freeboard_rule unknown_value"},
		{lining(appraise.NewShearLimited(0)), "permissible_shear not_positive"},
		{lining(appraise.NewShearLimited(nan)), ""},
		{lining(appraise.NewBareSoil(none)), ""},
		{lining(appraise.NewBareSoil(appraise.Soil{Group: appraise.Silt, PlasticityIndex: -1, VoidRatio: 3, GrainSize: nan})), "plasticity_index out_of_range, void_ratio out_of_range"},
		{lining(appraise.NewBareSoil(appraise.Soil{Group: appraise.Silt, PlasticityIndex: nan, VoidRatio: nan, GrainSize: 0.01})), "grain_size conflict"},
		{lining(appraise.NewBareSoil(appraise.Soil{Group: 99, PlasticityIndex: nan, VoidRatio: nan, GrainSize: nan})), "soil_group unknown_value"},
		{lining(appraise.NewVegetation(grass)), ""},
		{lining(appraise.NewVegetation(appraise.Grass{StemHeight: nan, Soil: none})), "stem_height missing, condition missing"},
		{lining(appraise.NewVegetation(appraise.Grass{StemHeight: -1, Condition: 9, GrowthForm: 9, Soil: none})), "stem_height not_positive, condition unknown_value, growth_form unknown_value"},
		{lining(appraise.NewRiprap(stones)), ""},
		{lining(appraise.NewRiprap(appraise.Rock{StoneSize: nan, SpecificGravity: 1, AngleOfRepose: 90, Viscosity: 0})),
			"stone_size missing, kinematic_viscosity not_positive, specific_gravity out_of_range, angle_of_repose out_of_range"},
		{lining(appraise.NewEarthChannel(99, 99)), "soil unknown_value, water_carries unknown_value"},
		{roughness(must(appraise.NewVegetation(grass)), round), "kind closed_section"},
		{roughness(must(appraise.NewRiprap(stones)), round), "kind closed_section"},
		{roughness(must(appraise.NewShearLimited(9)), round), ""},
	} {
		if got := codes(row.err); got != row.want {
			t.Errorf("faults %q, want %q", got, row.want)
		}
	}
}
