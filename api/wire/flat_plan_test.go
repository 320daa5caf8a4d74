package wire

import (
	"strings"
	"testing"
)

// rowOf puts cells of text into a row.
func rowOf(t *testing.T, request Request, prefix string, cells ...string) *FlatRow {
	t.Helper()
	plan := FlatPlanOf(request)
	row := plan.NewRow(prefix)
	for i := 0; i < len(cells); i += 2 {
		at, found := plan.Find(cells[i])
		if !found {
			t.Fatalf("no flat name %s", cells[i])
		}
		row.SetText(at, []byte(cells[i+1]))
	}
	return row
}

// The flat names are callers' own: none may change or go.
func TestFlatNames(t *testing.T) {
	for _, c := range []struct {
		request Request
		want    string
	}{
		{(*DepthsRequest)(nil), `id units gravity energy_coefficient momentum_coefficient barrels
section_kind section_bottom_width section_side_slope section_left_side_slope section_right_side_slope section_top_width section_width section_height
section_diameter section_haunch section_inverted section_cross_slope section_curb_height section_gutter_width section_gutter_slope section_bench_height
section_bench_width section_left_bench_width section_right_bench_width section_upper_side_slope section_points section_rows section_bank_height
roughness_manning roughness_strickler roughness_chezy roughness_sand_roughness roughness_kinematic_viscosity roughness_zones roughness_manning_by_depth
roughness_bed_manning roughness_sides_manning roughness_combine bed_slope discharge depth`},
		{(*AppraisalRequest)(nil), `id units gravity energy_coefficient momentum_coefficient barrels
section_kind section_bottom_width section_side_slope section_left_side_slope section_right_side_slope section_top_width section_width section_height
section_diameter section_haunch section_inverted section_cross_slope section_curb_height section_gutter_width section_gutter_slope section_bench_height
section_bench_width section_left_bench_width section_right_bench_width section_upper_side_slope section_points section_rows section_bank_height
roughness_manning roughness_strickler roughness_chezy roughness_sand_roughness roughness_kinematic_viscosity roughness_zones roughness_manning_by_depth
roughness_bed_manning roughness_sides_manning roughness_combine bed_slope flows depth
criteria_least_freeboard criteria_freeboard_rule criteria_greatest_fill criteria_least_velocity criteria_greatest_velocity criteria_least_shear
criteria_greatest_shear criteria_critical_band criteria_greatest_vedernikov_number criteria_least_lining_safety
criterion_flows_least_freeboard criterion_flows_freeboard_rule criterion_flows_greatest_fill criterion_flows_least_velocity criterion_flows_greatest_velocity
criterion_flows_least_shear criterion_flows_greatest_shear criterion_flows_critical_band criterion_flows_greatest_vedernikov_number criterion_flows_least_lining_safety
lining_kind lining_permissible_shear lining_soil_group lining_plasticity_index lining_void_ratio lining_grain_size lining_stem_height lining_condition
lining_growth_form lining_stone_size lining_specific_gravity lining_angle_of_repose lining_kinematic_viscosity lining_soil lining_water_carries bend_radius`},
	} {
		var names []string
		for _, m := range FlatPlanOf(c.request).Members() {
			names = append(names, m.Name)
		}
		if got := strings.Join(names, " "); got != strings.Join(strings.Fields(c.want), " ") {
			t.Errorf("%T:\n%s", c.request, got)
		}
	}
}

func TestRowMakesTheNestedRequest(t *testing.T) {
	row := rowOf(t, (*DepthsRequest)(nil), "",
		"discharge", "1.70", "id", "5", "roughness_bed_manning", "0.03", "roughness_sides_manning", "4e-2", "section_kind", "trapezoidal",
		"section_bottom_width", "", "section_side_slope", "1.5", "section_inverted", "true", "section_points", "[[0, 1], [1, 0]]", "units", `a"b`)
	want := `{"id":"5","units":"a\"b","section":{"kind":"trapezoidal","side_slope":1.5,"inverted":true,"points":[[0, 1], [1, 0]]},` +
		`"roughness":{"bed":{"manning":0.03},"sides":{"manning":4e-2}},"discharge":1.70}`
	if got := string(row.AppendRequest(nil)); got != want {
		t.Errorf("got  %s\nwant %s", got, want)
	}
	if p := row.Problem(nil, SI, nil); p != nil {
		t.Error(p)
	}
	row.Reset()
	if got := string(row.AppendRequest(nil)); got != `{"section":{},"roughness":{}}` {
		t.Errorf("an empty row makes %s", got)
	}
}

