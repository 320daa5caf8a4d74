package section

import (
	"testing"

	"pgregory.net/rapid"
)

// must returns a section that the test knows to be possible.
func must(s Section, err error) Section {
	if err != nil {
		panic(err)
	}
	return s
}

// samples holds one section of each kind, and of each variant that runs other code.
var samples = []struct {
	name    string
	section Section
}{
	{"rectangular", must(NewRectangular(3))},
	{"trapezoidal", must(NewTrapezoidal(2, 1.5, 2))},
	{"triangular", must(NewTriangular(1, 3))},
	{"parabolic", must(NewParabolic(4, 1.2))},
	{"u_shaped", must(NewUShaped(1.4))},
	{"circular", must(NewCircular(0.9))},
	{"box", must(NewBox(1.8, 1.2, 0))},
	{"box with haunches", must(NewBox(1.8, 1.2, 0.2))},
	{"elliptical", must(NewElliptical(1.6, 1))},
	{"elliptical upright", must(NewElliptical(0.7, 1.3))},
	{"egg", must(NewEgg(1.5, false))},
	{"egg inverted", must(NewEgg(1.5, true))},
	{"horseshoe", must(NewHorseshoe(2))},
	{"gutter", must(NewGutter(0.02, 0.15, 0.6, 0.08))},
	{"two_stage", must(NewTwoStage(TwoStage{3, 1.5, 1.5, 0.8, 4, 2, 2}))},
	{"surveyed", must(NewSurveyed([][2]float64{{0, 3.2}, {2.5, 2.1}, {4, 0.4}, {5.1, 0.4}, {7.3, 2.3}, {9, 1.1}, {11, 2.35}, {11, 4}, {12.6, 4}}))},
	{"tabulated", must(NewTabulated([][4]float64{{0.4, 0.9, 3.3, 3.1}, {1, 3.1, 5, 4.4}, {1.7, 6.9, 7.1, 6.8}, {2.2, 10.8, 8.9, 8.4}}))},
}

// reach returns a depth up to which a section is tried.
func reach(s Section) float64 { return min(s.Height(), 6) }

func size(t *rapid.T, name string) float64 { return rapid.Float64Range(0.05, 8).Draw(t, name) }

// anySection draws a section of any kind.
func anySection(t *rapid.T) Section {
	slope := func(name string) float64 { return rapid.Float64Range(0, 4).Draw(t, name) }
	switch rapid.SampledFrom([]string{"rectangular", "trapezoidal", "triangular", "parabolic", "u_shaped", "circular", "box", "elliptical",
		"egg", "horseshoe", "gutter", "two_stage", "surveyed", "tabulated"}).Draw(t, "kind") {
	case "rectangular":
		return must(NewRectangular(size(t, "width")))
	case "trapezoidal":
		return must(NewTrapezoidal(size(t, "width"), slope("left"), slope("right")))
	case "triangular":
		return must(NewTriangular(slope("left"), 0.1+slope("right")))
	case "parabolic":
		return must(NewParabolic(size(t, "width"), size(t, "height")))
	case "u_shaped":
		return must(NewUShaped(size(t, "width")))
	case "circular":
		return must(NewCircular(size(t, "diameter")))
	case "box":
		w, h := size(t, "width"), size(t, "height")
		return must(NewBox(w, h, min(h, w/2)*rapid.Float64Range(0, 1).Draw(t, "haunch")))
	case "elliptical":
		w := size(t, "width")
		return must(NewElliptical(w, w*rapid.Float64Range(0.1, 10).Draw(t, "shape"))) // flatter ones bend too sharply for numeric differences
	case "egg":
		return must(NewEgg(size(t, "height"), rapid.Bool().Draw(t, "inverted")))
	case "horseshoe":
		return must(NewHorseshoe(size(t, "height")))
	case "gutter":
		return must(NewGutter(0.01+slope("cross")/10, size(t, "curb"), size(t, "width"), 0.01+slope("gutter")/10))
	case "two_stage":
		return must(NewTwoStage(TwoStage{size(t, "width"), slope("left"), slope("right"), size(t, "bench height"), size(t, "left bench"), size(t, "right bench"), slope("upper")}))
	case "surveyed":
		return must(NewSurveyed(anyPoints(t)))
	default:
		return must(NewTabulated(anyRows(t)))
	}
}

