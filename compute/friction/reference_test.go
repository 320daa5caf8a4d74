package friction_test

import (
	"bytes"
	"encoding/json"
	"fmt"
	"math"
	"os"
	"strconv"
	"testing"

	"leat/compute/friction"
	"leat/compute/section"
)

type referenceGeometry struct {
	Area          float64 `json:"area"`
	Perimeter     float64 `json:"perimeter"`
	TopWidth      float64 `json:"top_width"`
	PerimeterRate float64 `json:"perimeter_rate"`
}

func (r referenceGeometry) geometry() section.Geometry {
	return section.Geometry{Depth: 1, Area: r.Area, Perimeter: r.Perimeter, TopWidth: r.TopWidth, PerimeterRate: r.PerimeterRate}
}

type reference struct {
	Law       string              `json:"law"`
	Combine   string              `json:"combine"`
	Geometry  referenceGeometry   `json:"geometry"`
	Parts     []referenceGeometry `json:"parts"`
	ZoneN     []float64           `json:"zone_n"`
	N         float64             `json:"n"`
	C         float64             `json:"c"`
	Sand      float64             `json:"ks"`
	Viscosity float64             `json:"nu"`
	Gravity   float64             `json:"gravity"`
	Discharge float64             `json:"discharge"`
	Slope     float64             `json:"slope"`
	Relative  float64             `json:"relative_roughness"`
	Reynolds  float64             `json:"reynolds"`
	Width     float64             `json:"width"`
	Bed       float64             `json:"bed"`
	Sides     float64             `json:"sides"`
	K         string              `json:"k"`
	Rate      string              `json:"rate"`
	Alpha     string              `json:"alpha"`
	AlphaRate string              `json:"alpha_rate"`
	Beta      string              `json:"beta"`
	BetaRate  string              `json:"beta_rate"`
}

// bedded is a still section with a bed.
type bedded struct {
	still
	width float64
}

func (b bedded) BedWidth() float64 { return b.width }

var combinations = map[string]friction.Combination{
	"divided": friction.Divided, "horton_einstein": friction.HortonEinstein, "lotter": friction.Lotter, "pavlovskii": friction.Pavlovskii,
}

func number(t *testing.T, text string) float64 {
	t.Helper()
	x, err := strconv.ParseFloat(text, 64)
	if err != nil {
		t.Fatal(err)
	}
	return x
}

// TestLawsMeetReferences holds every law against values computed at 60 digits by testdata/references/friction.py with mpmath.
func TestLawsMeetReferences(t *testing.T) {
	data, err := os.ReadFile("../../testdata/references/friction.json")
	if err != nil {
		t.Fatal(err)
	}
	decoder := json.NewDecoder(bytes.NewReader(data))
	decoder.DisallowUnknownFields()
	var references []reference
	if err := decoder.Decode(&references); err != nil {
		t.Fatal(err)
	}
	seen := map[string]int{}
	worst := map[string]float64{}
	for i, r := range references {
		seen[r.Law+" "+r.Combine]++
		t.Run(fmt.Sprintf("%s %s %d", r.Law, r.Combine, i), func(t *testing.T) {
			g := r.Geometry.geometry()
			var law friction.Law
			var got friction.Conveyance
			switch r.Law {
			case "manning":
				law = must(friction.NewManning(r.N))
				got = law.AtSlope(g, 0.5)
			case "chezy":
				law = must(friction.NewChezy(r.C))
				got = law.AtDischarge(g, 3)
			case "sand_roughness_slope":
				law = must(friction.NewSandRoughness(r.Sand, r.Viscosity, r.Gravity))
				got = law.AtSlope(g, r.Slope)
			case "sand_roughness_discharge":
				law = must(friction.NewSandRoughness(r.Sand, r.Viscosity, r.Gravity))
				got = law.AtDischarge(g, r.Discharge)
			case "darcy_factor":
				f, exists := friction.DarcyFactor(r.Reynolds, r.Relative)
				if !exists {
					t.Fatal("no friction factor")
				}
				near(t, "f", f, number(t, r.K), 1e-13, 0)
				return
			case "bed_and_sides":
				law = must(friction.NewBedAndSides(bedded{still{g}, r.Width}, r.Bed, r.Sides, combinations[r.Combine]))
				got = law.AtSlope(g, 0.5)
			case "zones":
				var parts []section.Section
				for _, part := range r.Parts {
					parts = append(parts, still{part.geometry()})
				}
				law = must(friction.NewZones(whole{parts: parts}, make([]float64, len(parts)-1), r.ZoneN, combinations[r.Combine]))
				got = law.AtDischarge(g, 1)
				c := law.Coefficients(g)
				rate := 5 * (g.TopWidth/g.Area + g.PerimeterRate/g.Perimeter)
				for _, part := range r.Parts {
					rate += part.PerimeterRate / part.Perimeter
				}
				near(t, "alpha", c.Energy, number(t, r.Alpha), 1e-13, 0)
				near(t, "beta", c.Momentum, number(t, r.Beta), 1e-13, 0)
				near(t, "dalpha", c.EnergyRate, number(t, r.AlphaRate), 1e-12, rate*c.Energy)
				near(t, "dbeta", c.MomentumRate, number(t, r.BetaRate), 1e-12, rate*c.Momentum)
			default:
				t.Fatalf("unknown law %q", r.Law)
			}
			want := number(t, r.K)
			// Where the flow is nearly as shallow as its roughness, the float64 radius itself leaves this much undecided.
			tolerance := 1e-14
			if r.Sand > 0 {
				radius := g.Area / g.Perimeter
				tolerance /= math.Min(1, math.Max(1e-5, 1-r.Sand/(14.8*radius)-smooth(r, radius)))
			}
			near(t, "K", got.K, want, tolerance, 0)
			scale := math.Abs(want) * (g.TopWidth/g.Area + g.PerimeterRate/g.Perimeter)
			near(t, "dK/dy", got.Rate, number(t, r.Rate), 10*tolerance, scale)
			if want > 0 {
				worst[r.Law] = math.Max(worst[r.Law], math.Abs(got.K/want-1))
			}
		})
	}
	t.Logf("cases: %v; largest relative error of K: %v", seen, worst)
	for _, law := range []string{"manning ", "chezy ", "sand_roughness_slope ", "sand_roughness_discharge ", "darcy_factor ",
		"bed_and_sides horton_einstein", "bed_and_sides pavlovskii", "zones divided", "zones horton_einstein", "zones pavlovskii"} {
		if seen[law] < 30 {
			t.Errorf("only %d references of %q", seen[law], law)
		}
	}
}

func smooth(r reference, radius float64) float64 {
	if r.Slope == 0 {
		return 0
	}
	return 2.51 * r.Viscosity / (4 * radius * math.Sqrt(8*r.Gravity*radius*r.Slope))
}