// A row of JSON values may hold members nested, flat, or as JSON text.
func TestRowTakesValuesAsJSON(t *testing.T) {
	plan := FlatPlanOf((*DepthsRequest)(nil))
	row := plan.NewRow("")
	for name, value := range map[string]string{
		"id": "17.50", "section": `"{\"kind\":\"surveyed\"}"`, "roughness_zones": `"[{\"manning\":0.03}]"`, "roughness_combine": `"divided"`, "discharge": "null",
	} {
		at, _ := plan.Find(name)
		row.SetJSON(at, []byte(value))
	}
	if got := string(row.AppendRequest(nil)); got != `{"id":17.50,"section":{"kind":"surveyed"},"roughness":{"zones":[{"manning":0.03}],"combine":"divided"}}` {
		t.Error(got)
	}
}

// What databases and spreadsheets write in a cell gets advice that fits (common practice of their exports).
func TestCellsThatCannotBeReadGetAdvice(t *testing.T) {
	for _, c := range []struct{ column, cell, advice string }{
		{"discharge", "1,5", "point before the decimals, not a comma: 1.5."},
		{"discharge", "1.234,5", "without separators of thousands"},
		{"discharge", "1,234.5", "without separators of thousands"},
		{"discharge", "1 234.5", "without separators of thousands"},
		{"discharge", "1'234", "without separators of thousands"},
		{"discharge", "12,345,678", "without separators of thousands"},
		{"discharge", "NaN", "Leave the cell empty"},
		{"discharge", "NULL", "Leave the cell empty"},
		{"discharge", `\N`, "Leave the cell empty"},
		{"discharge", "N/A", "Leave the cell empty"},
		{"discharge", "-Infinity", "Leave the cell empty"},
		{"discharge", "  ", "holds blanks. Leave the cell empty"},
		{"discharge", " 1.2", "Take out the blanks"},
		{"discharge", "1.2 m3/s", "without its unit"},
		{"section_diameter", "900mm", "without its unit"},
		{"section_diameter", `36"`, "without its unit"},
		{"bed_slope", "2 %", "as a fraction"},
		{"bed_slope", "2%", "as a fraction"},
		{"bed_slope", "1:200", "one decimal number"},
		{"bed_slope", "1 in 200", "one decimal number"},
		{"bed_slope", ".002", "a digit on both sides"},
		{"bed_slope", "-.002", "a digit on both sides"},
		{"discharge", "5.", "a digit on both sides"},
		{"discharge", "+5", "plus sign"},
		{"discharge", "007", "superfluous zeros"},
		{"discharge", "#DIV/0!", "spreadsheet"},
		{"barrels", "two", "must be a whole number"},
		{"section_inverted", "t", "PostgreSQL"},
		{"section_inverted", "f", "PostgreSQL"},
		{"section_inverted", "TRUE", "small letters"},
		{"section_inverted", "1", "Write true."},
		{"section_inverted", "NULL", "Leave the cell empty"},
		{"section_points", "{{0,1},{1,0}}", "to_json"},
		{"section_points", "[[0,1],[1,0]", "The JSON ends inside an array."},
		{"section_points", "NULL", "Leave the cell empty"},
		{"section_points", "0 1, 1 0", "JSON text"},
	} {
		row := rowOf(t, (*DepthsRequest)(nil), "leat_", c.column, c.cell)
		body := row.AppendRequest(nil)
		limits := DefaultLimits()
		p := row.Problem(body, SI, &limits)
		if p == nil || p.Errors[0].Column != "leat_"+c.column || p.Errors[0].Pointer != "" || !strings.Contains(p.Errors[0].Detail, c.advice) {
			t.Errorf("%s %q: %+v, want advice %q", c.column, c.cell, p, c.advice)
			continue
		}
		for _, f := range p.Errors[1:] { // the cell is not missing as well
			if f.Column == "leat_"+c.column {
				t.Errorf("%s %q: a second fault of the column: %+v", c.column, c.cell, f)
			}
		}
	}
}

