package operation

import (
	"encoding/json"
	"errors"
	"fmt"
	"math"
	"os"
	"path/filepath"
	"strings"
	"testing"

	"leat/api/wire"
	"leat/compute/appraise"
)

// appraised is an answer as callers read it; numbers that are null are NaN.
type appraised struct {
	Verdict   string
	Flow      *string  `json:"governing_flow"`
	Criterion *string  `json:"governing_criterion"`
	Value     *float64 `json:"governing_value"`
	Limit     *float64 `json:"governing_limit"`
	Notice    string
	Flows     map[string]struct {
		Discharge float64
		Normal    *float64 `json:"normal_depth"`
		BendRise  *float64 `json:"bend_rise"`
		Lining    *struct {
			Manning             *float64
			Safety              *float64
			PermissibleVelocity *float64 `json:"permissible_velocity"`
		}
		Findings []struct {
			Criterion, Unit string
			Value, Limit    *float64
			Met             *bool
			Reason          *string
			Detail          string
		}
	}
	Warnings []struct{ Code, Pointer, Detail string }
}

// appraiseBody answers a request.
func appraiseBody(t *testing.T, body string) (appraised, string) {
	t.Helper()
	text, _, problem := Appraisal.Answer(nil, []byte(body), Options{})
	if problem != nil {
		t.Fatalf("%s\n%s %+v", body, problem.Detail, problem.Errors)
	}
	var a appraised
	if err := json.Unmarshal(text, &a); err != nil {
		t.Fatalf("%s: %v", text, err)
	}
	return a, string(text)
}

const appraisedDitch = `"section":{"kind":"trapezoidal","bottom_width":1.2,"side_slope":1.5,"bank_height":1},"roughness":{"manning":0.03},"bed_slope":0.002`

// The flows and their findings do not depend on the order of members, which means nothing in JSON: the whole answer is the same text.
func TestAppraisalDoesNotDependOnOrder(t *testing.T) {
	const criteria = `"criteria":{"greatest_fill":0.9,"least_freeboard":0.1}`
	_, one := appraiseBody(t, `{`+appraisedDitch+`,"flows":{"b":1,"a":1,"c":0.5},`+criteria+`}`)
	_, other := appraiseBody(t, `{"criteria":{"least_freeboard":0.1,"greatest_fill":0.9},"flows":{"c":0.5,"a":1.0,"b":1e0},`+appraisedDitch+`}`)
	if one != other {
		t.Errorf("%s\n%s", one, other)
	}
	if !strings.Contains(one, `"flows":{"c":{"discharge":0.5,`) || strings.Index(one, `"a":{"discharge":1,`) > strings.Index(one, `"b":{"discharge":1,`) {
		t.Errorf("the flows are not in order of their discharge and name: %s", one)
	}
	if a, _ := appraiseBody(t, `{`+appraisedDitch+`,"flows":{"b":1,"a":1,"c":0.5},`+criteria+`}`); *a.Flow != "a" {
		t.Errorf("of equals %s governs", *a.Flow)
	}
}

// What an appraisal says of a flow is what depths says of it.
func TestAppraisalHasTheDepths(t *testing.T) {
	for _, channel := range []string{appraisedDitch, `"section":{"kind":"circular","diameter":1},"roughness":{"sand_roughness":0.0015},"bed_slope":0.002,"barrels":2`,
		`"section":{"kind":"two_stage","bottom_width":1,"side_slope":1,"bench_height":0.5,"bench_width":1.5,"upper_side_slope":2,"bank_height":1.4},"roughness":{"zones":[{"until":-1,"manning":0.05},{"until":1,"manning":0.03},{"manning":0.05}]},"bed_slope":0.003,"energy_coefficient":1.1`,
		`"units":"us","section":{"kind":"box","width":5,"height":4},"roughness":{"manning":0.013},"bed_slope":-0.003`} {
		for _, q := range []string{"0.3", "5"} {
			for _, brief := range []bool{false, true} {
				options := Options{Brief: brief}
				depths, _, problem := Depths.Answer(nil, []byte(`{`+channel+`,"discharge":`+q+`,"depth":0.4}`), options)
				if problem != nil {
					t.Fatal(problem.Detail)
				}
				answer, _, problem := Appraisal.Answer(nil, []byte(`{`+channel+`,"flows":{"x":`+q+`},"depth":0.4,"criteria":{"least_freeboard":0.1}}`), options)
				if problem != nil {
					t.Fatal(problem.Detail)
				}
				_, members, _ := strings.Cut(string(depths), `,"normal_depth"`)
				members, _, _ = strings.Cut(members, `,"warnings"`)
				if !strings.Contains(string(answer), `"x":{"discharge":`+q+`,"normal_depth"`+members+`,"findings":[`) {
					t.Errorf("%s %s:\ndepths    %s\nappraisal %s", channel, q, depths, answer)
				}
			}
		}
	}
}

