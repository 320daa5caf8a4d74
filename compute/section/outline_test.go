package section

import (
	"math"
	"testing"
)

// The area below a level that an outline encloses (by Gauss's area formula) is the section's own, by quite another way.
func TestOutlinesEncloseTheArea(t *testing.T) {
	for _, sample := range samples {
		s := sample.section
		to := min(s.Height(), 2.6)
		line, exact := Outline(s, to)
		if _, table := s.(*Tabulated); exact == table {
			t.Errorf("%s: exact %v", sample.name, exact)
		}
		tolerance := 2e-3 // of chords, most of it near the bed
		switch s.(type) {
		case *Trapezoidal, *Triangular, *Benched, *Gutter, *SurveyedLine, *Box:
			tolerance = 1e-7
		case *Tabulated: // below its first row a table has the area of a power, whose width need not end at zero
			tolerance = 1e-2
		}
		for _, share := range []float64{0.15, 0.4, 0.75, 0.999} {
			level := share * to
			if got, want := enclosed(line, level), s.At(level).Area; !(math.Abs(got-want) <= tolerance*want) {
				t.Errorf("%s up to %g: the outline encloses %.9g, the section %.9g", sample.name, level, got, want)
			}
		}
		for i := 1; i < len(line); i++ {
			if _, table := s.(*Tabulated); line[i][0] < line[i-1][0] && !s.Closed() && !table { // a table's width may fall between rows
				t.Errorf("%s: offset %d falls", sample.name, i)
			}
		}
		for i, p := range line {
			if math.IsNaN(p[0]+p[1]) || math.IsInf(p[0]+p[1], 0) || p[1] < 0 {
				t.Errorf("%s: point %d is %v", sample.name, i, p)
			}
		}
	}
	if got := enclosed([][2]float64{{0, 1}, {0, 0}, {2, 0}, {2, 1}}, 0.5); got != 1 {
		t.Fatalf("the measure itself: %v", got)
	}
}

// enclosed returns the area between a line and a level above it.
func enclosed(line [][2]float64, level float64) float64 {
	area := 0.0
	for i := 1; i < len(line); i++ {
		a, b := line[i-1], line[i]
		da, db := level-a[1], level-b[1]
		switch {
		case da >= 0 && db >= 0:
			area += (b[0] - a[0]) * (da + db) / 2
		case da > 0:
			area += (b[0] - a[0]) * da / (da - db) * da / 2
		case db > 0:
			area += (b[0] - a[0]) * db / (db - da) * db / 2
		}
	}
	return area
}

func TestOutlineOfASurveyGoesStraightUp(t *testing.T) {
	s := must(NewSurveyed([][2]float64{{0, 12}, {1, 10}, {3, 10}, {4, 11}}))
	line, _ := Outline(s, 3)
	want := [][2]float64{{0, 3}, {0, 2}, {1, 0}, {3, 0}, {4, 1}, {4, 3}}
	if len(line) != len(want) {
		t.Fatalf("%v", line)
	}
	for i := range want {
		if line[i] != want[i] {
			t.Errorf("point %d is %v, want %v", i, line[i], want[i])
		}
	}
}
