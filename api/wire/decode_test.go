package wire

import (
	"fmt"
	"strings"
	"testing"

	"github.com/google/go-cmp/cmp"
)

const (
	trapezoidDepths = `{"id":"A-17","section":{"kind":"trapezoidal","bottom_width":2.5,"side_slope":1.5,"bank_height":1.8},"roughness":{"manning":0.025},"bed_slope":0.0012,"discharge":4.75}`
	surveyedSection = `{"section":{"kind":"surveyed","points":[[0,2],[1,0.5],[3,0],[5,0.4],[8,2.2]]},"roughness":{"zones":[{"until":2,"manning":0.05},{"manning":0.03}]},"depths":[0.1,0.5,1,1.5]}`
)

// decodeAs decodes a body as the request of an operation.
func decodeAs(operation, body string) (Request, *Problem) {
	requests := map[string]Request{"section": new(SectionRequest), "depths": new(DepthsRequest), "rating": new(RatingRequest), "profile": new(ProfileRequest)}
	limits := Limits{ArrayItems: 50, Points: 60, Reaches: 8, Stations: 9, ReportPoints: 55}
	r := requests[operation]
	return r, Decode([]byte(body), SI, &limits, r)
}

func TestDecode(t *testing.T) {
	given := func(v float64) Number { return Number{v, true} }
	ft := 0.3048 // a variable, so that products round as they do at run time
	square := 0.09290304
	manning := Roughness{Given: true, Law: Manning, Manning: given(0.025)}
	for _, c := range []struct {
		operation, body string
		want            Request
	}{
		{"depths", trapezoidDepths, &DepthsRequest{
			Common:    Common{ID: ID(`"A-17"`)},
			Section:   Section{Given: true, Kind: Trapezoidal, BottomWidth: given(2.5), SideSlope: given(1.5), BankHeight: given(1.8)},
			Roughness: manning, BedSlope: given(0.0012), Discharge: given(4.75),
		}},
		{"depths", ` { "barrels" : 3.0, "id":1.50e1,"gravity":9.8,"energy_coefficient":1.1,"momentum_coefficient":1.05,"nonsense":null,"depth":null,
			"section":{"kind":"rectangular","bottom_width":1,"diameter":null},"roughness":{"manning":0.025,"zones":null,"combine":null},"bed_slope":-0,"discharge":1}`, &DepthsRequest{
			Barrelled: Barrelled{Whole{3, true}},
			Common: Common{ID: ID(`1.50e1`), Gravity: given(9.8), EnergyCoefficient: given(1.1),
				MomentumCoefficient: given(1.05)},
			Section:   Section{Given: true, Kind: Rectangular, BottomWidth: given(1)},
			Roughness: manning, BedSlope: given(0), Discharge: given(1),
		}},
		{"section", `{"units":"us","section":{"kind":"box","width":10,"height":5,"haunch":0},"depth":2,"discharge":100,
			"roughness":{"chezy":100},"gravity":32}`, &SectionRequest{
			Common:    Common{Units: "us", System: US, Gravity: given(32 * ft)},
			Section:   Section{Given: true, Kind: Box, Width: given(3.048), Height: given(5 * ft), Haunch: given(0)},
			Roughness: Roughness{Given: true, Law: Chezy, Chezy: given(100 * rootFoot)},
			Depth:     given(2 * ft), Discharge: given(2.8316846592),
		}},
		{"section", `{"section":{"kind":"\u0065gg","height":1.5,"inverted":true},"depths":[1,1e0,0.5],"\u0075nits":"s\u0069"}`, &SectionRequest{
			Common:  Common{Units: "si"},
			Section: Section{Given: true, Kind: Egg, Height: given(1.5), Inverted: true},
			Depths:  []float64{1, 1, 0.5},
		}},
		{"section", surveyedSection, &SectionRequest{
			Section: Section{Given: true, Kind: Surveyed, Points: [][2]float64{{0, 2}, {1, 0.5}, {3, 0}, {5, 0.4}, {8, 2.2}}},
			Roughness: Roughness{Given: true, Law: Zones, Combine: Divided,
				Zones: []Zone{{given(2), given(0.05)}, {Number{}, given(0.03)}}},
			Depths: []float64{0.1, 0.5, 1, 1.5},
		}},
		{"rating", `{"units":"us","section":{"kind":"tabulated","rows":[[1,2,3,4],[2,6,6,4]]},"roughness":{"manning_by_depth":[[0,0.05],[1,0.04]]},
			"bed_slope":0.01,"kind":"uniform","from_depth":0.5,"to_depth":1.5,"count":50}`, &RatingRequest{
			Common: Common{Units: "us", System: US},
			Section: Section{Given: true, Kind: Tabulated, Rows: [][4]float64{
				{ft, 2 * square, 3 * ft, 4 * ft}, {2 * ft, 6 * square, 6 * ft, 4 * ft}}},
			Roughness: Roughness{Given: true, Law: ManningByDepth, ManningByDepth: [][2]float64{{0, 0.05}, {0.3048, 0.04}}},
			BedSlope:  given(0.01), Kind: RatingUniform, FromDepth: given(0.5 * ft), ToDepth: given(1.5 * ft), Count: Whole{50, true},
		}},
		{"rating", `{"section":{"kind":"two_stage","bottom_width":1,"side_slope":1,"bench_height":1,"left_bench_width":1,"right_bench_width":0,"upper_side_slope":2},
			"roughness":{"bed":{"manning":0.05},"sides":{"manning":0.04}},"bed_slope":0,"kind":"critical","discharges":[1,2]}`, &RatingRequest{
			Section: Section{Given: true, Kind: TwoStage, BottomWidth: given(1), SideSlope: given(1), BenchHeight: given(1),
				LeftBenchWidth: given(1), RightBenchWidth: given(0), UpperSideSlope: given(2)},
			Roughness: Roughness{Given: true, Law: BedAndSides, Combine: HortonEinstein,
				Bed: Lining{given(0.05), true}, Sides: Lining{given(0.04), true}},
			BedSlope: given(0), Kind: RatingCritical, Discharges: []float64{1, 2},
		}},
		{"depths", `{"section":{"kind":"gutter","cross_slope":0.02,"curb_height":0.15,"gutter_width":0.6,"gutter_slope":0.08},
			"roughness":{"sand_roughness":0.001,"kinematic_viscosity":1e-6},"bed_slope":0.01,"discharge":0.01}`, &DepthsRequest{
			Section:   Section{Given: true, Kind: Gutter, CrossSlope: given(0.02), CurbHeight: given(0.15), GutterWidth: given(0.6), GutterSlope: given(0.08)},
			Roughness: Roughness{Given: true, Law: SandRoughness, SandRoughness: given(0.001), KinematicViscosity: given(1e-6)},
			BedSlope:  given(0.01), Discharge: given(0.01),
		}},
	} {
		got, problem := decodeAs(c.operation, c.body)
		if problem != nil {
			t.Errorf("%s: %v", c.body, problem)
			continue
		}
		if diff := cmp.Diff(c.want, got); diff != "" {
			t.Errorf("%s:\n%s", c.body, diff)
		}
		if faults := Check(got); faults != nil {
			t.Errorf("%s: Check finds %v", c.body, faults)
		}
	}
}

