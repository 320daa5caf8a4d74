package wire

import (
	"encoding/json"
	"math"
	"reflect"
	"strconv"
	"strings"
	"testing"

	"github.com/google/go-cmp/cmp"
)

const appraisedDitch = `{"id":"OST-RD-0147","section":{"kind":"trapezoidal","bottom_width":1.2,"side_slope":1.5,"bank_height":1},"roughness":{"manning":0.03},"bed_slope":0.002,
	"flows":{"dry_weather":0.05,"ten_year":1.1,"hundred_year":1.9},"depth":0.5,
	"criteria":{"least_freeboard":0.2,"freeboard_rule":"canal","greatest_fill":0.9,"least_velocity":0.3,"greatest_velocity":1.8,"least_shear":1,"greatest_shear":40,"critical_band":[0.86,1.13],"greatest_vedernikov_number":1,"least_lining_safety":1.2},
	"criterion_flows":{"least_velocity":["dry_weather"],"least_freeboard":["ten_year","hundred_year"]},"lining":{"kind":"earth","soil":"stiff_clay","water_carries":"nothing"},"bend":{"radius":25}}`

// TestAppraisalRequest: every member arrives, in SI, whatever the units.
func TestAppraisalRequest(t *testing.T) {
	limits := DefaultLimits()
	given := func(v float64) Number { return Number{v, true} }
	foot, square := 0.3048, 47.88025898033584
	var r AppraisalRequest
	body := strings.Replace(appraisedDitch, `"id"`, `"units":"us","id"`, 1)
	if p := Decode([]byte(body), SI, &limits, &r); p != nil {
		t.Fatalf("%s", p.AppendJSON(nil))
	}
	cubic := 0.028316846592
	want := AppraisalRequest{
		Common:    Common{ID: ID(`"OST-RD-0147"`), Units: "us", System: US},
		Section:   Section{Given: true, Kind: Trapezoidal, BottomWidth: given(1.2 * foot), SideSlope: given(1.5), BankHeight: given(foot)},
		Roughness: Roughness{Given: true, Law: Manning, Manning: given(0.03)}, BedSlope: given(0.002),
		Flows: []NamedNumber{{"dry_weather", 0.05 * cubic}, {"ten_year", 1.1 * cubic}, {"hundred_year", 1.9 * cubic}}, Depth: given(0.5 * foot),
		Criteria: Criteria{
			Given: true, LeastFreeboard: given(0.2 * foot), FreeboardRule: CanalFreeboard, GreatestFill: given(0.9), LeastVelocity: given(0.3 * foot),
			GreatestVelocity: given(1.8 * foot), LeastShear: given(square), GreatestShear: given(40 * square), CriticalBand: Pair{[2]float64{0.86, 1.13}, true},
			GreatestVedernikovNumber: given(1), LeastLiningSafety: given(1.2),
		},
		CriterionFlows: CriterionFlows{Given: true, LeastVelocity: []string{"dry_weather"}, LeastFreeboard: []string{"ten_year", "hundred_year"}},
		Lining:         ChannelLining{Given: true, Kind: Earth, Soil: "stiff_clay", WaterCarries: "nothing"},
		Bend:           Bend{Given: true, Radius: given(25 * foot)},
	}
	near := cmp.Comparer(func(a, b float64) bool { return math.Abs(a-b) <= 1e-15*math.Abs(b) })
	if diff := cmp.Diff(want, r, near); diff != "" {
		t.Error(diff)
	}
	for _, c := range AllCriteria() {
		if !r.Criteria.Has(c) || new(Criteria).Has(c) {
			t.Errorf("%s is not told from one that is not given", c)
		}
	}
	if r.Criteria.Has("least_depth") || r.CriterionFlows.Of("least_depth") != nil || r.CriterionFlows.Of(GreatestFill) != nil {
		t.Error("a criterion that there is not")
	}
	if got := r.CriterionFlows.Of(LeastFreeboard); len(got) != 2 {
		t.Errorf("flows of least_freeboard: %v", got)
	}
}

