package section_test

import (
	"math"
	"testing"

	"leat/compute/section"
)

// TestSteepest compares the steepest side with the width's own rate where the sides are alike and steepest at the surface, and walks
// through the sections that have several sides.
func TestSteepest(t *testing.T) {
	sound := func(s section.Section, err error) section.Sided {
		if err != nil {
			t.Fatal(err)
		}
		sided, ok := s.(section.Sided)
		if !ok {
			t.Fatalf("%T does not know its sides", s)
		}
		return sided
	}
	for _, s := range []section.Sided{sound(section.NewTrapezoidal(2, 1.5, 1.5)), sound(section.NewTriangular(3, 3)), sound(section.NewParabolic(4, 1)),
		sound(section.NewUShaped(2)), sound(section.NewRectangular(3))} {
		for _, depth := range []float64{1e-3, 0.1, 0.5, 0.99, 1.5} {
			if got, want := s.Steepest(depth), s.At(depth).TopWidthRate/2; !(math.Abs(got-want) <= 1e-12*(1+want)) {
				t.Errorf("%T at %v: %v, want %v", s, depth, got, want)
			}
		}
	}
	stage := sound(section.NewTwoStage(section.TwoStage{BottomWidth: 1, LeftSideSlope: 3, RightSideSlope: 2, BenchHeight: 0.5, LeftBenchWidth: 1, UpperSideSlope: 1}))
	survey := sound(section.NewSurveyed([][2]float64{{0, 2}, {0, 1}, {2, 0.5}, {6, 0}, {8, 0}, {9, 1}}))
	for _, row := range []struct {
		name  string
		s     section.Sided
		depth float64
		want  float64
	}{
		{"unlike sides", sound(section.NewTrapezoidal(1, 4, 2)), 1, 2},
		{"below the bench", stage, 0.5, 2},
		{"above the bench", stage, 0.6, 1},
		{"in the low bed", survey, 0.4, 1},
		{"below the wall", survey, 1, 1},
		{"up the wall", survey, 1.2, 0},
	} {
		if got := row.s.Steepest(row.depth); !(math.Abs(got-row.want) <= 1e-12) {
			t.Errorf("%s: %v, want %v", row.name, got, row.want)
		}
	}
	if level := sound(section.NewSurveyed([][2]float64{{0, 2}, {0, 0}, {3, 0}, {3, 2}})).Steepest(1); level != 0 {
		t.Errorf("walls: %v", level)
	}
}