// A criterion is held to the flows that it is about, and the verdict follows from those findings.
func TestCriterionFlows(t *testing.T) {
	const flows = `"flows":{"dry":0.02,"ten":1.1,"hundred":1.9}`
	for _, c := range []struct{ criteria, about, verdict, governs string }{
		{`"least_freeboard":0.3`, ``, "falls_short", "hundred least_freeboard"},
		{`"least_freeboard":0.3`, `"least_freeboard":["ten","dry"]`, "meets", "ten least_freeboard"},
		{`"least_freeboard":0.3,"least_velocity":0.3`, `"least_freeboard":["ten"]`, "falls_short", "dry least_velocity"},
		{`"least_freeboard":0.3,"least_lining_safety":1`, `"least_freeboard":["ten"]`, "undetermined", "ten least_freeboard"},
		{`"least_lining_safety":1`, ``, "undetermined", ""},
	} {
		a, text := appraiseBody(t, `{`+appraisedDitch+`,`+flows+`,"criteria":{`+c.criteria+`},"criterion_flows":{`+c.about+`}}`)
		governs := ""
		if a.Flow != nil {
			governs = *a.Flow + " " + *a.Criterion
		}
		if a.Verdict != c.verdict || governs != c.governs {
			t.Errorf("%s %s: %s, %s governs, want %s, %s\n%s", c.criteria, c.about, a.Verdict, governs, c.verdict, c.governs, text)
		}
	}
}

// Every finding that is not judged says why, in a sentence; and the notice has the cautions.
func TestAppraisalReasons(t *testing.T) {
	const all = `"criteria":{"least_freeboard":0.1,"freeboard_rule":"canal","greatest_fill":0.8,"least_velocity":0.1,"greatest_velocity":3,"least_shear":1,"greatest_shear":50,"critical_band":[0.86,1.13],"greatest_vedernikov_number":1,"least_lining_safety":1},"flows":{"q":2}`
	const ditch = `"section":{"kind":"trapezoidal","bottom_width":1.2,"side_slope":1.5},"roughness":{"manning":0.03},"bed_slope":0.002`
	for _, c := range []struct{ channel, reasons string }{
		{ditch, "missing_bank_height missing_bank_height missing_bank_height - - - - - - missing_lining"},
		{strings.Replace(ditch, "0.002", "0", 1), "horizontal_bed horizontal_bed horizontal_bed horizontal_bed horizontal_bed horizontal_bed horizontal_bed horizontal_bed horizontal_bed missing_lining"},
		{ditch + `,"lining":{"kind":"earth"}`, "missing_bank_height missing_bank_height missing_bank_height - - - - - - missing_soil"},
		{ditch + `,"lining":{"kind":"shear_limited"}`, "missing_bank_height missing_bank_height missing_bank_height - - - - - - missing_permissible_shear"},
		{`"section":{"kind":"circular","diameter":0.5},"roughness":{"manning":0.013},"bed_slope":0.002`,
			"surcharged not_applicable surcharged surcharged surcharged surcharged surcharged full full not_applicable"},
		{appraisedDitch + `,"barrels":1,"lining":{"kind":"shear_limited","permissible_shear":50}`, "- - - - - - - - - -"},
		{strings.Replace(appraisedDitch, `"bank_height":1`, `"bank_height":0.5`, 1), "overtopped overtopped overtopped - - - - - - missing_lining"},
	} {
		a, text := appraiseBody(t, `{`+c.channel+`,`+all+`}`)
		var got []string
		for _, f := range a.Flows["q"].Findings {
			reason := "-"
			if f.Reason != nil {
				reason = *f.Reason
			}
			got = append(got, reason)
			if (f.Reason == nil) != (f.Detail == "") || f.Detail != "" && !isSentence(f.Detail) || f.Met == nil && f.Reason == nil {
				t.Errorf("%s: %s: met %v, reason %v, detail %q", c.channel, f.Criterion, f.Met, f.Reason, f.Detail)
			}
		}
		if strings.Join(got, " ") != c.reasons {
			t.Errorf("%s\n got %v\nwant %s\n%s", c.channel, got, c.reasons, text)
		}
		for _, caution := range []string{"local codes", "licensed engineer", "inlet control"} {
			if !strings.Contains(a.Notice, caution) {
				t.Errorf("the notice does not say %s", caution)
			}
		}
	}
}

