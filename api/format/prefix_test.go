package format

import (
	"fmt"
	"strings"
	"testing"

	"leat/api/operation"
	"leat/api/wire"
)

// ownAttributes are 40 attributes of a layer's own, some of them named like members and answers of ours, with values of every kind.
func ownAttributes(i int) (pairs []pairOf) {
	for _, name := range []string{"id", "depth", "discharge", "section", "section_kind", "units", "line", "problem", "normal_depth", "warnings", "fingerprint", "curve"} {
		pairs = append(pairs, pairOf{name, `"own"`})
	}
	values := []string{"null", "true", "-1.50e3", `"a, \"quoted\" text"`, `"first\nsecond"`, `"t"`, `"NaN"`, "12345678901234567890.123", `"ä€"`, "0.10"}
	for len(pairs) < 40 {
		pairs = append(pairs, pairOf{fmt.Sprintf("OBJ %d", len(pairs)), values[(len(pairs)+i)%len(values)]})
	}
	return pairs
}

func members(pairs []pairOf) string {
	out := make([]string, len(pairs))
	for i, p := range pairs {
		out[i] = fmt.Sprintf("%q:%s", p.name, p.value)
	}
	return strings.Join(out, ",")
}

// the request of each feature, flat and nested, and one that is bad.
var prefixed = []string{
	`"leat_section_kind":"circular","leat_section_diameter":0.9,"leat_roughness_manning":0.013,"leat_bed_slope":0.01,"leat_discharge":0.4,"leat_depth":0.5`,
	`"leat_section":{"kind":"circular","diameter":0.9},"leat_roughness":{"manning":0.013},"leat_bed_slope":0.01,"leat_discharge":0.4,"leat_depth":0.5,"leat_units":"si"`,
	`"leat_section_kind":"circular","leat_section_diameter":-9,"leat_roughness_manning":0.013,"leat_bed_slope":0.01,"leat_discharge":0.4,"leat_normal_depth":99`,
}

// A layer with 40 attributes of its own, some named like ours, comes back with all of them, its geometries and what else it had untouched, and
// answers beside them; and again the same when it is sent again.
func TestALayerComesBackWhole(t *testing.T) {
	var features, own, shells []string
	for i, request := range prefixed {
		own = append(own, members(ownAttributes(i)))
		shells = append(shells, fmt.Sprintf(`{"type":"Feature" , "id":%d.50,"bbox":[0,1e2,3,4],"properties":{PROPERTIES},"geometry":{"type":"LineString","coordinates":[[1.0,2.00,-3.5],[1e2,4]]},"foreign":[ 1 ]}`, i))
		features = append(features, strings.Replace(shells[i], "PROPERTIES", own[i]+","+request, 1))
	}
	head := `{"type":"FeatureCollection","name":"drains","crs":{"type":"name","properties":{"name":"urn:ogc:def:crs:EPSG::25832"}},` + "\n" + `"features": [`
	tail := "], \"bbox\" : [0,0,1,1] }\n"
	body := head + strings.Join(features, ",") + tail
	b := newBulk(t, &operation.Depths, operation.Options{}, Choice{In: GeoJSON, Out: GeoJSON, Prefix: "leat_"}, 1<<16)
	text, s := pump(t, b, strings.NewReader(body))
	if s.Lines != 3 || s.Problems != 1 {
		t.Fatalf("%+v\n%s", s, text)
	}
	rest, found := strings.CutPrefix(text, head)
	if rest, closed := strings.CutSuffix(rest, "\n"+tail); !found || !closed {
		t.Fatalf("the collection is not as it was: %s", rest)
	}
	rows := strings.Split(strings.TrimPrefix(strings.TrimSuffix(rest, "\n"+tail), "\n"), ",\n")
	for i, row := range rows {
		before, after, _ := strings.Cut(shells[i], "PROPERTIES")
		properties, found := strings.CutPrefix(row, before)
		properties, closed := strings.CutSuffix(properties, after)
		if !found || !closed || !strings.HasPrefix(properties, own[i]+`,"leat_section`) {
			t.Fatalf("feature %d is not as it was:\n%s\n%s", i, row, features[i])
		}
		answers := map[string]string{}
		for _, p := range flattened(t, "{"+properties+"}") {
			answers[p.name] = p.value
		}
		if i == 2 {
			if !strings.HasPrefix(answers["leat_problem"], `"leat_section_diameter: `) || answers["leat_normal_depth"] != "null" || answers["leat_section_diameter"] != "-9" {
				t.Errorf("the bad feature: %v", answers)
			}
		} else if answers["leat_normal_depth"] != "0.28745873755521295" || answers["leat_curve"] != `"S1"` || answers["leat_problem"] != "null" || answers["leat_line"] != fmt.Sprint(i+1) {
			t.Errorf("feature %d: %v", i, answers)
		}
	}
	if again, _ := pump(t, b, strings.NewReader(text)); again != text {
		t.Errorf("sent again it is another:\n%s\n%s", text, again)
	}
}

