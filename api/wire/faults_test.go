package wire

import (
	"slices"
	"strings"
	"testing"

	"leat/compute"
)

// TestFaults holds all faults of bodies that break rules: each with its pointer and code, in one answer.
func TestFaults(t *testing.T) {
	const (
		channel = `"section":{"kind":"rectangular","bottom_width":1}`
		rest    = `"roughness":{"manning":0.02},"bed_slope":0.001,"discharge":1`
	)
	section := func(members string) string { return `{` + rest + `,"section":{` + members + `}}` }
	roughness := func(kind, members string) string {
		return `{"bed_slope":0.001,"discharge":1,"section":{` + kind + `},"roughness":{` + members + `}}`
	}
	const twoStage = `"kind":"two_stage","bottom_width":1,"side_slope":1,"bench_height":1,"upper_side_slope":2`
	for _, c := range []struct {
		operation, body string
		status          int
		want            []string // pointer and code
	}{
		// The top.
		{"depths", `[]`, 422, []string{" not_an_object"}},
		{"depths", `null`, 422, []string{" not_an_object"}},
		{"depths", `"x"`, 422, []string{" not_an_object"}},
		{"depths", `{}`, 422, []string{"/section missing_member", "/roughness missing_member", "/bed_slope missing_member", "/discharge missing_member"}},
		{"section", `{}`, 422, []string{"/section missing_member", "/depth missing_member"}},
		{"rating", `{}`, 422, []string{"/section missing_member", "/roughness missing_member", "/bed_slope missing_member", "/kind missing_member", "/discharges missing_member"}},
		{"depths", `{"section":null,"roughness":null,"bed_slope":null,"discharge":null}`, 422,
			[]string{"/section missing_member", "/roughness missing_member", "/bed_slope missing_member", "/discharge missing_member"}},
		{"depths", `{"section":1,"roughness":[],"bed_slope":"x","discharge":{}}`, 422,
			[]string{"/section not_an_object", "/roughness not_an_object", "/bed_slope wrong_type", "/discharge wrong_type"}},

		// Common members.
		{"depths", `{` + channel + `,` + rest + `,"id":true,"units":"metric","gravity":0,"energy_coefficient":0.05,"momentum_coefficient":101,"barrels":0}`, 422,
			[]string{"/id wrong_type", "/units unknown_value", "/gravity not_positive", "/energy_coefficient out_of_range", "/momentum_coefficient out_of_range", "/barrels not_positive"}},
		{"depths", `{` + channel + `,` + rest + `,"id":"` + strings.Repeat("é", 257) + `","units":2,"barrels":1.5}`, 422,
			[]string{"/id too_long", "/units wrong_type", "/barrels not_whole"}},
		{"depths", `{` + channel + `,` + rest + `,"barrels":101,"Discharge":1,"a~b/c":1}`, 422,
			[]string{"/Discharge unknown_member", "/a~0b~1c unknown_member", "/barrels out_of_range"}},
		{"depths", `{` + channel + `,` + rest + `,"barrels":1e99}`, 422, []string{"/barrels out_of_range"}},
		{"depths", `{` + channel + `,"roughness":{"manning":0.02},"bed_slope":1,"discharge":0,"depth":-1}`, 422,
			[]string{"/bed_slope out_of_range", "/discharge not_positive", "/depth not_positive"}},
		{"depths", `{` + channel + `,"roughness":{"manning":0.02},"bed_slope":-1,"discharge":1e13}`, 422,
			[]string{"/bed_slope out_of_range", "/discharge out_of_range"}},
		{"depths", `{` + channel + `,"roughness":{"manning":0.02},"bed_slope":1e-16,"discharge":1e-16}`, 422,
			[]string{"/bed_slope out_of_range", "/discharge out_of_range"}},

		// Sections.
		{"depths", section(``), 422, []string{"/section/kind missing_member"}},
		{"depths", section(`"kind":"trapezoid","bottom_width":1,"diametr":2`), 422, []string{"/section/kind unknown_value", "/section/diametr unknown_member"}},
		{"depths", section(`"kind":"circular","diameter":0,"bottom_width":1,"bank_height":2`), 422,
			[]string{"/section/bottom_width foreign_member", "/section/bank_height foreign_member", "/section/diameter not_positive"}},
		{"depths", section(`"kind":"trapezoidal"`), 422, []string{"/section/bottom_width missing_member", "/section/side_slope missing_member"}},
		{"depths", section(`"kind":"trapezoidal","bottom_width":1,"side_slope":1,"left_side_slope":1`), 422, []string{"/section/left_side_slope conflicting_member"}},
		{"depths", section(`"kind":"triangular","side_slope":1,"left_side_slope":1,"right_side_slope":1`), 422,
			[]string{"/section/left_side_slope conflicting_member", "/section/right_side_slope conflicting_member"}},
		{"depths", section(`"kind":"triangular","left_side_slope":-1`), 422, []string{"/section/right_side_slope missing_member", "/section/left_side_slope out_of_range"}},
		{"depths", section(`"kind":"triangular","side_slope":1e-10`), 422, []string{"/section/side_slope out_of_range"}},
		{"depths", section(twoStage), 422, []string{"/section/bench_width missing_member"}},
		{"depths", section(twoStage + `,"bench_width":1,"right_bench_width":1`), 422, []string{"/section/right_bench_width conflicting_member"}},
		{"depths", section(twoStage + `,"right_bench_width":1,"left_side_slope":1`), 422,
			[]string{"/section/left_side_slope foreign_member", "/section/left_bench_width missing_member"}},
		{"depths", section(`"kind":"gutter","cross_slope":0.02,"curb_height":0.15,"gutter_width":1`), 422, []string{"/section/gutter_slope missing_member"}},
		{"depths", section(`"kind":"gutter","cross_slope":0,"curb_height":0.15,"gutter_slope":1`), 422,
			[]string{"/section/gutter_width missing_member", "/section/cross_slope not_positive"}},
		// Of a member of another kind only that is said, whatever is wrong with its value.
		{"depths", section(`"kind":"rectangular","bottom_width":1,"diameter":"x","points":[["a",1],3],"inverted":"no"`), 422,
			[]string{"/section/diameter foreign_member", "/section/inverted foreign_member", "/section/points foreign_member"}},
		{"depths", section(`"kind":"egg","height":1,"inverted":1`), 422, []string{"/section/inverted wrong_type"}},
		{"depths", section(`"kind":"surveyed","points":[[0,1],[1,2e9],[null,3],[1,2,3],5,["4",5]]`), 422,
			[]string{"/section/points/2/0 wrong_type", "/section/points/3 wrong_length", "/section/points/4 wrong_type", "/section/points/5/0 wrong_type", "/section/points/1/1 out_of_range"}},
		{"depths", section(`"kind":"surveyed","points":[]`), 422, []string{"/section/points too_few_items"}},
		{"depths", section(`"kind":"surveyed","points":[null]`), 422, []string{"/section/points/0 wrong_type", "/section/points too_few_items"}},
		{"depths", section(`"kind":"surveyed","points":{}`), 422, []string{"/section/points wrong_type"}},
		{"depths", section(`"kind":"tabulated","rows":[[0,1,1,1],[1,2,-3,0],[1,2,3]]`), 422,
			[]string{"/section/rows/2 wrong_length", "/section/rows/0/0 not_positive", "/section/rows/1/2 not_positive"}},

		// Roughness.
		{"depths", roughness(`"kind":"circular","diameter":1`, ``), 422, []string{"/roughness missing_member"}},
		{"depths", roughness(`"kind":"circular","diameter":1`, `"maning":0.02`), 422, []string{"/roughness/maning unknown_member", "/roughness missing_member"}},
		{"depths", roughness(`"kind":"circular","diameter":1`, `"manning":0,"strickler":40`), 422, []string{"/roughness/strickler foreign_member", "/roughness/manning not_positive"}},
		{"depths", roughness(`"kind":"circular","diameter":1`, `"manning":0.02,"combine":"divided","kinematic_viscosity":1e-6`), 422,
			[]string{"/roughness/kinematic_viscosity foreign_member", "/roughness/combine foreign_member"}},
		{"depths", roughness(`"kind":"circular","diameter":1`, `"bed":{"manning":0.02}`), 422, []string{"/roughness/sides missing_member", "/roughness/bed foreign_member"}},
		{"depths", roughness(`"kind":"box","width":1,"height":1`, `"sides":{},"bed":{"manning":-1},"combine":"lotter"`), 422,
			[]string{"/roughness/sides/manning missing_member", "/roughness/combine unknown_value", "/roughness/bed/manning not_positive"}},
		{"depths", roughness(`"kind":"circular","diameter":1`, `"zones":[{"manning":0.02}]`), 422, []string{"/roughness/zones foreign_member"}},
		{"depths", roughness(twoStage+`,"bench_width":1`, `"zones":[{"until":1,"manning":0},{"manning":-1},{"until":3},7]`), 422,
			[]string{"/roughness/zones/2/manning missing_member", "/roughness/zones/3 not_an_object", "/roughness/zones/1/until missing_member",
				"/roughness/zones/0/manning not_positive", "/roughness/zones/1/manning not_positive"}},
		{"depths", roughness(twoStage+`,"bench_width":1`, `"zones":[],"combine":"pavlovski"`), 422, []string{"/roughness/combine unknown_value", "/roughness/zones too_few_items"}},
		{"depths", roughness(`"kind":"circular","diameter":1`, `"manning_by_depth":[[0,0],[-1,0.02],[1]]`), 422,
			[]string{"/roughness/manning_by_depth/2 wrong_length", "/roughness/manning_by_depth/0/1 not_positive", "/roughness/manning_by_depth/1/0 out_of_range"}},
		{"depths", roughness(`"kind":"circular","diameter":1`, `"sand_roughness":0,"kinematic_viscosity":2`), 422,
			[]string{"/roughness/sand_roughness not_positive", "/roughness/kinematic_viscosity out_of_range"}},

		// What goes with what.
		{"section", `{` + channel + `,"depth":1,"depths":[1]}`, 422, []string{"/depths conflicting_member"}},
		{"section", `{` + channel + `,"depths":[]}`, 422, []string{"/depths too_few_items"}},
		{"section", `{` + channel + `,"depths":[1,null,"2",-3,1e10]}`, 422,
			[]string{"/depths/1 wrong_type", "/depths/2 wrong_type", "/depths/3 not_positive", "/depths/4 out_of_range"}},
		{"rating", `{` + channel + `,"roughness":{"manning":0.02},"bed_slope":0,"kind":"uniform","discharges":[1]}`, 422, []string{"/bed_slope not_positive"}},
		{"rating", `{` + channel + `,"roughness":{"manning":0.02},"bed_slope":"0","kind":"uniform","discharges":[1],"count":2}`, 422,
			[]string{"/bed_slope wrong_type", "/discharges conflicting_member"}},
		{"rating", `{` + channel + `,"roughness":{"manning":0.02},"bed_slope":0,"kind":"critical","from_depth":2,"to_depth":1,"count":1}`, 422,
			[]string{"/to_depth not_rising", "/count out_of_range"}},
		{"rating", `{` + channel + `,"roughness":{"manning":0.02},"bed_slope":0,"kind":"critical","from_depth":2}`, 422,
			[]string{"/to_depth missing_member", "/count missing_member"}},
		{"rating", `{` + channel + `,"roughness":{"manning":0.02},"bed_slope":0,"kind":"critical","from_depth":1,"to_depth":2,"count":51}`, 413,
			[]string{"/count too_many_items"}},
	} {
		_, p := decodeAs(c.operation, c.body)
		got := strings.Split(strings.TrimSuffix(places(p), "\n"), "\n")
		if p == nil || p.Status != c.status || !slices.Equal(got, c.want) {
			t.Errorf("%s %s\n got %d %q\nwant %d %q", c.operation, c.body, status(p), got, c.status, c.want)
		}
		for _, f := range p.Errors {
			if !strings.HasSuffix(f.Detail, ".") && !strings.HasSuffix(f.Detail, "?") || f.Detail != strings.TrimSpace(f.Detail) {
				t.Errorf("%s: no sentence: %q", c.body, f.Detail)
			}
		}
	}
}