// Warnings stand at the flow that they are about; what is to be doubted in criteria and linings is said too.
func TestAppraisalWarnings(t *testing.T) {
	for _, c := range []struct{ body, want string }{
		{appraisedDitch + `,"flows":{"ten/year":0.4,"a":9},"criteria":{"least_freeboard":8,"greatest_velocity":60}`,
			"unusual_value /criteria/least_freeboard unusual_value /criteria/greatest_velocity overtopped /flows/a"},
		{`"section":{"kind":"circular","diameter":0.5},"roughness":{"manning":0.013},"bed_slope":0.002,"flows":{"ten/year":0.6},"criteria":{"greatest_fill":0.8},"bend":{"radius":9}`,
			"surcharged /flows/ten~1year bend_in_closed_section /bend"},
		{`"section":{"kind":"rectangular","bottom_width":2,"bank_height":2},"bed_slope":0.01,"flows":{"a":1},"criteria":{"least_freeboard":0.1},"lining":{"kind":"gravel","stone_size":40,"angle_of_repose":80},"bend":{"radius":5}`,
			"unusual_value /lining/stone_size unusual_value /lining/angle_of_repose undetermined /flows/a"},
		{appraisedDitch + `,"flows":{"a":0.4,"b":0.5},"criteria":{"least_freeboard":0.1},"bend":{"radius":0.5}`, "bend_too_tight /bend/radius undetermined /flows/a"},
		// Why a verdict is open is told of each criterion once, and only where it is open.
		{`"section":{"kind":"rectangular","bottom_width":2},"roughness":{"manning":0.013},"bed_slope":0.01,"flows":{"a":1,"b":2},"criteria":{"least_freeboard":0.1,"least_lining_safety":1}`,
			"undetermined /flows/a undetermined /flows/a"},
		// One reason is told once, whatever it keeps from being judged.
		{`"section":{"kind":"rectangular","bottom_width":2,"bank_height":2},"roughness":{"manning":0.013},"bed_slope":0,"flows":{"a":1,"b":2},"criteria":{"least_freeboard":0.1,"greatest_velocity":2}`,
			"undetermined /flows/a"},
		{`"section":{"kind":"rectangular","bottom_width":2},"roughness":{"manning":0.013},"bed_slope":0.01,"flows":{"a":1},"criteria":{"least_freeboard":0.1,"greatest_velocity":0.2}`, ""},
		{`"section":{"kind":"rectangular","bottom_width":2,"bank_height":2},"roughness":{"manning":0.013},"bed_slope":0,"flows":{"a":1},"criteria":{"least_freeboard":0.1}`, "undetermined /flows/a"},
		{`"section":{"kind":"circular","diameter":2},"roughness":{"manning":0.013},"bed_slope":0.01,"flows":{"a":1},"criteria":{"freeboard_rule":"canal"}`, "undetermined /criteria"},
	} {
		a, text := appraiseBody(t, `{`+c.body+`}`)
		var got []string
		for _, w := range a.Warnings {
			got = append(got, w.Code, w.Pointer)
			if !isSentence(w.Detail) {
				t.Errorf("%q is no sentence", w.Detail)
			}
		}
		if strings.Join(got, " ") != c.want {
			t.Errorf("%s\n got %v\nwant %s\n%s", c.body, got, c.want, text)
		}
	}
}

// Faults that are found when the asset is built stand at the members that they come from, all in one problem.
func TestAppraisalFaults(t *testing.T) {
	const rest = `,"bed_slope":0.01,"flows":{"a":1},"criteria":{"greatest_fill":0.8}`
	for _, c := range []struct{ body, want string }{
		{`"section":{"kind":"circular","diameter":1},"lining":{"kind":"vegetation","stem_height":0.1,"condition":"good"}` + rest, "/lining/kind"},
		{`"section":{"kind":"box","width":1,"height":1},"lining":{"kind":"riprap","stone_size":0.1}` + rest, "/lining/kind"},
		{`"section":{"kind":"surveyed","points":[[0,1],[2,0],[1,1]]},"lining":{"kind":"gravel","stone_size":0.1,"specific_gravity":50}` + rest, "/section/points/2/0 /lining/specific_gravity"},
		{`"section":{"kind":"circular","diameter":1},"roughness":{"manning":0.013},"depth":2` + rest, "/depth"},
	} {
		_, _, problem := Appraisal.Answer(nil, []byte(`{`+c.body+`}`), Options{})
		var got []string
		if problem != nil {
			for _, f := range problem.Errors {
				got = append(got, f.Pointer)
				if !isSentence(f.Detail) {
					t.Errorf("%q is no sentence", f.Detail)
				}
			}
		}
		if problem == nil || problem.Status != 422 || strings.Join(got, " ") != c.want {
			t.Errorf("%s: %v, want %s", c.body, got, c.want)
		}
	}
}