// The same for flat objects.
func TestFlatObjectsComeBackWhole(t *testing.T) {
	for _, kind := range []Kind{NDJSON, JSONArray} {
		var lines []string
		for i, request := range prefixed {
			lines = append(lines, "{"+members(ownAttributes(i))+`,"leat_id":"a`+fmt.Sprint(i)+`",`+request+"}")
		}
		body := strings.Join(lines, "\n")
		if kind == JSONArray {
			body = "[" + strings.Join(lines, ",") + "]"
		}
		b := newBulk(t, &operation.Depths, operation.Options{}, Choice{In: kind, Out: kind, Flat: true, Prefix: "leat_"}, 1<<16)
		text, s := pump(t, b, strings.NewReader(body))
		if s.Lines != 3 || s.Problems != 1 {
			t.Fatalf("%+v\n%s", s, text)
		}
		got := told(t, kind, text)
		for i, row := range got {
			for _, p := range ownAttributes(i) {
				if row[p.name] != p.value {
					t.Errorf("row %d: %s is %s, was %s", i, p.name, row[p.name], p.value)
				}
			}
			if row["leat_id"] != fmt.Sprintf(`"a%d"`, i) || i < 2 != (row["leat_normal_depth"] == "0.28745873755521295") || i < 2 != (row["leat_problem"] == "null") {
				t.Errorf("row %d: %v", i, row)
			}
		}
		if kind == JSONArray {
			if again, _ := pump(t, b, strings.NewReader(text)); again != text {
				t.Errorf("sent again it is another:\n%s\n%s", text, again)
			}
		}
	}
}

// The same for CSV, whose cells come back as they were written, quotation marks and all.
func TestRowsComeBackWhole(t *testing.T) {
	body := "\ufeff\"own, 1\",leat_section_kind,leat_section_diameter,leat_roughness_manning,discharge,leat_bed_slope,leat_discharge,leat_normal_depth,normal_depth,leat_section_points\r\n" +
		"\"a\"\"b\",circular,0.9,0.013,\"many\",0.01,0.4,99,\"7\",\r\n" +
		"t,surveyed,,0.013,,0.01,0.4,,,\"[[0,1],[1,0],[2,1]]\"\n" +
		" x ,circular,-1,0.013,NULL,0.01,0.4,99,,\n" +
		"ragged,circular\n"
	b := newBulk(t, &operation.Depths, operation.Options{}, Choice{In: CSV, Out: CSV, Prefix: "leat_"}, 1<<16)
	text, s := pump(t, b, strings.NewReader(body))
	if s.Lines != 4 || s.Problems != 2 {
		t.Fatalf("%+v\n%s", s, text)
	}
	lines := strings.Split(text, "\r\n")
	for i, start := range []string{
		`"own, 1",leat_section_kind,leat_section_diameter,leat_roughness_manning,discharge,leat_bed_slope,leat_discharge,leat_normal_depth,normal_depth,leat_section_points,leat_id,leat_line,leat_units,leat_critical_depth,`,
		`"a""b",circular,0.9,0.013,"many",0.01,0.4,0.28745873755521295,"7",,,1,si,0.36`,
		`t,surveyed,,0.013,,0.01,0.4,0.`,
		` x ,circular,-1,0.013,NULL,0.01,0.4,,,,,3,,,`,
		`ragged,circular,,,,,,,,,,4,,,`,
	} {
		if !strings.HasPrefix(lines[i], start) {
			t.Errorf("line %d:\n%s\nwant\n%s", i, lines[i], start)
		}
	}
	if !strings.Contains(lines[3], "leat_section_diameter: ") || !strings.Contains(lines[4], "The row has 2 cells") {
		t.Errorf("%s\n%s", lines[3], lines[4])
	}
	whole := strings.Join(lines[:4], "\r\n") + "\r\n"
	again, _ := pump(t, b, strings.NewReader(whole))
	if again != whole {
		t.Errorf("sent again it is another:\n%s\n%s", text, again)
	}
	// As objects, what is handed through is text, or null where it is empty.
	flat := newBulk(t, &operation.Depths, operation.Options{}, Choice{In: CSV, Out: JSONArray, Flat: true, Prefix: "leat_"}, 1<<16)
	text, _ = pump(t, flat, strings.NewReader(body))
	if row := told(t, JSONArray, text)[0]; row["own, 1"] != `"a\"b"` || row["normal_depth"] != `"7"` || row["leat_normal_depth"] != "0.28745873755521295" || row["leat_section_points"] != "null" {
		t.Errorf("%v", row)
	}
}

