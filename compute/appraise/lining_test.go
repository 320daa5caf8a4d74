package appraise_test

import (
	"math"
	"strings"
	"testing"

	"leat/compute/appraise"
	"leat/compute/flow"
	"leat/compute/section"
)

var loose = appraise.Soil{PlasticityIndex: nan, VoidRatio: nan, GrainSize: nan}

// lined returns a channel with a lining and the law that it sets, else Manning's.
func lined(s section.Section, slope float64, l appraise.Lining) *appraise.Asset {
	law := must(l.Roughness(s, 9.80665))
	if law == nil {
		law = manning(0.03)
	}
	return &appraise.Asset{Channel: flow.Channel{Section: s, Law: law, Slope: slope, Gravity: 9.80665, Bank: 2}, Lining: l}
}

// safety judges the lining alone.
func safety(t *testing.T, a *appraise.Asset, discharge float64) (appraise.Finding, appraise.LiningState) {
	t.Helper()
	var room flow.Room
	depths := a.Channel.Depths(discharge, &room)
	if len(depths.Normal) == 0 {
		t.Fatalf("no normal depth: %v", depths.NormalAbsent)
	}
	limits := appraise.Limits{Given: appraise.Of(appraise.LeastLiningSafety), LeastLiningSafety: 1}
	j := a.Judge(discharge, &depths, &limits, appraise.All, nil)
	if !j.HasLining {
		t.Fatal("there is no state of the lining")
	}
	return j.Findings[0], j.Lining
}

// TestMissingMembers: what a lining lacks leaves it undetermined, and the reason names it.
func TestMissingMembers(t *testing.T) {
	ditch := must(section.NewTrapezoidal(1, 2, 2))
	gentle := must(section.NewTrapezoidal(1, 3, 3))
	soil := func(change func(*appraise.Soil)) appraise.Soil {
		s := appraise.Soil{Group: appraise.ClayeySand, PlasticityIndex: 16, VoidRatio: 0.5, GrainSize: nan}
		change(&s)
		return s
	}
	grass := func(form appraise.GrowthForm, s appraise.Soil) appraise.Lining {
		return must(appraise.NewVegetation(appraise.Grass{StemHeight: 0.1, Condition: appraise.Fair, GrowthForm: form, Soil: s}))
	}
	bare := func(s appraise.Soil) appraise.Lining { return must(appraise.NewBareSoil(s)) }
	rock := func(repose float64) appraise.Lining {
		return must(appraise.NewRiprap(appraise.Rock{StoneSize: 0.1, SpecificGravity: nan, AngleOfRepose: repose, Viscosity: nan}))
	}
	earth := func(e appraise.Earth, l appraise.Load) appraise.Lining { return must(appraise.NewEarthChannel(e, l)) }
	for _, row := range []struct {
		name   string
		lining appraise.Lining
		on     section.Section
		slope  float64
		bend   float64
		want   string // the reason's code and the members that its sentence names
	}{
		{"a shear without its value", must(appraise.NewShearLimited(nan)), ditch, 0.01, 0, "missing_permissible_shear permissible_shear"},
		{"a soil of which nothing is known", bare(loose), ditch, 0.01, 0, "missing_soil soil_group plasticity_index void_ratio grain_size"},
		{"a soil without its group", bare(soil(func(s *appraise.Soil) { s.Group = appraise.NoSoilGroup })), ditch, 0.01, 0, "missing_soil_group soil_group"},
		{"a soil without its plasticity", bare(soil(func(s *appraise.Soil) { s.PlasticityIndex = nan })), ditch, 0.01, 0, "missing_plasticity_index plasticity_index"},
		{"a soil without its voids", bare(soil(func(s *appraise.Soil) { s.VoidRatio = nan })), ditch, 0.01, 0, "missing_void_ratio void_ratio"},
		{"a soil without both", bare(soil(func(s *appraise.Soil) { s.PlasticityIndex, s.VoidRatio = nan, nan })), ditch, 0.01, 0, "missing_plasticity_index plasticity_index void_ratio"},
		{"a soil that hardly coheres", bare(soil(func(s *appraise.Soil) { s.PlasticityIndex = 9 })), ditch, 0.01, 0, "plasticity_below_range grain_size"},
		{"fat clay that is not", bare(soil(func(s *appraise.Soil) { s.Group = appraise.FatClay })), ditch, 0.01, 0, "plasticity_below_range fat"},
		{"stones called soil", bare(appraise.Soil{GrainSize: 0.06, PlasticityIndex: nan, VoidRatio: nan}), ditch, 0.01, 0, "grain_above_range riprap"},
		{"grass of unknown growth", grass(appraise.NoGrowthForm, soil(func(*appraise.Soil) {})), ditch, 0.01, 0, "missing_growth_form growth_form"},
		{"grass on unknown soil", grass(appraise.Sod, loose), ditch, 0.01, 0, "missing_soil soil_group"},
		{"stones on steep sides", rock(nan), ditch, 0.01, 0, "missing_angle_of_repose angle_of_repose"},
		{"stones on a steep bed", rock(nan), gentle, 0.07, 0, "missing_angle_of_repose angle_of_repose"},
		{"stones on sides that nobody knows", rock(40), must(section.NewTabulated([][4]float64{{0.5, 0.5, 2, 1}, {2, 5, 6, 5}})), 0.01, 0, "side_slope_unknown sides"},
		{"earth of which nothing is known", earth(0, 0), ditch, 0.001, 0, "missing_soil soil water_carries"},
		{"earth of unknown soil", earth(0, appraise.ClearWater), ditch, 0.001, 0, "missing_soil soil"},
		{"water of unknown load", earth(appraise.FirmLoam, 0), ditch, 0.001, 0, "missing_water_carries water_carries"},
		{"earth in a bend", earth(appraise.FirmLoam, appraise.ClearWater), ditch, 0.001, 50, "bend_not_covered straight"},
	} {
		t.Run(row.name, func(t *testing.T) {
			a := lined(row.on, row.slope, row.lining)
			a.BendRadius = row.bend
			f, state := safety(t, a, 0.5)
			code, words, _ := strings.Cut(row.want, " ")
			if f.Met != appraise.Unknown || f.Reason.Code != code || !math.IsNaN(state.Safety) {
				t.Fatalf("%v %v, safety %v; want %s", f.Met, f.Reason, state.Safety, code)
			}
			for _, word := range strings.Fields(words) {
				if !strings.Contains(f.Reason.Detail, word) {
					t.Errorf("%q does not name %s", f.Reason.Detail, word)
				}
			}
			if !(state.BedShear > 0 && state.Roughness > 0) {
				t.Errorf("what is known is not told: %+v", state)
			}
		})
	}
	// Gentle sides on a gentle bed need no angle of repose.
	if f, _ := safety(t, lined(gentle, 0.01, rock(nan)), 0.5); f.Met == appraise.Unknown {
		t.Errorf("stones on gentle sides: %v", f.Reason)
	}
}