// A checkpoint ends an appraisal between two flows.
func TestAppraisalCheckpoint(t *testing.T) {
	calls, last := 0, 0
	for _, c := range []struct {
		err    error
		status int
	}{{wire.TimeLimit("Too late."), 504}, {errors.New("gone"), 500}} {
		calls, last = 0, 2
		options := Options{Begin: func(int) func() error {
			return func() error {
				if calls++; calls == last {
					return c.err
				}
				return nil
			}
		}}
		_, _, problem := Appraisal.Answer(nil, []byte(`{`+appraisedDitch+`,"flows":{"a":1,"b":2,"c":3},"criteria":{"least_freeboard":1}}`), options)
		if problem == nil || problem.Status != c.status || calls != last {
			t.Errorf("%v: %+v after %d calls", c.err, problem, calls)
		}
	}
}

// The contract's criteria are those of compute, in its order; so are the choices of a lining.
func TestCriteriaAreThoseOfCompute(t *testing.T) {
	var here, there []string
	for _, c := range wire.AllCriteria() {
		here = append(here, string(c))
	}
	for _, c := range appraise.Criteria() {
		there = append(there, c.String())
	}
	if strings.Join(here, " ") != strings.Join(there, " ") {
		t.Errorf("%v\n%v", here, there)
	}
	for _, m := range wire.DescribeRequest(&wire.AppraisalRequest{}) {
		path := strings.Join(m.Path, "/")
		for _, name := range m.Names {
			known := true
			switch path {
			case "criteria/freeboard_rule":
				_, known = freeboardRules[wire.FreeboardRule(name)]
			case "lining/soil_group":
				_, known = soilGroups[name]
			case "lining/condition":
				_, known = conditions[name]
			case "lining/growth_form":
				_, known = growthForms[name]
			case "lining/soil":
				_, known = soils[name]
			case "lining/water_carries":
				_, known = loads[name]
			}
			if !known {
				t.Errorf("%s: %s leads to nothing", path, name)
			}
		}
	}
}

// publishedCase reads a case of testdata/published.json.
func publishedCase(t *testing.T, id string) (given, expected, tolerance map[string]any) {
	t.Helper()
	text, err := os.ReadFile(filepath.Join(root, "testdata", "published.json"))
	if err != nil {
		t.Fatal(err)
	}
	var list []struct {
		ID                         string
		Given, Expected, Tolerance map[string]any
	}
	var wrapped struct{ Cases json.RawMessage }
	if json.Unmarshal(text, &wrapped) == nil && wrapped.Cases != nil {
		text = wrapped.Cases
	}
	if err := json.Unmarshal(text, &list); err != nil {
		t.Fatal(err)
	}
	for _, c := range list {
		if c.ID == id {
			return c.Given, c.Expected, c.Tolerance
		}
	}
	t.Fatalf("no case %s", id)
	return nil, nil, nil
}

// laidOut returns a rectangular channel that carries a velocity at a depth in uniform flow, all in SI: its members, and its discharge.
func laidOut(width, depth, velocity float64) (members string, discharge float64) {
	const n = 0.02
	radius := width * depth / (width + 2*depth)
	root := n * velocity / math.Cbrt(radius*radius)
	return fmt.Sprintf(`"section":{"kind":"rectangular","bottom_width":%v,"bank_height":%v},"roughness":{"manning":%v},"bed_slope":%v`, width, 9*depth, n, root*root), width * depth * velocity
}