// What PostgreSQL writes for what is not there, or is no number, in rows as JSON and as CSV, is absent or refused with advice (its documentation, sections 8.1.3,
// 8.6 and COPY: NaN as "NaN" in JSON, booleans as t and f and nulls as empty or \N in text).
func TestRowsOfPostgreSQL(t *testing.T) {
	const good = `"section_kind":"egg","section_height":1,"roughness_manning":0.013,"bed_slope":0.01`
	rows := []string{
		`{"id":1,"units":null,"section_inverted":true,` + good + `,"discharge":0.2,"depth":null}`,
		`{"id":2,` + good + `,"discharge":"NaN"}`,
		`{"id":3,"section_inverted":"t",` + good + `,"discharge":0.2}`,
		`{"id":4,` + good + `,"discharge":"Infinity"}`,
	}
	table := "id,section_kind,section_height,section_inverted,roughness_manning,bed_slope,discharge,depth\n" +
		"1,egg,1,true,0.013,0.01,0.2,\n2,egg,1,,0.013,0.01,NaN,\n3,egg,1,t,0.013,0.01,0.2,\n4,egg,1,,0.013,0.01,\\N,\n"
	for _, c := range []struct {
		choice Choice
		body   string
		says   []string
	}{
		{Choice{In: JSONArray, Out: JSONArray, Flat: true}, "[" + strings.Join(rows, ",") + "]", []string{"discharge: This must be a number, not a string. Leave an unknown number out", "section_inverted: This must be true or false, not a string. Write true", "discharge: This must be a number, not a string. Leave an unknown number out"}},
		{Choice{In: CSV, Out: JSONArray, Flat: true}, table, []string{`discharge: This must be a number, not \"NaN\". Leave the cell empty`, `section_inverted: This must be true or false, not \"t\". PostgreSQL writes t and f unless the column is cast to text`, `discharge: This must be a number, not \"\\\\N\". Leave the cell empty`}},
	} {
		text, s := pump(t, newBulk(t, &operation.Depths, operation.Options{}, c.choice, 1<<16), strings.NewReader(c.body))
		got := told(t, JSONArray, text)
		if s.Lines != 4 || s.Problems != 3 || got[0]["problem"] != "null" || got[0]["normal_depth"] == "null" {
			t.Fatalf("%+v\n%s", s, text)
		}
		for i, says := range c.says {
			if !strings.Contains(got[i+1]["problem"], says) {
				t.Errorf("row %d: %s, want %s", i+2, got[i+1]["problem"], says)
			}
		}
	}
}

// What without a prefix is refused keeps its value, and a problem that says which it is and what to do.
func TestForeignPropertiesAreRefused(t *testing.T) {
	body := `{"type":"FeatureCollection","features":[
{"type":"Feature","id":1,"properties":{"OBJECTID":7,"normal_depth":3,"section_kind":"circular"},"geometry":null},
{"type":"Feature","id":2,"properties":{"id":3},"geometry":null},
{"type":"Feature","id":{},"properties":[],"geometry":null},
{"type":"Thing","properties":{"section":{"kind":"box"},"section_width":1}},
{"type":"Feature","properties":null,"geometry":{"type":"Point","coordinates":[NaN,1]}},
7,
{}
]}`
	b := newBulk(t, &operation.Depths, operation.Options{}, Choice{In: GeoJSON, Out: GeoJSON}, 1<<16)
	text, s := pump(t, b, strings.NewReader(body))
	if s.Lines != 7 || s.Problems != 7 {
		t.Fatalf("%+v\n%s", s, text)
	}
	for i, parts := range [][]string{
		{`"id":1,"properties":{"OBJECTID":7,"normal_depth":3,"section_kind":"circular",`, `There is no member OBJECTID here.`, `?prefix=NAME_`},
		{`"properties":{"id":3,"line":2,`, `The feature's id and its property id differ`},
		{`"id":{},"properties":{"line":3,`, `must be an object`},
		{`"properties":{"section":{"kind":"box"},"section_width":1,"line":4`, `The type of a feature must be Feature.`},
		{`{"type":"Feature","geometry":null,"properties":{"line":5,`, `JSON has no NaN`},
		{`{"type":"Feature","geometry":null,"properties":{"line":6,`, `A feature must be an object.`},
		{`{"properties":{"line":7,`, `The type of a feature must be Feature.`},
	} {
		for _, part := range parts {
			if row := strings.Split(text, ",\n")[i]; !strings.Contains(row, part) {
				t.Errorf("feature %d does not hold %s:\n%s", i+1, part, row)
			}
		}
	}
}

