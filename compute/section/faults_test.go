package section

import (
	"errors"
	"math"
	"strings"
	"testing"

	"leat/compute"
)

func TestFaults(t *testing.T) {
	nan, inf := math.NaN(), math.Inf(1)
	line := func(p ...[2]float64) func() (Section, error) {
		return func() (Section, error) { return NewSurveyed(p) }
	}
	table := func(r ...[4]float64) func() (Section, error) {
		return func() (Section, error) { return NewTabulated(r) }
	}
	two := func(s TwoStage) func() (Section, error) { return func() (Section, error) { return NewTwoStage(s) } }
	for _, c := range []struct {
		name string
		make func() (Section, error)
		want string // member:code, in order
	}{
		{"rectangular", func() (Section, error) { return NewRectangular(0) }, "bottom_width:not_positive"},
		{"trapezoidal", func() (Section, error) { return NewTrapezoidal(-1, nan, -2) }, "bottom_width:not_positive left_side_slope:not_a_number right_side_slope:negative"},
		{"trapezoidal too wide", func() (Section, error) { return NewTrapezoidal(1e10, 1, 1e7) }, "bottom_width:out_of_range right_side_slope:out_of_range"},
		{"triangular of no width", func() (Section, error) { return NewTriangular(0, 0) }, "left_side_slope:no_width"},
		{"triangular", func() (Section, error) { return NewTriangular(-1, inf) }, "left_side_slope:negative right_side_slope:not_a_number"},
		{"parabolic", func() (Section, error) { return NewParabolic(0, 1e-10) }, "top_width:not_positive height:out_of_range"},
		{"u_shaped", func() (Section, error) { return NewUShaped(nan) }, "width:not_a_number"},
		{"circular", func() (Section, error) { return NewCircular(-0.3) }, "diameter:not_positive"},
		{"box", func() (Section, error) { return NewBox(0, inf, -1) }, "width:not_positive height:not_a_number haunch:negative"},
		{"box with wide haunches", func() (Section, error) { return NewBox(1, 2, 0.51) }, "haunch:too_large"},
		{"box with high haunches", func() (Section, error) { return NewBox(4, 1, 1.1) }, "haunch:too_large"},
		{"elliptical", func() (Section, error) { return NewElliptical(0, -1) }, "width:not_positive height:not_positive"},
		{"egg", func() (Section, error) { return NewEgg(0, true) }, "height:not_positive"},
		{"horseshoe", func() (Section, error) { return NewHorseshoe(inf) }, "height:not_a_number"},
		{"gutter", func() (Section, error) { return NewGutter(0, 0, 0, 0) }, "cross_slope:not_positive curb_height:not_positive"},
		{"gutter beyond its bounds", func() (Section, error) { return NewGutter(1e-7, 0.1, nan, inf) }, "cross_slope:out_of_range gutter_width:not_a_number gutter_slope:not_a_number"},
		{"bench too wide", two(TwoStage{1, 1, 1, 1, 2e9, 0, 1}), "left_bench_width:out_of_range"},
		{"areas beyond their bounds", table([4]float64{1, inf, 3, 3}, [4]float64{2, 1e19, 3, 3}), "rows/0/1:not_a_number rows/1/1:out_of_range"},
		{"gutter without its slope", func() (Section, error) { return NewGutter(0.02, 0.1, 0.5, 0) }, "gutter_slope:missing"},
		{"gutter without its width", func() (Section, error) { return NewGutter(0.02, 0.1, 0, -1) }, "gutter_width:missing gutter_slope:not_positive"},
		{"two_stage", two(TwoStage{0, -1, nan, -1, -1, inf, 1e7}),
			"bottom_width:not_positive left_side_slope:negative right_side_slope:not_a_number bench_height:not_positive left_bench_width:negative right_bench_width:not_a_number upper_side_slope:out_of_range"},
		{"no points", line(), "points:too_few"},
		{"one point", line([2]float64{1, 1}), "points:too_few"},
		{"a level line", line([2]float64{0, 1}, [2]float64{5, 1}), "points:no_depth"},
		{"a wall alone", line([2]float64{0, 1}, [2]float64{0, 5}), "points:no_width"},
		{"falling offsets", line([2]float64{0, 2}, [2]float64{2, 0}, [2]float64{1, 0}, [2]float64{nan, 1}, [2]float64{5, inf}, [2]float64{4, 2}), "points/2/0:falling_offset points/3/0:not_a_number points/4/1:not_a_number points/5/0:falling_offset"},
		{"a wall that folds back", line([2]float64{0, 2}, [2]float64{0, -1}, [2]float64{0, -1}, [2]float64{0, 0}, [2]float64{3, 2}), "points/3:lines_overlap"},
		{"far away", line([2]float64{-2e9, 2}, [2]float64{0, 1e-120}, [2]float64{1, 3}), "points/0/0:out_of_range points/1/1:out_of_range"},
		{"no rows", table(), "rows:too_few"},
		{"rows that do not rise", table([4]float64{1, 2, 4, 3}, [4]float64{1, 2, 3, 3}), "rows/1/0:not_rising rows/1/1:not_rising rows/1/2:falling_perimeter"},
		{"rows of nothing", table([4]float64{0, -1, nan, 0}), "rows/0/0:not_positive rows/0/1:not_positive rows/0/2:not_a_number rows/0/3:not_positive"},
		{"a perimeter too short", table([4]float64{1, 2, 2.9, 3}), "rows/0/2:perimeter_too_short"},
		{"a cubic that falls", table([4]float64{1, 2, 9, 8}, [4]float64{2, 3, 11, 9}), "rows/1:area_not_monotone"},
		{"an area too small", table([4]float64{1, 1e-4, 9, 8}), "rows/0/1:too_small"},
	} {
		s, err := c.make()
		var faults compute.Faults
		if !errors.As(err, &faults) || s != nil {
			t.Errorf("%s: %v, %v", c.name, s, err)
			continue
		}
		var got []string
		for _, f := range faults {
			got = append(got, f.Member+":"+f.Code)
			if !strings.HasSuffix(f.Detail, ".") {
				t.Errorf("%s: detail is no sentence: %q", c.name, f.Detail)
			}
		}
		if g := strings.Join(got, " "); g != c.want {
			t.Errorf("%s: %s, want %s", c.name, g, c.want)
		}
	}
}