// Bare soil and makers' shear stresses: the bed's greatest stress is rho g depth S, with the factor of the bend.
func TestBedShear(t *testing.T) {
	ditch := must(section.NewTrapezoidal(1, 2, 4))
	a := lined(ditch, 0.02, must(appraise.NewShearLimited(100)))
	f, state := safety(t, a, 1)
	depth := must2(a.Channel.Normal(1, nil))
	near(t, "bed", state.BedShear, 1000*9.80665*depth*0.02, 1e-14)
	near(t, "sides", state.SideShear, state.BedShear*(0.066*2+0.67), 1e-14)
	near(t, "safety", f.Value, 100/state.BedShear, 1e-14)
	near(t, "n", state.Roughness, 0.03, 1e-14)
	width := ditch.At(depth).TopWidth
	a.BendRadius = 5 * width
	bent, inBend := safety(t, a, 1)
	near(t, "factor", inBend.BendFactor, 2.38-0.206*5+0.0073*25, 1e-14)
	near(t, "safety in the bend", bent.Value*inBend.BendFactor, f.Value, 1e-14)
}

func must2(depths []float64, absent flow.Absence) float64 {
	if len(depths) == 0 {
		panic(absent.String())
	}
	return depths[0]
}

// The sides of riprap bear less than the bed and stand less: HEC-15 compares K1 times the shear with K2 times what is permissible.
func TestStonesOnSides(t *testing.T) {
	for _, z := range []float64{1.4, 1.5, 2, 2.5, 2.99} {
		ditch := must(section.NewTrapezoidal(1, z, z))
		f, s := safety(t, lined(ditch, 0.02, must(appraise.NewRiprap(appraise.Rock{StoneSize: 0.15, SpecificGravity: nan, AngleOfRepose: 41, Viscosity: nan}))), 1)
		k2 := appraise.TractiveForceRatio(z, math.Sin(41*math.Pi/180))
		near(t, "safety", f.Value, math.Min(1, k2/appraise.SideFactor(z))*s.PermissibleShear/s.BedShear, 1e-13)
		if s.OnSides != (k2 < appraise.SideFactor(z)) {
			t.Errorf("side slope %v: on the sides %v", z, s.OnSides)
		}
	}
	// Steeper than the angle of repose nothing lies.
	steep := must(section.NewTrapezoidal(1, 1, 1))
	f, s := safety(t, lined(steep, 0.02, must(appraise.NewRiprap(appraise.Rock{StoneSize: 0.5, SpecificGravity: nan, AngleOfRepose: 40, Viscosity: nan}))), 2)
	if f.Met != appraise.No || f.Value != 0 || f.Reason.Code != "steeper_than_repose" || !s.OnSides {
		t.Errorf("sides at 45 degrees: %v %v %v", f.Met, f.Value, f.Reason)
	}
}

