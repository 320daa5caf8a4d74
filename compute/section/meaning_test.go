package section

import (
	"math"
	"testing"

	"pgregory.net/rapid"

	"leat/compute/solve"
)

func TestHeightsBanksAndForms(t *testing.T) {
	for _, s := range samples {
		h, closed := s.section.Height(), s.section.Closed()
		bank, known := s.section.Bank()
		full := s.section.Full()
		if closed {
			top := s.section.At(h)
			if math.IsInf(h, 1) || !known || bank != h || full.TopWidth != 0 || full.TopWidthRate != 0 || full.PerimeterRate != 0 || full.Area != top.Area || full.Depth != h {
				t.Errorf("%s: %v %v %v %+v", s.name, h, bank, known, full)
			}
		} else if math.IsInf(h, 1) && full != (Geometry{}) {
			t.Errorf("%s: full %+v", s.name, full)
		}
		for i, b := range s.section.Breaks() {
			if !(b > 0 && b < h) || i > 0 && !(b > s.section.Breaks()[i-1]) {
				t.Errorf("%s: breaks %v", s.name, s.section.Breaks())
			}
		}
	}
	bank := func(s Section) float64 {
		b, known := s.Bank()
		if !known {
			return math.NaN()
		}
		return b
	}
	if b := bank(must(NewGutter(0.02, 0.15, 0, 0))); b != 0.15 {
		t.Errorf("gutter: bank %v", b)
	}
	if b := bank(must(NewSurveyed([][2]float64{{0, 7}, {2, 4}, {4, 5.5}}))); b != 1.5 {
		t.Errorf("surveyed: bank %v", b)
	}
	if b := bank(must(NewSurveyed([][2]float64{{0, 4}, {4, 5.5}}))); b == b {
		t.Errorf("surveyed from its lowest end: bank %v", b)
	}
	if s := must(NewTabulated([][4]float64{{1, 2, 3, 3}, {2, 5, 5, 3}})); bank(s) != 2 || s.Height() != 2 || s.Full() != s.At(2) {
		t.Errorf("tabulated: bank %v height %v full %+v", bank(s), s.Height(), s.Full())
	}
	if s := must(NewSurveyed([][2]float64{{0, 17}, {2, 14}, {4, 15.5}})); s.(*SurveyedLine).Invert() != 14 {
		t.Error("invert")
	}
}

// At a level bench the value is the one just below; above it the bench is wet.
func TestLevelBenches(t *testing.T) {
	for name, s := range map[string]Section{
		"two_stage": must(NewTwoStage(TwoStage{2, 1, 1, 1, 3, 5, 0})),
		"surveyed":  must(NewSurveyed([][2]float64{{-5, 12}, {-5, 11}, {-2, 11}, {-1, 10}, {1, 10}, {2, 11}, {7, 11}, {7, 12}})),
	} {
		at, above := s.At(1), s.At(math.Nextafter(1, 2))
		if at.TopWidth != 4 || at.Area != 3 || at.Perimeter != 2+2*math.Sqrt2 {
			t.Errorf("%s at its benches: %+v", name, at)
		}
		if !(math.Abs(above.TopWidth-12) <= 1e-14) || !(math.Abs(above.Perimeter-at.Perimeter-8) <= 1e-14) || !(math.Abs(above.Area-3) <= 1e-14) {
			t.Errorf("%s above its benches: %+v", name, above)
		}
		if b := s.Breaks(); b[0] != 1 {
			t.Errorf("%s: breaks %v", name, b)
		}
	}
}

func TestRoofs(t *testing.T) {
	s := must(NewBox(2, 1, 0.25))
	if f := s.Full(); !agree(f.Perimeter, 2+2*0.75+2*0.25*math.Sqrt2+1.5, 1e-15) || !agree(f.Area, 2-0.0625, 1e-15) {
		t.Errorf("box with haunches: %+v", f)
	}
	if p := must(NewBox(2, 1, 0)); p.Full().Perimeter != 6 || p.At(1).Perimeter != 4 || p.At(1).TopWidth != 2 {
		t.Errorf("box: %+v %+v", p.Full(), p.At(1))
	}
}

func TestBedWidths(t *testing.T) {
	for _, s := range samples {
		bed, has := s.section.(Bedded)
		want := map[string]float64{"rectangular": 3, "trapezoidal": 2, "box": 1.8, "box with haunches": 1.8, "two_stage": 3}[s.name]
		if has != (want > 0) || has && bed.BedWidth() != want {
			t.Errorf("%s: bed %v, want %v", s.name, bed, want)
		}
	}
}