// TestDecodeForgets makes sure that nothing of one request is seen in the next that is read into the same struct.
func TestDecodeForgets(t *testing.T) {
	limits := DefaultLimits()
	var r SectionRequest
	if p := Decode([]byte(surveyedSection), US, &limits, &r); p != nil {
		t.Fatal(p)
	}
	points := r.Section.Points
	if p := Decode([]byte(`{"section":{"kind":"circular","diameter":1},"depth":0.5}`), SI, &limits, &r); p != nil {
		t.Fatal(p)
	}
	want := SectionRequest{Section: Section{Given: true, Kind: Circular, Diameter: Number{1, true}}, Depth: Number{0.5, true}}
	if diff := cmp.Diff(want, r); diff != "" {
		t.Error(diff)
	}
	if p := Decode([]byte(strings.ReplaceAll(surveyedSection, "2.2", "9")), SI, &limits, &r); p != nil {
		t.Fatal(p)
	}
	if points[4][1] != 2.2*units[QuantityLength].inSI {
		t.Error("a list of an earlier request was overwritten")
	}
}

func TestDecodeAllocations(t *testing.T) {
	limits := DefaultLimits()
	for _, c := range []struct {
		body string
		into Request
		most float64
	}{
		{trapezoidDepths, new(DepthsRequest), 0},
		{surveyedSection, new(SectionRequest), 3}, // points, depths and zones
	} {
		body := []byte(c.body)
		d := newDecoding() // the pool of them forgets some on purpose under the race detector
		if n := testing.AllocsPerRun(200, func() {
			if p := d.decode(body, SI, &limits, c.into); p != nil {
				t.Fatal(p)
			}
		}); n > c.most {
			t.Errorf("%v allocations for %s, want at most %v", n, c.body, c.most)
		}
	}
}

func BenchmarkDecode(b *testing.B) {
	limits := DefaultLimits()
	for _, c := range []struct {
		name, body string
		into       Request
	}{
		{"trapezoidal", trapezoidDepths, new(DepthsRequest)},
		{"surveyed", surveyedSection, new(SectionRequest)},
		{"us", strings.Replace(trapezoidDepths, "{", `{"units":"us",`, 1), new(DepthsRequest)},
		{"refused", strings.Replace(trapezoidDepths, "bed_slope", "slope", 1), new(DepthsRequest)},
	} {
		b.Run(c.name, func(b *testing.B) {
			body := []byte(c.body)
			b.ReportAllocs()
			b.SetBytes(int64(len(body)))
			for b.Loop() {
				Decode(body, SI, &limits, c.into)
			}
		})
	}
}

func BenchmarkScan(b *testing.B) {
	limits := DefaultLimits()
	body := []byte(trapezoidDepths)
	var s scanner
	b.ReportAllocs()
	for b.Loop() {
		if !s.scan(body, &limits) {
			b.Fatal(s.fault)
		}
	}
}

// places lists the faults of a problem as lines of pointer and code.
func places(p *Problem) string {
	if p == nil {
		return ""
	}
	var b strings.Builder
	for _, f := range p.Errors {
		fmt.Fprintf(&b, "%s %s\n", f.Pointer, f.Code)
	}
	return b.String()
}
