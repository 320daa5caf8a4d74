package appraise_test

import (
	"math"
	"math/rand/v2"
	"testing"

	"leat/compute/appraise"
	"leat/compute/flow"
	"leat/compute/section"
)

// TestExtremes throws sizes that nobody builds at every lining: nothing may panic, no number may stand as a value that is none, and nothing may be met or
// unmet without one, save what overtops a table.
func TestExtremes(t *testing.T) {
	r := rand.New(rand.NewPCG(4, 6))
	judged := map[appraise.Met]int{}
	for range 2000 {
		var s section.Section
		switch r.IntN(6) {
		case 0:
			s = must(section.NewTriangular(spread(r, 1e-3, 1e3), spread(r, 1e-3, 1e3)))
		case 1:
			s = must(section.NewParabolic(spread(r, 1e-3, 1e5), spread(r, 1e-3, 1e3)))
		case 2:
			s = must(section.NewUShaped(spread(r, 1e-3, 1e3)))
		case 3:
			s = must(section.NewTwoStage(section.TwoStage{BottomWidth: spread(r, 1e-3, 1e3), BenchHeight: spread(r, 1e-3, 1e2), LeftBenchWidth: spread(r, 1e-3, 1e4), UpperSideSlope: 5 * r.Float64()}))
		case 4:
			a, b := spread(r, 1e-2, 10), spread(r, 1e-2, 10)
			s = must(section.NewSurveyed([][2]float64{{0, 3 * r.Float64()}, {a, 0.1 * r.Float64()}, {a + b, 0.1 * r.Float64()}, {2 * (a + b), 2 + r.Float64()}}))
		default:
			s = must(section.NewTrapezoidal(spread(r, 1e-6, 1e6), 10*r.Float64(), 10*r.Float64()))
		}
		bank := spread(r, 1e-3, 1e2) * float64(r.IntN(2))
		slope := spread(r, 1e-9, 0.99)
		if r.IntN(10) == 0 {
			slope = -slope * float64(r.IntN(2))
		}
		for _, l := range linings(r) {
			a := lined(s, slope, l)
			a.Channel.Bank = bank
			if bank == 0 {
				a.Channel.Bank = 0
			}
			a.BendRadius = spread(r, 1e-2, 1e9) * float64(r.IntN(2))
			a.Channel.Barrels = 1 + r.IntN(3)
			discharge := spread(r, 1e-12, 1e9)
			var room flow.Room
			depths := a.Channel.Depths(discharge, &room)
			j := a.Judge(discharge, &depths, &everything, appraise.All, nil)
			for _, f := range j.Findings {
				judged[f.Met]++
				switch {
				case f.Met == appraise.Unknown && f.Reason.Code == "":
					t.Fatalf("%v of %T is unknown without a reason", f.Criterion, l)
				case f.Met != appraise.Unknown && (math.IsNaN(f.Value) || math.IsInf(f.Value, 0) || math.IsNaN(f.Limit)) && f.Reason != appraise.Overtopped:
					t.Fatalf("%v of %T: %v against %v is %v", f.Criterion, l, f.Value, f.Limit, f.Met)
				}
				if d := f.Distance(); f.Met != appraise.Unknown && !(d >= 0) {
					t.Fatalf("%v of %T: distance %v", f.Criterion, l, d)
				}
			}
			if depths.NormalAbsent == flow.Unsolved || depths.CriticalAbsent == flow.Unsolved {
				t.Errorf("%T on %T, slope %v, discharge %v: not solved", l, s, slope, discharge)
			}
		}
	}
	t.Log(judged)
	for _, m := range []appraise.Met{appraise.Unknown, appraise.Yes, appraise.No} {
		if judged[m] < 10000 {
			t.Errorf("only %d are %v", judged[m], m)
		}
	}
}