// TestCriteriaTable: the table of criteria has every member of Criteria and of CriterionFlows once, in order, and tells which are given.
func TestCriteriaTable(t *testing.T) {
	for _, typ := range []reflect.Type{reflect.TypeFor[Criteria](), reflect.TypeFor[CriterionFlows]()} {
		var members []Criterion
		for _, name := range plans[typ].names {
			members = append(members, Criterion(name))
		}
		if !reflect.DeepEqual(members, AllCriteria()) {
			t.Errorf("%v has %v\nthe table %v", typ, members, AllCriteria())
		}
	}
	for i, c := range AllCriteria() {
		var flows CriterionFlows
		reflect.ValueOf(&flows).Elem().Field(i).Set(reflect.ValueOf([]string{"a"}))
		if got := flows.Of(c); len(got) != 1 {
			t.Errorf("flows of %s: %v", c, got)
		}
		f := plans[reflect.TypeFor[Criteria]()].fields[i]
		if f.shape == shapeNumber && f.quantity[0] != c.Quantity() {
			t.Errorf("%s is given in %v, and its value told in %v", c, f.quantity[0], c.Quantity())
		}
	}
}

// TestAppraisalFaults holds the rules of an appraisal: each with its place and code.
func TestAppraisalFaults(t *testing.T) {
	const channel = `"section":{"kind":"rectangular","bottom_width":1},"bed_slope":0.001`
	const rough = channel + `,"roughness":{"manning":0.02}`
	const flows = `"flows":{"ten_year":1,"hundred_year":2}`
	criteria := func(members string) string { return `{` + rough + `,` + flows + `,"criteria":{` + members + `}}` }
	lining := func(members string) string {
		return `{` + rough + `,` + flows + `,"criteria":{"least_lining_safety":1},"lining":{` + members + `}}`
	}
	for _, c := range []struct {
		body   string
		status int
		want   string
		says   string // part of the first detail
	}{
		{`{}`, 422, "/section missing_member\n/bed_slope missing_member\n/flows missing_member\n/criteria missing_member\n/roughness missing_member\n", "section is missing"},
		{criteria(``), 422, "/criteria too_few_items\n", "give at least one of least_freeboard, freeboard_rule,"},
		{criteria(`"least_freeboard":null`), 422, "/criteria too_few_items\n", "nothing to judge by"},
		{criteria(`"freeboard":0.3`), 422, "/criteria/freeboard unknown_member\n", "Did you mean least_freeboard?"},
		{criteria(`"least_freebord":0.3`), 422, "/criteria/least_freebord unknown_member\n", "Did you mean least_freeboard?"},
		{criteria(`"greatest_fill":80`), 422, "/criteria/greatest_fill out_of_range\n", "greatest_fill must be from 1e-9 to 1, not 80. A fill of 80 % is 0.8."},
		{criteria(`"freeboard_rule":"chutes"`), 422, "/criteria/freeboard_rule unknown_value\n", `Did you mean "chute"?`},
		{criteria(`"critical_band":[1.13,0.86]`), 422, "/criteria/critical_band not_rising\n", "[0.86, 1.13]"},
		{criteria(`"critical_band":[1.05,1.13]`), 422, "/criteria/critical_band out_of_range\n", "must enclose 1"},
		{criteria(`"critical_band":[86,113]`), 422, "/criteria/critical_band out_of_range\n", "must enclose 1"},
		{criteria(`"max_velocity":2,"velocity_min":1`), 422, "/criteria/max_velocity unknown_member\n/criteria/velocity_min unknown_member\n", "Did you mean greatest_velocity?"},
		{criteria(`"velocity_min":1`), 422, "/criteria/velocity_min unknown_member\n", "Did you mean least_velocity?"},
		{criteria(`"minimum_freeboard":1`), 422, "/criteria/minimum_freeboard unknown_member\n", "Did you mean least_freeboard?"},
		{criteria(`"max_vedernikov":1`), 422, "/criteria/max_vedernikov unknown_member\n", "Did you mean greatest_vedernikov_number?"},
		{criteria(`"critical_band":0.1`), 422, "/criteria/critical_band wrong_type\n", "a list of two numbers such as [0.86, 1.13], not a number"},
		{criteria(`"critical_band":[0.86]`), 422, "/criteria/critical_band wrong_length\n", ""},
		{criteria(`"critical_band":[0,1.1]`), 422, "/criteria/critical_band/0 not_positive\n", ""},
		{criteria(`"least_velocity":2,"greatest_velocity":1,"least_shear":3,"greatest_shear":3`), 422, "/criteria/greatest_velocity not_rising\n/criteria/greatest_shear not_rising\n",
			"greatest_velocity must be greater than least_velocity"},
		{criteria(`"least_velocity":2,"greatest_velocity":-1`), 422, "/criteria/greatest_velocity not_positive\n", ""},
		{`{` + rough + `,"discharge":1,"criteria":{"least_freeboard":0.1}}`, 422, "/discharge unknown_member\n/flows missing_member\n", "Did you mean flows?"},
		{`{` + rough + `,"flows":{},"criteria":{"least_freeboard":0.1}}`, 422, "/flows too_few_items\n", ""},
		{`{` + rough + `,"flows":{"a":1,"b":0,"c":"1"},"criteria":{"least_freeboard":0.1}}`, 422, "/flows/c wrong_type\n/flows/b not_positive\n", ""},
		{`{` + rough + `,"flows":{"a":1,"a":2},"criteria":{"least_freeboard":0.1}}`, 400, "/flows/a duplicate_member\n", ""},
		{`{` + rough + `,"flows":{"a":1,"b":1,"c":1,"d":1},"criteria":{"least_freeboard":0.1}}`, 413, "/flows too_many_items\n", "flows has more than 3 members, the limit `flows`"},
		{`{` + rough + `,` + flows + `,"criteria":{"least_freeboard":1},"criterion_flows":{"least_freeboard":["hundred year","fifty"],"greatest_fill":["ten_year"]}}`, 422,
			"/criterion_flows/least_freeboard/0 unknown_flow\n/criterion_flows/least_freeboard/1 unknown_flow\n/criterion_flows/greatest_fill criterion_not_given\n",
			"There is no flow hundred year in flows. Did you mean hundred_year?"},
		{`{` + rough + `,` + flows + `,"criteria":{"least_freeboard":1},"criterion_flows":{"least_freeboard":[],"least_depth":["a"]}}`, 422,
			"/criterion_flows/least_depth unknown_member\n/criterion_flows/least_freeboard too_few_items\n", "Accepted are least_freeboard"},
		{`{` + rough + `,` + flows + `,"criteria":{"least_freeboard":1},"criterion_flows":{"least_freeboard":"ten_year"}}`, 422, "/criterion_flows/least_freeboard wrong_type\n", "a list of strings"},
		{`{` + rough + `,` + flows + `,"criteria":{"least_freeboard":1},"criterion_flows":{"least_freeboard":["ten_year","ten_year","ten_year","ten_year"]}}`, 413,
			"/criterion_flows/least_freeboard too_many_items\n", "`flows`"},
		{lining(`"kind":"riprap","stone_size":0.2`), 422, "/roughness conflicting_member\n", "leave roughness out"},
		{lining(`"kind":"vegetation"`), 422, "/lining/stem_height missing_member\n/lining/condition missing_member\n/roughness conflicting_member\n", "a lining of kind vegetation needs a number in m (ft in US units)"},
		{lining(`"kind":"earth","stone_size":0.2,"d50":1`), 422, "/lining/d50 unknown_member\n/lining/stone_size foreign_member\n", ""},
		{lining(`"kind":"grass"`), 422, "/lining/kind unknown_value\n", `Did you mean "vegetation"?`},
		{lining(`"kind":"Concrete"`), 422, "/lining/kind unknown_value\n", "Concrete is judged by criteria such as greatest_velocity: leave lining out."},
		{lining(``), 422, "/lining/kind missing_member\n", ""},
		{`{` + channel + `,` + flows + `,"criteria":{"least_freeboard":1},"lining":{"kind":"earth"}}`, 422, "/roughness missing_member\n", "only linings of kind vegetation, riprap and gravel have a roughness of their own"},
		{`{` + rough + `,` + flows + `,"criteria":{"least_freeboard":1},"bend":{}}`, 422, "/bend/radius missing_member\n", ""},
		{`{` + rough + `,` + flows + `,"criteria":{"least_freeboard":1},"bend":{"radius":0}}`, 422, "/bend/radius not_positive\n", ""},
	} {
		var r AppraisalRequest
		p := Decode([]byte(c.body), SI, &Limits{ArrayItems: 50, Points: 60, Flows: 3}, &r)
		if got := places(p); got != c.want || status(p) != c.status {
			t.Errorf("%s\n got %d %q\nwant %d %q", c.body, status(p), got, c.status, c.want)
			continue
		}
		if detail := p.Errors[0].Detail; !strings.Contains(detail, c.says) {
			t.Errorf("%s\n got %s\nwant %s", c.body, detail, c.says)
		}
	}
	many := ""
	for i := range 20 {
		many += `"flow number ` + strconv.Itoa(i) + `":1,`
	}
	limits := DefaultLimits()
	var r AppraisalRequest
	p := Decode([]byte(`{`+rough+`,"flows":{`+strings.TrimSuffix(many, ",")+`},"criteria":{"least_freeboard":1},"criterion_flows":{"least_freeboard":["zzz"]}}`), SI, &limits, &r)
	if told := detailAt(p, "/criterion_flows/least_freeboard/0"); told != "There is no flow zzz in flows. Give the names of some that are there." {
		t.Errorf("told %q", told)
	}
}