// What lies at the border of the possible is taken.
func TestBorderlineSectionsAreTaken(t *testing.T) {
	for name, err := range map[string]error{
		"haunch of half the width":             second(NewBox(2, 1, 1)),
		"vertical V":                           second(NewTriangular(0, 1e-3)),
		"least size":                           second(NewCircular(1e-9)),
		"greatest size":                        second(NewCircular(1e9)),
		"one row":                              second(NewTabulated([][4]float64{{1, 2, 3, 3}})),
		"one bank":                             second(NewSurveyed([][2]float64{{0, 1}, {4, 0}})),
		"a point twice":                        second(NewSurveyed([][2]float64{{0, 1}, {4, 0}, {4, 0}, {5, 1}})),
		"wall in steps":                        second(NewSurveyed([][2]float64{{0, 3}, {0, 2}, {0, 1}, {5, 1}, {5, 4}})),
		"width that touches zero":              second(NewTabulated([][4]float64{{1, 2, 9, 3}, {2, 3, 11, 3}})),
		"two_stage without one bench":          second(NewTwoStage(TwoStage{1, 0, 0, 1, 0, 2, 0})),
		"gutter flatter than the street":       second(NewGutter(0.05, 0.1, 0.5, 0.02)),
		"levels that differ in the last place": second(NewSurveyed([][2]float64{{0, 1}, {1, 0.1 + 0.2}, {2, 0.3}, {3, 1}})),
	} {
		if err != nil {
			t.Errorf("%s: %v", name, err)
		}
	}
}

func second(_ Section, err error) error { return err }

func TestFaultsOfOffsets(t *testing.T) {
	s := must(NewSurveyed([][2]float64{{-5, 3}, {0, 0}, {5, 3}})).(Zoned)
	_, err := s.Part([]float64{-5, 1, 1, 0, math.NaN(), 5})
	var faults compute.Faults
	if !errors.As(err, &faults) {
		t.Fatal(err)
	}
	var got []string
	for _, f := range faults {
		got = append(got, f.Member+":"+f.Code)
	}
	if g := strings.Join(got, " "); g != "0:outside_section 2:not_rising 3:not_rising 4:not_a_number 5:outside_section" {
		t.Error(g)
	}
	if parts, err := must(NewTwoStage(TwoStage{2, 1, 1, 1, 1, 1, 1})).(Zoned).Part([]float64{-1e6, 1e6}); err != nil || len(parts) != 3 {
		t.Errorf("two_stage far out: %v, %v", parts, err)
	}
	if _, err := must(NewTwoStage(TwoStage{2, 0, 0, 1, 1, 1, 0})).(Zoned).Part([]float64{2.5}); err == nil {
		t.Error("an offset outside upright walls was taken")
	}
}