// Published values, through the whole operation: each case of testdata/published.json names its source.
func TestPublishedAppraisals(t *testing.T) {
	near := func(what string, got *float64, want, tolerance float64) {
		t.Helper()
		if got == nil || !(math.Abs(*got-want) <= tolerance) {
			t.Errorf("%s: got %v, want %v within %v", what, got, want, tolerance)
		}
	}
	const foot = 0.3048

	// The rise in a bend (EM 1110-2-1601), tranquil flow: half the whole difference across it. The case is worked with g = 9.81 m/s2.
	given, expected, tolerance := publishedCase(t, "superelevation")
	channel, q := laidOut(given["top_width"].(float64), 2, given["velocity"].(float64))
	a, _ := appraiseBody(t, fmt.Sprintf(`{%s,"gravity":9.81,"flows":{"q":%v},"criteria":{"least_freeboard":1},"bend":{"radius":%v}}`, channel, q, given["bend_radius"]))
	near("bend_rise", a.Flows["q"].BendRise, expected["rise_above_mean"].(float64), tolerance["rise_above_mean"].(float64))
	near("freeboard in the bend", a.Flows["q"].Findings[0].Value, 16-expected["rise_above_mean"].(float64), tolerance["rise_above_mean"].(float64))

	// The Vedernikov number of a rectangular channel (Chow 1959, section 8-8).
	given, expected, _ = publishedCase(t, "vedernikov-rect")
	depth := given["depth"].(float64)
	channel, q = laidOut(given["bottom_width"].(float64), depth, given["froude"].(float64)*math.Sqrt(9.80665*depth))
	a, _ = appraiseBody(t, fmt.Sprintf(`{%s,"flows":{"q":%v},"criteria":{"greatest_vedernikov_number":1}}`, channel, q))
	// The case is on a level bed; on this slope gravity's part normal to the bed is smaller by its cosine, here by 0.3 %.
	near("vedernikov number", a.Flows["q"].Findings[0].Value, expected["vedernikov_number"].(float64), 0.003)

	// Freeboard of canals (US Bureau of Reclamation): the smaller and the larger end of the rule, in feet.
	given, expected, tolerance = publishedCase(t, "usbr-freeboard-us")
	for i, c := range []struct {
		want      string
		discharge float64
	}{{"freeboard_small", 20}, {"freeboard_large", 3000}} {
		depth := given["depths"].([]any)[i].(float64)
		width := c.discharge / depth / 3 // at 3 ft/s
		channel, q := laidOut(width*foot, depth*foot, 3*foot)
		a, _ := appraiseBody(t, fmt.Sprintf(`{%s,"flows":{"q":%v},"criteria":{"freeboard_rule":"canal"}}`, channel, q))
		limit := *a.Flows["q"].Findings[0].Limit / foot
		near(c.want, &limit, expected[c.want].(float64), tolerance[c.want].(float64))
	}

	// Permissible velocities of earth (Fortier and Scobey 1926), in ft/s, in the order of the table.
	_, expected, tolerance = publishedCase(t, "fortier-scobey")
	names := []string{"fine_sand", "sandy_loam", "silt_loam", "alluvial_silt", "firm_loam", "volcanic_ash", "stiff_clay", "colloidal_alluvial_silt", "shale_or_hardpan",
		"fine_gravel", "loam_to_cobbles", "silt_to_cobbles", "coarse_gravel", "cobbles"}
	for column, load := range map[string]string{"velocity_clear_water": "nothing", "velocity_colloidal_silt": "colloidal_silt"} {
		list := expected[column].([]any)
		if len(list) != len(names) {
			t.Fatalf("%d velocities of %s", len(list), column)
		}
		for i, name := range names {
			a, _ := appraiseBody(t, fmt.Sprintf(`{"units":"us","section":{"kind":"rectangular","bottom_width":6},"roughness":{"manning":0.02},"bed_slope":0.0004,"flows":{"q":12},"criteria":{"least_lining_safety":1},"lining":{"kind":"earth","soil":%q,"water_carries":%q}}`, name, load))
			near(name+" with "+load, a.Flows["q"].Lining.PermissibleVelocity, list[i].(float64), tolerance[column].(float64))
		}
	}

	// A grass-lined ditch: FHWA HEC-15, third edition (2005), example 4.1 (from memory: 0.5 m3/s runs 0.21 m deep at an n of 0.032).
	a, _ = appraiseBody(t, `{"section":{"kind":"trapezoidal","bottom_width":0.9,"side_slope":3},"bed_slope":0.03,"gravity":9.81,"flows":{"q":0.5},"criteria":{"least_lining_safety":1},
		"lining":{"kind":"vegetation","stem_height":0.075,"condition":"good","growth_form":"sod","soil_group":"clayey_sand","plasticity_index":16,"void_ratio":0.5}}`)
	near("depth on grass", a.Flows["q"].Normal, 0.21, 0.005)
	near("n of grass", a.Flows["q"].Lining.Manning, 0.032, 0.0005)
}