func status(p *Problem) int {
	if p == nil {
		return 200
	}
	return p.Status
}

// TestManyFaults bounds what one problem lists.
func TestManyFaults(t *testing.T) {
	limits := DefaultLimits()
	var r SectionRequest
	for _, list := range []string{strings.Repeat("-1,", 500), strings.Repeat("null,", 500), strings.Repeat("-1,null,", 100)} {
		p := Decode([]byte(`{"section":{"kind":"circular","diameter":1},"depths":[`+strings.TrimSuffix(list, ",")+`]}`), SI, &limits, &r)
		if status(p) != 422 || len(p.Errors) != MaxFaults {
			t.Errorf("%.20s…: %d faults, want %d", list, len(p.Errors), MaxFaults)
		}
	}
}

// TestSentences holds some of the sentences themselves, with values and limits in the caller's units.
func TestSentences(t *testing.T) {
	limits := DefaultLimits()
	for _, c := range []struct{ body, pointer, want string }{
		{`{"section":{"kind":"circular","diameter":-3},"depth":1}`, "/section/diameter", "diameter must be from 1e-9 to 1000000000 m, not -3."},
		{`{"section":{"kind":"circular","diameter":-3},"depth":1,"units":"us"}`, "/section/diameter", "diameter must be from 3.28084e-9 to 3.28084e+9 ft, not -3."},
		{`{"section":{"kind":"circular","diamter":3},"depth":1}`, "/section/diamter", "There is no member diamter here. Did you mean diameter?"},
		{`{"section":{"kind":"circle","diameter":3},"depth":1}`, "/section/kind", `kind must be one of "rectangular", "trapezoidal", "triangular", "parabolic", "u_shaped", "circular", "box", "elliptical", "egg", "horseshoe", "gutter", "two_stage", "surveyed" and "tabulated", not "circle". Did you mean "circular"?`},
		{`{"section":{"kind":"circular","diameter":"3"},"depth":"NaN"}`, "/section/diameter", "This must be a number, not a string. Write the number without quotes."},
		{`{"section":{"kind":"circular","diameter":"3"},"depth":"NaN"}`, "/depth", "This must be a number, not a string. Leave an unknown number out or give null."},
		{`{"section":{"kind":"circular"},"depth":1}`, "/section/diameter", "diameter is missing: a section of kind circular needs a number in m (ft in US units) there."},
		{`{"section":{"kind":"circular","width":1,"diameter":1},"depth":1}`, "/section/width", "width does not belong to a section of kind circular, whose members are diameter; leave it out or give null."},
	} {
		var r SectionRequest
		p := Decode([]byte(c.body), SI, &limits, &r)
		found := false
		for _, f := range p.Errors {
			if f.Pointer == c.pointer {
				found = true
				if f.Detail != c.want {
					t.Errorf("%s\n got %s\nwant %s", c.body, f.Detail, c.want)
				}
			}
		}
		if !found {
			t.Errorf("%s: no fault at %s", c.body, c.pointer)
		}
	}
}