// Faults of the request name columns as the caller wrote them.
func TestFaultsNameColumns(t *testing.T) {
	limits := DefaultLimits()
	decode := func(row *FlatRow) *Problem {
		body := row.AppendRequest(nil)
		if p := row.Problem(body, SI, &limits); p != nil {
			return p
		}
		var request DepthsRequest
		p := Decode(body, SI, &limits, &request)
		if p == nil {
			t.Fatalf("%s is accepted", body)
		}
		return row.Translate(p)
	}
	for _, c := range []struct {
		cells []string
		want  string
	}{
		{[]string{"section_kind", "circular", "section_diameter", "-1", "roughness_manning", "0.03", "bed_slope", "0.01", "discharge", "1"}, "x_section_diameter"},
		{[]string{"section_kind", "circular", "roughness_manning", "0.03", "bed_slope", "0.01", "discharge", "1"}, "x_section_diameter"},
		{[]string{"roughness_manning", "0.03", "bed_slope", "0.01", "discharge", "1"}, "x_section_kind"},
		{[]string{"section_kind", "circular", "section_diameter", "1", "bed_slope", "0.01", "discharge", "1"}, "x_roughness_manning"},
		{[]string{"section_kind", "surveyed", "section_points", "[[0,1],[1]]", "roughness_manning", "0.03", "bed_slope", "0.01", "discharge", "1"}, "x_section_points"},
		{[]string{"section_kind", "circular", "section_diameter", "1", "roughness_manning", "0.03", "bed_slope", "0.01"}, "x_discharge"},
		{[]string{"section", `{"kind":"circular","diameter":1}`, "section_kind", "circular", "roughness_manning", "0.03", "bed_slope", "0.01", "discharge", "1"}, "x_section_kind"},
		{[]string{"section", `{"kind":"circular","diameter":-1}`, "roughness_manning", "0.03", "bed_slope", "0.01", "discharge", "1"}, "/x_section/diameter"},
		{[]string{"section_kind", "circular", "section_diameter", "1", "roughness", "0.03", "bed_slope", "0.01", "discharge", "1"}, "x_roughness"},
	} {
		p := decode(rowOf(t, (*DepthsRequest)(nil), "x_", c.cells...))
		f := p.Errors[0]
		if len(p.Errors) != 1 || p.Status != 422 || f.Column+f.Pointer != c.want || !strings.HasPrefix(p.Detail, c.want+": ") {
			t.Errorf("%v: %q %+v", c.cells, p.Detail, p.Errors)
		}
	}
}

func TestUnknownColumnsGetAdvice(t *testing.T) {
	plan := FlatPlanOf((*DepthsRequest)(nil))
	answers := FlatTableOf((*DepthsAnswer)(nil))
	for name, want := range map[string]string{
		"Section_Kind": "section_kind", "kind": "section_kind", "diameter": "section_diameter", "bottom width": "section_bottom_width", "n": "roughness_manning",
		"Q": "discharge", "slope": "bed_slope", "roughness_maning": "roughness_manning", "normal_depth": "name of the answer", "OBJECTID": "?prefix=NAME_",
	} {
		if f := plan.Unknown(name, "", answers); f.Column != name || !strings.Contains(f.Detail, want) {
			t.Errorf("%s: %+v, want %s", name, f, want)
		}
	}
	if f := plan.Unknown("x_kind", "x_", nil); f.Column != "x_kind" || !strings.Contains(f.Detail, "x_section_kind") || strings.Contains(f.Detail, "prefix") {
		t.Errorf("%+v", f)
	}
	appraisal := FlatPlanOf((*AppraisalRequest)(nil))
	if f := appraisal.Unknown("x_discharge", "x_", nil); !strings.Contains(f.Detail, "Did you mean x_flows_ with a name of your own behind it, such as x_flows_design?") {
		t.Errorf("%+v", f)
	}
	for i := range plan.nodes {
		if _, found := plan.Find(plan.nodes[i].name); !found {
			t.Errorf("%s is not found", plan.nodes[i].name)
		}
	}
}