func appraisal() *AppraisalAnswer {
	nan := math.NaN()
	return &AppraisalAnswer{
		Verdict: "falls_short", Governing: Governing{true, "ten_year", LeastFreeboard, 0.3048, 0.6096}, Notice: "Ask.",
		Flows: []AppraisedFlow{
			{Name: `ten_year`, Discharge: 1, Depths: DepthsAnswer{Brief: true, NormalDepth: 0.5, CriticalDepth: nan}, Bent: true, BendRise: 0.3048, Lined: true,
				Lining:   LiningState{Known: true, Manning: 0.03, BedShear: 20, SideShear: nan, PermissibleShear: 40, PermissibleSideShear: nan, PermissibleVelocity: nan, BendFactor: 1.05, Safety: 2, RecommendedSafety: 1, GoverningPlace: "bed"},
				Findings: []Finding{{Criterion: LeastFreeboard, Value: 0.3048, Limit: 0.6096, Judged: true}, {Criterion: GreatestFill, Value: nan, Limit: 0.8, Reason: "missing_bank_height", Detail: "The bank, is unknown."}}},
			{Name: `"dry", so`, Discharge: 0.1, Depths: DepthsAnswer{NormalDepth: 0.1, CriticalDepth: nan}, Lined: true},
		},
		Warnings: []Warning{{Code: "a", Detail: "b"}},
	}
}

