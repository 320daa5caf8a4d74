package demo_test

import (
	"bytes"
	"encoding/json"
	"flag"
	"os"
	"regexp"
	"strings"
	"testing"

	"leat/cmd/internal/demo"
)

const registerFile = "../../../testdata/ostermere.ndjson"

var update = flag.Bool("update", false, "write the register of Ostermere, its appraisals and its runs to testdata")

func TestCommittedRegisterIsTheGeneratorsOutput(t *testing.T) {
	var made bytes.Buffer
	if err := demo.Write(&made); err != nil {
		t.Fatal(err)
	}
	if *update {
		if err := os.WriteFile(registerFile, made.Bytes(), 0o644); err != nil {
			t.Fatal(err)
		}
	}
	committed, err := os.ReadFile(registerFile)
	if err != nil {
		t.Fatal(err)
	}
	if !bytes.Equal(made.Bytes(), committed) {
		t.Error("testdata/ostermere.ndjson differs from what the generator writes; if that is meant: go test ./cmd/internal/demo -update")
	}
}

func TestRegisterHoldsWhatItsTableSays(t *testing.T) {
	assets := demo.Register()
	if len(assets) != demo.Rows {
		t.Fatalf("%d rows, want %d", len(assets), demo.Rows)
	}
	wrong := map[int]demo.Mistake{}
	for _, m := range demo.Mistakes {
		wrong[m.Line] = m
	}
	if len(wrong) != len(demo.Mistakes) {
		t.Error("two mistakes share a line")
	}
	ids := map[string]bool{}
	shape := regexp.MustCompile(`^("[A-Z]{3}-[A-Z]{2}-\d{4}"|7\d{4})$`)
	for i, a := range assets {
		if a.Line != i+1 || !shape.MatchString(a.ID) || ids[a.ID] {
			t.Errorf("line %d: id %s is repeated or not of the register's form", i+1, a.ID)
		}
		ids[a.ID] = true
		if !strings.HasPrefix(a.Text, `{"id":`+a.ID+`,`) {
			t.Errorf("line %d does not begin with its id %s", i+1, a.ID)
		}
		m, isWrong := wrong[a.Line]
		if isWrong {
			if m.Text != a.Text || m.Told == "" || m.Status != 200 && m.Status != 400 && m.Status != 422 {
				t.Errorf("line %d: the table does not describe its row", a.Line)
			}
			continue
		}
		if !json.Valid([]byte(a.Text)) || strings.ContainsAny(a.Text, "\r\n") {
			t.Errorf("line %d is not one line of JSON: %s", a.Line, a.Text)
		}
	}
}

// A register that lacks one of these would try less than it seems to.
func TestRegisterHasEveryKindAndLaw(t *testing.T) {
	var all strings.Builder
	for _, a := range demo.Register() {
		all.WriteString(a.Text)
	}
	for _, word := range []string{
		"rectangular", "trapezoidal", "triangular", "parabolic", "u_shaped", "circular", "box", "elliptical", "egg", "horseshoe",
		"gutter", "two_stage", "surveyed", "tabulated", "left_side_slope", "left_bench_width", "inverted", "haunch", "gutter_width",
		"manning", "strickler", "chezy", "sand_roughness", "kinematic_viscosity", "zones", "manning_by_depth", "bed", "sides",
		"horton_einstein", "pavlovskii", "lotter", "barrels", "depth", "energy_coefficient", "momentum_coefficient", "us",
	} {
		if !strings.Contains(all.String(), `"`+word+`"`) {
			t.Errorf("no row has %q", word)
		}
	}
	for _, text := range []string{`"bed_slope":0,`, `"bed_slope":-0.0`} {
		if !strings.Contains(all.String(), text) {
			t.Errorf("no row has %s", text)
		}
	}
}