// What is to be known of a judgement stands beside it.
func TestNotes(t *testing.T) {
	deep := lined(must(section.NewTrapezoidal(2, 2, 2)), 0.0001, must(appraise.NewEarthChannel(appraise.StiffClay, appraise.ColloidalSilt)))
	if f, s := safety(t, deep, 5); f.Met != appraise.Yes || f.Reason.Code != "beyond_table_depth" || !(s.PermissibleVelocity == 5*0.3048) {
		t.Errorf("deep canal: %v %v", f.Met, f.Reason)
	}
	if f, _ := safety(t, deep, 0.5); f.Met != appraise.Yes || f.Reason.Code != "" {
		t.Errorf("shallow canal: %v %v", f.Met, f.Reason)
	}
	// Large stones in fast water: HEC-15 asks for half as much again.
	rough := lined(must(section.NewTrapezoidal(2, 3, 3)), 0.04, must(appraise.NewRiprap(appraise.Rock{StoneSize: 0.4, SpecificGravity: nan, AngleOfRepose: nan, Viscosity: nan})))
	if f, s := safety(t, rough, 30); f.Met != appraise.Yes || !(s.RecommendedSafety == 1.5) || f.Value < 1.5 != (f.Reason.Code == "below_recommended_safety") || f.Value >= 1.5 {
		t.Errorf("fast over stones: %v %v %v, recommended %v", f.Met, f.Value, f.Reason, s.RecommendedSafety)
	}
	gravel := lined(must(section.NewTrapezoidal(5, 4, 4)), 0.0005, must(appraise.NewRiprap(appraise.Rock{StoneSize: 0.005, SpecificGravity: nan, AngleOfRepose: nan, Viscosity: nan})))
	if f, _ := safety(t, gravel, 40); f.Met == appraise.Unknown || f.Reason.Code != "beyond_roughness_range" {
		t.Errorf("deep over gravel: %v %v", f.Met, f.Reason)
	}
}

// Where the formulas of stones hand over, two depths carry a discharge: what both meet is met, what they differ on is not known.
func TestSeveralNormalDepths(t *testing.T) {
	a := lined(must(section.NewTrapezoidal(0.6, 3, 3)), 0.02, must(appraise.NewRiprap(appraise.Rock{StoneSize: 0.2, SpecificGravity: nan, AngleOfRepose: nan, Viscosity: nan})))
	const discharge = 1.0
	var room flow.Room
	depths := a.Channel.Depths(discharge, &room)
	if len(depths.Normal) != 2 {
		t.Fatalf("normal depths %v", depths.Normal)
	}
	between := (depths.Normal[0] + depths.Normal[1]) / 2
	limits := appraise.Limits{Given: appraise.Of(appraise.LeastFreeboard, appraise.GreatestFill), LeastFreeboard: 0.2, GreatestFill: between / 2}
	for _, f := range a.Judge(discharge, &depths, &limits, appraise.All, nil).Findings {
		want := appraise.Yes
		if f.Criterion == appraise.GreatestFill {
			want = appraise.Unknown
		}
		if f.Met != want || f.Reason.Code != "several_normal_depths" {
			t.Errorf("%v: %v %v", f.Criterion, f.Met, f.Reason)
		}
		near(t, "the value at the lowest depth", f.Value, map[appraise.Criterion]float64{appraise.LeastFreeboard: 2 - depths.Normal[0], appraise.GreatestFill: depths.Normal[0] / 2}[f.Criterion], 1e-14)
	}
	// A trickle between stones: no law holds, and it is said so.
	depths = a.Channel.Depths(1e-4, &room)
	for _, f := range a.Judge(1e-4, &depths, &everything, appraise.All, nil).Findings {
		if f.Met != appraise.Unknown || f.Reason.Code != "friction_law_changes" {
			t.Errorf("trickle: %v is %v %v", f.Criterion, f.Met, f.Reason)
		}
	}
}

// The velocity table rises with what the water carries only where the source says so; gravel and cobbles stand more where sand goes with the water.
func TestPermissibleVelocityIsTold(t *testing.T) {
	if _, known := appraise.PermissibleVelocity(appraise.NoEarth, appraise.ClearWater); known {
		t.Error("no soil is known")
	}
	if _, known := appraise.PermissibleVelocity(appraise.FineSand, 77); known {
		t.Error("an unknown load is known")
	}
	for e := appraise.FineSand; e <= appraise.Cobbles; e++ {
		clear, _ := appraise.PermissibleVelocity(e, appraise.ClearWater)
		silt, _ := appraise.PermissibleVelocity(e, appraise.ColloidalSilt)
		sand, _ := appraise.PermissibleVelocity(e, appraise.SandOrGravel)
		if !(clear > 0.4 && silt >= clear && sand > 0.4 && sand < 2) {
			t.Errorf("%v: %v %v %v", e, clear, silt, sand)
		}
	}
}