// A record that is too long, or on which the operation panics, costs itself alone, and stands in the answer as far as it can.
func TestRefusedRecordsHaveTheirRow(t *testing.T) {
	panicking := operation.Depths
	panicking.Solve = func(body []byte, options operation.Options) (operation.Solved, *wire.Problem) {
		if strings.Contains(string(body), `"panic"`) {
			panic("as asked")
		}
		return operation.Depths.Solve(body, options)
	}
	long := strings.Repeat("x", 600)
	for _, c := range []struct {
		choice Choice
		body   string
		want   []string
	}{
		{Choice{In: CSV, Out: CSV, Prefix: "p_"}, "p_id,own\npanic,\"1,2\"\n" + long + ",1\n", []string{`panic,"1,2",1,`, `,,2,`}},
		{Choice{In: CSV, Out: JSONArray}, "id\npanic\n" + long + "\n", []string{`{"id":"panic","line":1,"problem":{`, `{"line":2,"problem":{`}},
		{Choice{In: JSONArray, Out: CSV}, `[{"id":"panic"},{"a":"` + long + `"}]`, []string{`panic,1,`, `,2,`}},
		{Choice{In: NDJSON, Out: NDJSON, Flat: true, Prefix: "p_"}, `{"id":"own","p_id":"panic"}` + "\n" + long + "\n", []string{`{"id":"own","p_id":"panic","p_line":1,`, `{"p_id":null,"p_line":2,`}},
		{Choice{In: GeoJSON, Out: GeoJSON}, `{"type":"FeatureCollection","features":[{"type":"Feature","id":"panic","geometry":[1]},{"a":"` + long + `"}]}`,
			[]string{`{"type":"Feature","id":"panic","geometry":[1],"properties":{"line":1,`, `{"type":"Feature","geometry":null,"properties":{"line":2,`}},
	} {
		b := newBulk(t, &panicking, operation.Options{}, c.choice, 500)
		text, s := pump(t, b, strings.NewReader(c.body))
		if s.Lines != 2 || s.Problems != 2 || !strings.Contains(text, "the fault is ours") || !strings.Contains(text, "line_bytes") {
			t.Errorf("%+v: %+v\n%s", c.choice, s, text)
		}
		for _, part := range c.want {
			if !strings.Contains(text, "\n"+part) && !strings.HasPrefix(text, part) {
				t.Errorf("%+v: no %s in\n%s", c.choice, part, text)
			}
		}
	}
}

// Flat answers exist where there is one row to tell, and nowhere else.
func TestWhereFlatAnswersExist(t *testing.T) {
	for _, op := range operation.All() {
		_, flat := op.Form.(wire.Flat)
		for _, choice := range []Choice{{In: CSV, Out: CSV}, {In: NDJSON, Out: NDJSON, Flat: true}, {In: GeoJSON, Out: GeoJSON}, {In: NDJSON, Out: CSV}} {
			if _, problem := New(op, operation.Options{}, choice, 100); (problem == nil) != flat || problem != nil && (problem.Status != 406 || !strings.Contains(problem.Detail, op.Name)) {
				t.Errorf("%s %+v: %v", op.Name, choice, problem)
			}
		}
		if _, problem := New(op, operation.Options{}, Choice{In: CSV, Out: NDJSON}, 100); problem != nil {
			t.Errorf("%s cannot be asked in CSV: %v", op.Name, problem)
		}
	}
	b := newBulk(t, &operation.Section, operation.Options{}, Choice{In: CSV, Out: CSV}, 1<<16)
	text, s := pump(t, b, strings.NewReader("section_kind,section_bottom_width,depth,depths\nrectangular,2,0.5,\nrectangular,2,,\"[0.5,1]\"\n"))
	if s.Problems != 1 || !strings.Contains(text, ",1,si,0.5,1,3,") || !strings.Contains(text, "give one depth in place of depths") {
		t.Errorf("%+v\n%s", s, text)
	}
	if _, problem := New(&operation.Depths, operation.Options{}, Choice{In: GeoJSON, Out: CSV, Prefix: "a_"}, 100); problem == nil || problem.Status != 406 {
		t.Errorf("%v", problem)
	}
}