func TestAppraisalAnswer(t *testing.T) {
	a := appraisal()
	text := a.AppendJSON(nil, US, ID("7"))
	if got := strings.Join(memberNames(t, text), " "); got != "id units verdict governing_flow governing_criterion governing_value governing_limit governing_unit flows notice warnings" {
		t.Error(got)
	}
	for _, want := range []string{
		`"governing_flow":"ten_year","governing_criterion":"least_freeboard","governing_value":1,"governing_limit":2,"governing_unit":"ft"`,
		`"flows":{"ten_year":{"discharge":35.31466672148859,"normal_depth":`, `"bend_rise":1,"lining":{"manning":0.03,"bed_shear":0.4177`, `"permissible_velocity":null,"bend_factor":1.05,"safety":2,"recommended_safety":1,"governing_place":"bed"},`,
		`"findings":[{"criterion":"least_freeboard","value":1,"limit":2,"unit":"ft","met":false,"reason":null},`,
		`{"criterion":"greatest_fill","value":null,"limit":0.8,"unit":"","met":null,"reason":"missing_bank_height","detail":"The bank, is unknown."}]}`,
		`,"\"dry\", so":{"discharge":3.53146`, `"critical":[],"lining":null,"findings":[]}}`, `"notice":"Ask."`,
	} {
		if !strings.Contains(string(text), want) {
			t.Errorf("no %s in\n%s", want, text)
		}
	}
	if strings.Count(string(text), `"normal":[`) != 1 { // of the flow that is not brief
		t.Error("brief leaves out the lists")
	}
	none := AppraisalAnswer{Verdict: "undetermined"}
	if text := none.AppendJSON(nil, SI, nil); !strings.Contains(string(text), `"governing_flow":null,"governing_criterion":null,"governing_value":null,"governing_limit":null,"governing_unit":null,"flows":{}`) || !json.Valid(text) {
		t.Errorf("%s", text)
	}
}

func TestAppraisalTable(t *testing.T) {
	table := appraisal().Table(US)
	const columns = "flow discharge normal_depth critical_depth normal_velocity normal_froude_number normal_bed_shear_stress freeboard fill criterion value limit unit met reason detail"
	if got := strings.Join(table.Columns, " "); got != columns || table.Rows != 3 {
		t.Fatalf("%d rows of %s", table.Rows, got)
	}
	for row, want := range []string{
		"ten_year|least_freeboard|1|2|ft|false||", "ten_year|greatest_fill||0.8|||missing_bank_height|The bank, is unknown.", `"dry", so|||||||`,
	} {
		got := string(table.Cell(nil, row, 0))
		for column := 9; column < len(table.Columns); column++ {
			got += "|" + string(table.Cell(nil, row, column))
		}
		if got != want {
			t.Errorf("row %d: %s, want %s", row, got, want)
		}
	}
	if got := string(table.Cell(nil, 0, 3)); got != "" {
		t.Errorf("a critical depth of %s", got)
	}
}
