package demo_test

import (
	"encoding/json"
	"math"
	"os"
	"strconv"
	"testing"

	"leat/api/operation"
	"leat/cmd/internal/demo"
)

// Every depth of the register, through the whole service but HTTP, against a second computation with 40 digits by
// testdata/ostermere_references.py, which shares no formula and no way of solving with the program.
func TestDepthsAgreeWithReferences(t *testing.T) {
	const tolerance = 1e-12 // relative; what is promised is 1e-9
	text, err := os.ReadFile("../../../testdata/ostermere_references.json")
	if err != nil {
		t.Fatal(err)
	}
	var references []struct {
		Line     int     `json:"line"`
		Normal   *string `json:"normal_depth"`
		Critical *string `json:"critical_depth"`
		Velocity *string `json:"normal_velocity"`
	}
	if err := json.Unmarshal(text, &references); err != nil {
		t.Fatal(err)
	}
	lawful := demo.Rows
	for _, m := range demo.Mistakes {
		if m.Status != 200 {
			lawful--
		}
	}
	if len(references) != lawful {
		t.Fatalf("references for %d rows, want %d; make them anew with testdata/ostermere_references.py", len(references), lawful)
	}
	register := demo.Register()
	depths := depths(t)
	worst := map[string]float64{}
	for _, r := range references {
		answer, _, problem := depths.Answer(nil, []byte(register[r.Line-1].Text), operation.Options{Brief: true})
		if problem != nil {
			t.Errorf("line %d: %s", r.Line, problem.Detail)
			continue
		}
		var got struct {
			Normal   *float64 `json:"normal_depth"`
			Critical *float64 `json:"critical_depth"`
			Velocity *float64 `json:"normal_velocity"`
			Class    string   `json:"slope_class"`
		}
		if err := json.Unmarshal(answer, &got); err != nil {
			t.Fatal(err)
		}
		// The classes of Bakhmeteff (1932), by the references' own depths.
		if r.Normal != nil && r.Critical != nil {
			want := "steep"
			if number(t, *r.Normal) > number(t, *r.Critical) {
				want = "mild"
			}
			if got.Class != want {
				t.Errorf("line %d: slope class %s, want %s", r.Line, got.Class, want)
			}
		}
		for _, c := range []struct {
			name string
			got  *float64
			want *string
		}{
			{"normal_depth", got.Normal, r.Normal},
			{"critical_depth", got.Critical, r.Critical},
			{"normal_velocity", got.Velocity, r.Velocity},
		} {
			if (c.got == nil) != (c.want == nil) {
				t.Errorf("line %d: one side has no %s: %s", r.Line, c.name, answer)
				continue
			}
			if c.got == nil {
				continue
			}
			want := number(t, *c.want)
			off := math.Abs(*c.got-want) / want
			worst[c.name] = max(worst[c.name], off)
			if !(off <= tolerance) {
				t.Errorf("line %d: %s %v, want %v", r.Line, c.name, *c.got, want)
			}
		}
	}
	t.Logf("greatest relative difference from the references: %v", worst)
}

func number(t *testing.T, text string) float64 {
	t.Helper()
	x, err := strconv.ParseFloat(text, 64)
	if err != nil {
		t.Fatal(err)
	}
	return x
}
