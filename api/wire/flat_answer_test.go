package wire

import (
	"math"
	"reflect"
	"strings"
	"testing"

	"github.com/go-json-experiment/json/jsontext"
)

// The columns of flat answers are callers' own: new ones come at the end only.
func TestFlatColumnsOnlyGrowAtTheirEnd(t *testing.T) {
	const state = `depth area wetted_perimeter hydraulic_radius top_width hydraulic_depth centroid_depth conveyance uniform_discharge velocity velocity_head
froude_number specific_energy specific_force regime friction_slope bed_shear_stress stream_power`
	given := " given_" + strings.Join(strings.Fields(state), " given_")
	for _, c := range []struct {
		form Answer
		want string
	}{
		{(*DepthsAnswer)(nil), `id line units normal_depth critical_depth normal_absent critical_absent normal_velocity normal_froude_number normal_bed_shear_stress
fill slope_class critical_slope capacity_discharge capacity_depth capacity_full_discharge capacity_ratio freeboard surcharged full_friction_slope` +
			given + ` alternate_depth sequent_depth curve warnings problem fingerprint`},
		{(*AppraisalAnswer)(nil), "id line units verdict governing_flow governing_criterion governing_value governing_limit governing_unit notice warnings problem fingerprint"},
		{(*SectionAnswer)(nil), "id line units " + state + " warnings problem fingerprint"},
	} {
		var names []string
		for _, column := range FlatTableOf(c.form).Columns() {
			names = append(names, column.Name)
		}
		if got := strings.Join(names, " "); got != strings.Join(strings.Fields(c.want), " ") {
			t.Errorf("%T: %s", c.form, got)
		}
	}
	if FlatTableOf((*RatingAnswer)(nil)) != nil || FlatTableOf((*ProfileAnswer)(nil)) != nil {
		t.Error("an answer that is all lists has a flat form")
	}
}

// flatten gives the scalars of a JSON answer by flat name, as literals; lists are left out.
func flatten(t *testing.T, into map[string]string, prefix string, object []byte) {
	t.Helper()
	d := jsontext.NewDecoder(strings.NewReader(string(object)))
	if _, err := d.ReadToken(); err != nil {
		t.Fatal(err)
	}
	for d.PeekKind() != '}' {
		token, err := d.ReadToken()
		if err != nil {
			t.Fatal(err)
		}
		name := prefix + token.String()
		value, err := d.ReadValue()
		if err != nil {
			t.Fatal(err)
		}
		switch value.Kind() {
		case '{':
			flatten(t, into, name+"_", value)
		case '[':
		default:
			into[name] = string(value)
		}
	}
}

// A flat row says what the nested answer says, literal by literal, in both systems.
func TestFlatAnswersAreTheNestedOnes(t *testing.T) {
	state := fullState()
	full := &DepthsAnswer{
		NormalDepth: 0.7, CriticalDepth: 0.3, NormalVelocity: 1.1, NormalFroudeNumber: 0.4, NormalBedShearStress: 9.3, Fill: 0.77, SlopeClass: "mild",
		CriticalSlope: 0.004, Capacity: Capacity{Known: true, Discharge: 3, Depth: 0.8, FullDischarge: 2.9, Ratio: 0.5}, Freeboard: 0.2, Closed: true,
		FullFrictionSlope: 0.001, Given: DepthsGiven{Present: true, State: state, AlternateDepth: 0.9, SequentDepth: 0.8, Curve: "M3"},
		Normal: []State{state}, Critical: []State{state}, Traced: Traced{"0f"}, Warnings: []Warning{{Code: "overtopped", Detail: "It overtops."}},
	}
	bare := &DepthsAnswer{
		NormalDepth: math.NaN(), CriticalDepth: math.Inf(1), NormalAbsent: "The bed is horizontal.", NormalVelocity: math.NaN(), NormalFroudeNumber: math.NaN(),
		NormalBedShearStress: math.NaN(), Fill: math.NaN(), CriticalSlope: math.NaN(), Freeboard: math.NaN(), FullFrictionSlope: 3,
	}
	judged, plain := appraisal(), appraisal()
	plain.Governing.Criterion, plain.Warnings = GreatestFill, nil
	for _, a := range []Answer{full, bare, judged, plain, &AppraisalAnswer{Verdict: "undetermined", Notice: "N."}, &SectionAnswer{States: []State{state}}, &SectionAnswer{States: []State{{Depth: 1, Area: math.NaN()}}}} {
		for _, system := range []System{SI, US} {
			nested := map[string]string{"line": "7"}
			flatten(t, nested, "", a.AppendJSON(nil, system, ID(`"a \"b\""`)))
			if s, ok := a.(*SectionAnswer); ok {
				flatten(t, nested, "", s.States[0].AppendJSON(nil, system))
			}
			table := FlatTableOf(a)
			row := &FlatAnswer{ID: ID(`"a \"b\""`), Line: 7, Units: system, Answer: a}
			for i, column := range table.Columns() {
				want, found := nested[column.Name]
				if !found {
					want = "null"
				}
				delete(nested, column.Name)
				switch {
				case column.Name == "warnings" && a == full:
					want = `"overtopped: It overtops."`
				case column.Name == "warnings" && a == judged:
					want = `"a: b"`
				}
				got := string(table.AppendJSON(nil, row, i))
				if got != want {
					t.Errorf("%T %v %s: %s, nested %s", a, system, column.Name, got, want)
				}
				text := string(table.AppendText(nil, row, i))
				if want == "null" {
					want = ""
				}
				if unquoted, err := jsontext.AppendUnquote(nil, want); err == nil {
					want = string(unquoted)
				}
				if text != want {
					t.Errorf("%T %v %s: text %s, want %s", a, system, column.Name, text, want)
				}
			}
			for name, value := range nested {
				if strings.HasPrefix(name, "flows_") {
					continue // left out, as the contract says
				}
				if value != "null" {
					t.Errorf("%T: %s is in no column", a, name)
				}
			}
		}
	}
}

// A row with a problem says it in one sentence with its place, and nothing else but id and line.
func TestFlatProblem(t *testing.T) {
	table := FlatTableOf((*DepthsAnswer)(nil))
	for _, c := range []struct {
		problem *Problem
		want    string
	}{
		{InvalidRequest(Fault{Column: "bed_slope", Code: "x", Detail: "It is wrong."}, Fault{Column: "y", Detail: "So is this."}), "bed_slope: It is wrong. There is 1 other fault."},
		{NoSolution("/downstream", "x", "Physics forbids it."), "/downstream: Physics forbids it."},
		{Internal("The service failed."), "The service failed."},
	} {
		row := &FlatAnswer{ID: ID("17.50"), Line: 3, Problem: c.problem}
		cells := map[string]string{}
		for i, column := range table.Columns() {
			if text := string(table.AppendJSON(nil, row, i)); text != "null" {
				cells[column.Name] = text
			}
		}
		if want := map[string]string{"id": "17.50", "line": "3", "problem": `"` + c.want + `"`}; !reflect.DeepEqual(cells, want) {
			t.Errorf("%v, want %v", cells, want)
		}
	}
}
