package section

import (
	"encoding/json"
	"errors"
	"math"
	"math/big"
	"os"
	"testing"
)

// described is a section in the names of the trade, as the reference data hold it.
type described struct {
	Kind            string       `json:"kind"`
	BottomWidth     float64      `json:"bottom_width"`
	LeftSideSlope   float64      `json:"left_side_slope"`
	RightSideSlope  float64      `json:"right_side_slope"`
	SideSlope       float64      `json:"side_slope"`
	TopWidth        float64      `json:"top_width"`
	Width           float64      `json:"width"`
	Height          float64      `json:"height"`
	Diameter        float64      `json:"diameter"`
	Haunch          float64      `json:"haunch"`
	Inverted        bool         `json:"inverted"`
	CrossSlope      float64      `json:"cross_slope"`
	CurbHeight      float64      `json:"curb_height"`
	GutterWidth     float64      `json:"gutter_width"`
	GutterSlope     float64      `json:"gutter_slope"`
	BenchHeight     float64      `json:"bench_height"`
	LeftBenchWidth  float64      `json:"left_bench_width"`
	RightBenchWidth float64      `json:"right_bench_width"`
	UpperSideSlope  float64      `json:"upper_side_slope"`
	Points          [][2]float64 `json:"points"`
	Rows            [][4]float64 `json:"rows"`
}

func (d described) build() (Section, error) {
	switch d.Kind {
	case "rectangular":
		return NewRectangular(d.BottomWidth)
	case "trapezoidal":
		return NewTrapezoidal(d.BottomWidth, d.LeftSideSlope, d.RightSideSlope)
	case "triangular":
		return NewTriangular(d.LeftSideSlope, d.RightSideSlope)
	case "parabolic":
		return NewParabolic(d.TopWidth, d.Height)
	case "u_shaped":
		return NewUShaped(d.Width)
	case "circular":
		return NewCircular(d.Diameter)
	case "box":
		return NewBox(d.Width, d.Height, d.Haunch)
	case "elliptical":
		return NewElliptical(d.Width, d.Height)
	case "egg":
		return NewEgg(d.Height, d.Inverted)
	case "horseshoe":
		return NewHorseshoe(d.Height)
	case "gutter":
		return NewGutter(d.CrossSlope, d.CurbHeight, d.GutterWidth, d.GutterSlope)
	case "two_stage":
		return NewTwoStage(TwoStage{d.BottomWidth, d.SideSlope, d.SideSlope, d.BenchHeight, d.LeftBenchWidth, d.RightBenchWidth, d.UpperSideSlope})
	case "surveyed":
		return NewSurveyed(d.Points)
	case "tabulated":
		return NewTabulated(d.Rows)
	}
	return nil, errors.New("unknown kind " + d.Kind)
}

// state is the reference geometry at one depth, its numbers to 40 digits.
type state struct {
	Depth         float64 `json:"depth"`
	Area          string  `json:"area"`
	Perimeter     string  `json:"wetted_perimeter"`
	TopWidth      string  `json:"top_width"`
	Moment        string  `json:"moment"`
	PerimeterRate string  `json:"perimeter_rate"`
	TopWidthRate  string  `json:"top_width_rate"`
}

type references struct {
	Cases []struct {
		Section described `json:"section"`
		States  []state   `json:"states"`
	} `json:"cases"`
	Parted []struct {
		Section described `json:"section"`
		Offsets []float64 `json:"offsets"`
		Parts   [][]state `json:"parts"`
	} `json:"parted"`
}

func loadReferences(t *testing.T) (r references) {
	t.Helper()
	data, err := os.ReadFile("../../testdata/references/section.json")
	if err != nil {
		t.Fatal(err)
	}
	if err := json.Unmarshal(data, &r); err != nil {
		t.Fatal(err)
	}
	if len(r.Cases) < 40 || len(r.Parted) < 3 {
		t.Fatalf("only %d and %d cases", len(r.Cases), len(r.Parted))
	}
	return r
}