func TestEnds(t *testing.T) {
	s := must(NewSurveyed([][2]float64{{0, 3}, {1, 1}, {2, 2}, {3, 0}, {4, 5}})).(Surveyed)
	for depth, want := range map[float64]Ends{0.5: {Troughs: 1}, 1: {Troughs: 1}, 1.5: {Troughs: 2}, 2: {Troughs: 2}, 2.5: {Troughs: 1}, 3: {Troughs: 1},
		3.5: {AboveLeft: true, Troughs: 1}, 5.5: {AboveLeft: true, AboveRight: true, Troughs: 1}} {
		if got := s.Ends(depth); got != want {
			t.Errorf("at %v: %+v, want %+v", depth, got, want)
		}
	}
}

// From the least size to the greatest nothing overflows, vanishes or is no number, at any depth from 1e-12 of the height up.
func TestExtremeSizes(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		size := func(name string) float64 {
			return solve.Power(10, rapid.Float64Range(-8.9, 8.9).Draw(t, name))
		}
		slope := func(name string) float64 {
			if rapid.Bool().Draw(t, name+" upright") {
				return 0
			}
			return solve.Power(10, rapid.Float64Range(-6, 5.9).Draw(t, name))
		}
		w, h, z := size("width"), size("height"), slope("slope")
		for name, s := range map[string]Section{
			"trapezoidal": must(NewTrapezoidal(w, z, 0)), "triangular": must(NewTriangular(z, 1e-3)), "parabolic": must(NewParabolic(w, h)), "u_shaped": must(NewUShaped(w)),
			"circular": must(NewCircular(h)), "box": must(NewBox(w, h, min(h, w/2)/3)), "elliptical": must(NewElliptical(w, h)), "egg": must(NewEgg(h, false)),
			"inverted egg": must(NewEgg(h, true)), "horseshoe": must(NewHorseshoe(h)), "gutter": must(NewGutter(max(z, 1e-5), h, w, 0.01)),
			"two_stage": must(NewTwoStage(TwoStage{w, z, z, h, w, 0, z})), "surveyed": must(NewSurveyed([][2]float64{{0, h}, {w, 0}, {w, h / 2}, {min(2*w, 1e9), h / 2}})),
		} {
			top := s.Height()
			if math.IsInf(top, 1) {
				top = 1e3 * h
			}
			for _, share := range []float64{1e-12, 1e-6, 0.03, 0.3, 0.5, 0.7, 0.97, 1 - 1e-9, 1} {
				g := s.At(share * top)
				for _, v := range []float64{g.Area, g.Perimeter, g.Moment, g.Radius()} {
					if !(v > 0 && v < 1e60) {
						t.Fatalf("%s at %v of %v: %+v", name, share, top, g)
					}
				}
				if !(g.TopWidth >= 0 && g.TopWidth < 1e30) || g.PerimeterRate != g.PerimeterRate || g.TopWidthRate != g.TopWidthRate {
					t.Fatalf("%s at %v of %v: %+v", name, share, top, g)
				}
			}
		}
	})
}

// A depth beyond the greatest that a section is defined for counts as that.
func TestDepthsBeyondTheHeight(t *testing.T) {
	for _, s := range samples {
		if h := s.section.Height(); !math.IsInf(h, 1) && s.section.At(1.5*h) != s.section.At(h) {
			t.Errorf("%s: %+v, %+v", s.name, s.section.At(1.5*h), s.section.At(h))
		}
	}
}

// A wall that stands at an offset belongs to the zone whose water wets it, for widths whose sums round.
func TestWallsAtOffsets(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		b, h, l := size(t, "width"), size(t, "height"), size(t, "bench")
		parts, err := must(NewTwoStage(TwoStage{b, 0, 0, h, l, 3 * l, 1})).(Zoned).Part([]float64{-b / 2, b / 2})
		if err != nil {
			t.Fatal(err)
		}
		if g := parts[1].At(2 * h); !agree(g.Perimeter, b+2*h, 1e-15) || !agree(g.Area, 2*b*h, 1e-15) {
			t.Fatalf("middle: %+v", g)
		}
		for i, bench := range []float64{l, 0, 3 * l} {
			if g := parts[i].At(2 * h); i != 1 && !agree(g.Perimeter, bench+h*math.Sqrt2, 1e-14) {
				t.Fatalf("part %d: %+v", i, g)
			}
		}
	})
}