// TestIDWithProblems makes sure that the id comes back with a problem wherever the body could be read that far.
func TestIDWithProblems(t *testing.T) {
	for body, want := range map[string]string{
		`{"id":"x"}`:                                `"x"`,
		`{"nonsense":1,"id":12.50}`:                 `12.50`,
		`{"id":"x","section":{"a":1,"a":2}}`:        `"x"`,
		`{"id":7,"discharge":NaN}`:                  `7`,
		`{"id":7,"discharge":1} 3`:                  `7`,
		`{"\u0069d":"é\n","a":`:                     `"é\n"`,
		`{"a":x,"id":7}`:                            ``,
		`{"id":[7]}`:                                ``,
		`{"id":null}`:                               ``,
		`{"id":"` + strings.Repeat("x", 257) + `"}`: ``,
		`{"section":{"id":3}`:                       ``,
		`[{"id":3}]`:                                ``,
	} {
		r, p := decodeAs("depths", body)
		if p == nil || string(r.common().ID) != want {
			t.Errorf("%s: id %q, want %q", body, r.common().ID, want)
		}
	}
}

func TestFaultsUnder(t *testing.T) {
	got := FaultsUnder("/section", compute.Faults{{Member: "points/3/0", Code: "not_rising", Detail: "x"}, {Code: "lines_cross", Detail: "y"}})
	want := []Fault{{Pointer: "/section/points/3/0", Code: "not_rising", Detail: "x"}, {Pointer: "/section", Code: "lines_cross", Detail: "y"}}
	if !slices.Equal(got, want) {
		t.Errorf("%+v, want %+v", got, want)
	}
}