// offBy returns the relative error of a value against one of 40 digits. A reference of 0 must be met exactly.
func offBy(t *testing.T, got float64, want string) float64 {
	t.Helper()
	w, _, err := big.ParseFloat(want, 10, 200, big.ToNearestEven)
	if err != nil {
		t.Fatal(err)
	}
	if w.Sign() == 0 {
		return math.Abs(got)
	}
	if got != got || math.IsInf(got, 0) {
		return math.Inf(1)
	}
	d := new(big.Float).Sub(new(big.Float).SetPrec(200).SetFloat64(got), w)
	off, _ := d.Quo(d, w).Float64()
	return math.Abs(off)
}

type worst struct {
	off   float64
	where string
	depth float64
}

func (w *worst) see(off float64, where string, depth float64) {
	if !(off <= w.off) {
		*w = worst{off, where, depth}
	}
}

// compareStates returns the worst relative errors of the values and of the rates. A rate is measured against what its own quantity
// has per unit depth where it passes through zero.
func compareStates(t *testing.T, s Section, states []state) (values, rates worst) {
	t.Helper()
	for _, want := range states {
		g := s.At(want.Depth)
		values.see(offBy(t, g.Area, want.Area), "area", want.Depth)
		values.see(offBy(t, g.Perimeter, want.Perimeter), "perimeter", want.Depth)
		values.see(offBy(t, g.TopWidth, want.TopWidth), "top width", want.Depth)
		values.see(offBy(t, g.Moment, want.Moment), "moment", want.Depth)
		rates.see(offBy(t, g.PerimeterRate, want.PerimeterRate), "perimeter rate", want.Depth)
		w, _, _ := big.ParseFloat(want.TopWidthRate, 10, 200, big.ToNearestEven)
		rate, _ := w.Float64()
		scale := math.Max(math.Abs(rate), g.TopWidth/want.Depth)
		if scale == 0 {
			scale = 1
		}
		rates.see(math.Abs(g.TopWidthRate-rate)/scale, "top width rate", want.Depth)
	}
	return values, rates
}

// References to 40 digits by numerical integration and clipping: testdata/references/section.py.
func TestReferences(t *testing.T) {
	all := map[string]*worst{}
	kinds := map[string]bool{}
	for _, c := range loadReferences(t).Cases {
		s, err := c.Section.build()
		if err != nil {
			t.Errorf("%+v: %v", c.Section, err)
			continue
		}
		kinds[c.Section.Kind] = true
		values, rates := compareStates(t, s, c.States)
		if !(values.off <= 4e-15) {
			t.Errorf("%+v: %s at %v is off by %v", c.Section, values.where, values.depth, values.off)
		}
		if !(rates.off <= 4e-15) {
			t.Errorf("%+v: %s at %v is off by %v", c.Section, rates.where, rates.depth, rates.off)
		}
		if all[c.Section.Kind] == nil {
			all[c.Section.Kind] = &worst{}
		}
		all[c.Section.Kind].see(values.off, values.where, values.depth)
		all[c.Section.Kind].see(rates.off, rates.where, rates.depth)
	}
	for kind, w := range all {
		t.Logf("%-12s worst %.2g (%s at %v)", kind, w.off, w.where, w.depth)
	}
	if len(kinds) != 14 {
		t.Errorf("references for %d kinds, want 14", len(kinds))
	}
}

func TestReferencesOfParts(t *testing.T) {
	for _, c := range loadReferences(t).Parted {
		s, err := c.Section.build()
		if err != nil {
			t.Fatal(err)
		}
		parts, err := s.(Zoned).Part(c.Offsets)
		if err != nil {
			t.Fatal(err)
		}
		if len(parts) != len(c.Parts) {
			t.Fatalf("%d parts, want %d", len(parts), len(c.Parts))
		}
		for i, part := range parts {
			var wet []state
			for _, w := range c.Parts[i] {
				if w.Area == "0.0" {
					if g := part.At(w.Depth); g != (Geometry{}) {
						t.Errorf("%s part %d at %v is dry, got %+v", c.Section.Kind, i, w.Depth, g)
					}
					continue
				}
				wet = append(wet, w)
			}
			values, rates := compareStates(t, part, wet)
			if !(values.off <= 4e-15) {
				t.Errorf("%s part %d: %s at %v is off by %v", c.Section.Kind, i, values.where, values.depth, values.off)
			}
			if !(rates.off <= 4e-15) {
				t.Errorf("%s part %d: %s at %v is off by %v", c.Section.Kind, i, rates.where, rates.depth, rates.off)
			}
		}
	}
}