// anyPoints draws a possible surveyed line, on a coarse grid so that levels meet.
func anyPoints(t *rapid.T) [][2]float64 {
	n := rapid.IntRange(2, 14).Draw(t, "points")
	points := make([][2]float64, 0, n+2)
	x := float64(rapid.IntRange(-20, 20).Draw(t, "first"))
	for range n {
		z := 7 + 0.25*float64(rapid.IntRange(0, 12).Draw(t, "level"))
		points = append(points, [2]float64{x, z})
		step := 0.5 * float64(rapid.IntRange(0, 4).Draw(t, "step"))
		if k := len(points); k > 1 && points[k-2][0] == x {
			step += 0.5 // a wall of two points only
		}
		x += step
	}
	points = append(points, [2]float64{x + 1, 6.5}, [2]float64{x + 3, 8.5})
	return points
}

// anyRows draws a table from a channel with sloping sides, which is monotone.
func anyRows(t *rapid.T) [][4]float64 {
	s := must(NewTrapezoidal(size(t, "width"), 0.5, rapid.Float64Range(0, 3).Draw(t, "slope")))
	y := 0.0
	var rows [][4]float64
	for range rapid.IntRange(1, 6).Draw(t, "rows") {
		y += rapid.Float64Range(0.05, 2).Draw(t, "rise")
		g := s.At(y)
		rows = append(rows, [4]float64{y, g.Area, g.Perimeter, g.TopWidth})
	}
	return rows
}

func TestMethodsDoNotAllocate(t *testing.T) {
	for _, s := range samples {
		depth := 0.0
		if n := testing.AllocsPerRun(50, func() {
			depth += reach(s.section) / 60
			g, full := s.section.At(depth), s.section.Full()
			_, _ = g.Radius(), full.Radius()
			_, _ = s.section.Bank()
			_ = s.section.Breaks()
			_ = s.section.Form()
			if v, ok := s.section.(Surveyed); ok {
				_ = v.Ends(depth)
			}
		}); n != 0 {
			t.Errorf("%s: %v allocations", s.name, n)
		}
	}
}

func BenchmarkAt(b *testing.B) {
	for _, s := range samples {
		b.Run(s.name, func(b *testing.B) {
			depths := [8]float64{}
			for i := range depths {
				depths[i] = reach(s.section) * (float64(i) + 0.5) / 8
			}
			sum := 0.0
			for i := 0; b.Loop(); i++ {
				sum += s.section.At(depths[i&7]).Area
			}
			if sum == 0 {
				b.Fatal("no area")
			}
		})
	}
}

// A line that goes up and down between all its levels crosses every band with every stretch; compiling it must not take
// time in proportion to their product.
func BenchmarkCompileSawtooth(b *testing.B) {
	points := make([][2]float64, 20001)
	for i := range points {
		points[i] = [2]float64{float64(i), float64(i%2)*100 + float64(i)*1e-4}
	}
	for b.Loop() {
		if _, err := NewSurveyed(points); err != nil {
			b.Fatal(err)
		}
	}
}

func BenchmarkCompileSurvey(b *testing.B) {
	points := [][2]float64{{0, 3.2}, {2.5, 2.1}, {4, 0.4}, {5.1, 0.4}, {7.3, 2.3}, {9, 1.1}, {11, 2.35}, {11, 4}, {12.6, 4}}
	b.ReportAllocs()
	for b.Loop() {
		if _, err := NewSurveyed(points); err != nil {
			b.Fatal(err)
		}
	}
}
