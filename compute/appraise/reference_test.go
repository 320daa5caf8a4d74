package appraise_test

import (
	"bytes"
	"encoding/json"
	"fmt"
	"math"
	"os"
	"strconv"
	"testing"

	"leat/compute/appraise"
	"leat/compute/flow"
	"leat/compute/friction"
	"leat/compute/section"
)

// liningCase is a case of testdata/references/lining.json.
type liningCase struct {
	What            string   `json:"what"`
	Bottom          float64  `json:"bottom"`
	Left            float64  `json:"left"`
	Right           float64  `json:"right"`
	Depth           float64  `json:"depth"`
	Roughness       float64  `json:"roughness"` // Cn of grass, size of stones in m
	Gravity         float64  `json:"gravity"`
	Slope           float64  `json:"slope"`
	Discharge       float64  `json:"discharge"`
	SideSlope       float64  `json:"side_slope"`
	Repose          float64  `json:"angle_of_repose"`
	SpecificGravity float64  `json:"specific_gravity"`
	KSlope          string   `json:"k_slope"`
	RateSlope       string   `json:"rate_slope"`
	KDischarge      string   `json:"k_discharge"`
	RateDischarge   string   `json:"rate_discharge"`
	Depths          []string `json:"depths"`
	Safety          string   `json:"safety"`
}

func number(t *testing.T, text string) float64 {
	t.Helper()
	x, err := strconv.ParseFloat(text, 64)
	if err != nil {
		t.Fatal(err)
	}
	return x
}

// must returns a value that has to be possible.
func must[T any](value T, err error) T {
	if err != nil {
		panic(err)
	}
	return value
}

// near fails the test unless two numbers agree within a relative tolerance of the wanted one.
func near(t *testing.T, what string, got, want, tolerance float64) {
	t.Helper()
	if !(math.Abs(got-want) <= tolerance*math.Abs(want)) {
		t.Errorf("%s = %.17g, want %.17g", what, got, want)
	}
}

func trapezoid(bottom, left, right float64) section.Section {
	if bottom == 0 {
		return must(section.NewTriangular(left, right))
	}
	return must(section.NewTrapezoidal(bottom, left, right))
}

// TestReferences holds the laws of linings and the safety of stones against values computed at 60 digits by testdata/references/lining.py with mpmath.
func TestReferences(t *testing.T) {
	data := must(os.ReadFile("../../testdata/references/lining.json"))
	decoder := json.NewDecoder(bytes.NewReader(data))
	decoder.DisallowUnknownFields()
	var cases []liningCase
	if err := decoder.Decode(&cases); err != nil {
		t.Fatal(err)
	}
	seen := map[string]int{}
	for i, c := range cases {
		seen[c.What]++
		t.Run(fmt.Sprintf("%s %d", c.What, i), func(t *testing.T) {
			if c.What == "steep" {
				steep(t, c)
				return
			}
			s := trapezoid(c.Bottom, c.Left, c.Right)
			var law friction.Law
			switch c.What {
			case "grass", "grass_normal":
				law = must(friction.NewGrass(c.Roughness, c.Gravity))
			case "stones", "stones_normal":
				law = must(friction.NewStones(c.Roughness, c.Gravity, s))
			default:
				t.Fatalf("unknown case %q", c.What)
			}
			if c.Depths == nil {
				g := s.At(c.Depth)
				bySlope, byDischarge := law.AtSlope(g, c.Slope), law.AtDischarge(g, c.Discharge)
				near(t, "K at a slope", bySlope.K, number(t, c.KSlope), 1e-13)
				near(t, "K at a discharge", byDischarge.K, number(t, c.KDischarge), 1e-13)
				near(t, "its rate at a slope", bySlope.Rate, number(t, c.RateSlope), 1e-12)
				near(t, "its rate at a discharge", byDischarge.Rate, number(t, c.RateDischarge), 1e-12)
				return
			}
			channel := flow.Channel{Section: s, Law: law, Slope: c.Slope, Gravity: c.Gravity}
			depths, absent := channel.Normal(c.Discharge, nil)
			if len(depths) != len(c.Depths) {
				t.Fatalf("normal depths %v (%v), want %v", depths, absent, c.Depths)
			}
			for i := range depths {
				seen["depths"]++
				near(t, "normal depth", depths[i], number(t, c.Depths[i]), 1e-13)
			}
			switch len(depths) {
			case 0:
				seen["none"]++
				if absent != flow.LawChanges {
					t.Errorf("no normal depth: %v", absent)
				}
			case 2:
				seen["two"]++
			}
		})
	}
	t.Log(seen)
	for what, least := range map[string]int{"grass": 40, "stones": 80, "grass_normal": 14, "stones_normal": 14, "steep": 30, "depths": 28, "two": 3} {
		if seen[what] < least {
			t.Errorf("only %d of %s", seen[what], what)
		}
	}
}

// steep holds the safety of stones on a steep slope at a given depth.
func steep(t *testing.T, c liningCase) {
	s := must(section.NewTrapezoidal(2, c.SideSlope, c.SideSlope))
	rock := must(appraise.NewRiprap(appraise.Rock{StoneSize: c.Roughness, SpecificGravity: c.SpecificGravity, AngleOfRepose: c.Repose, Viscosity: math.NaN()}))
	channel := flow.Channel{Section: s, Law: must(rock.Roughness(s, c.Gravity)), Slope: c.Slope, Gravity: c.Gravity}
	asset := appraise.Asset{Channel: channel, Lining: rock}
	depths := flow.Depths{Normal: []float64{c.Depth}, Bank: math.NaN()}
	limits := appraise.Limits{Given: appraise.Of(appraise.LeastLiningSafety), LeastLiningSafety: 1}
	judgement := asset.Judge(1, &depths, &limits, appraise.All, nil)
	near(t, "safety", judgement.Lining.Safety, number(t, c.Safety), 1e-12)
}
