package wire

import (
	"strings"
	"testing"
)

// TestAdvice holds what callers are told who send what is often sent.
func TestAdvice(t *testing.T) {
	const (
		section   = `"section":{"kind":"trapezoidal","bottom_width":1,"side_slope":1}`
		roughness = `"roughness":{"manning":0.03}`
		good      = section + `,` + roughness + `,"bed_slope":0.002`
	)
	for _, c := range []struct{ body, pointer, detail string }{
		{`{` + good + `,"Q":1}`, "/Q", "There is no member Q here. Did you mean discharge?"},
		{`{` + good + `,"flow":1}`, "/flow", "There is no member flow here. Did you mean discharge?"},
		{`{` + section + `,"roughness":{"n":0.03},"bed_slope":0.002,"discharge":1}`, "/roughness/n", "There is no member n here. Did you mean manning?"},
		{`{"section":{"kind":"trapezoidal","b":1,"z":1},` + roughness + `,"bed_slope":0.002,"discharge":1}`, "/section/z", "There is no member z here. Did you mean side_slope?"},
		{`{"section":{"kind":"circular","dn":0.6}}`, "/section/dn", "There is no member dn here. Did you mean diameter?"},
		{`{"section":{"kind":"trapezoidal","x":1}}`, "/section/x", "There is no member x here. Accepted are kind, bottom_width, side_slope, left_side_slope, right_side_slope and bank_height."},
		{`{"section":{"x":1,"kind":"trapezoidal"}}`, "/section/x", "There is no member x here. Accepted are kind, bottom_width, side_slope, left_side_slope, right_side_slope, top_width, "},
		{`{"section":{"kind":"circular","botom_width":1}}`, "/section/botom_width", "There is no member botom_width here. Did you mean bottom_width?"},
		{`{"section":{"kind":"surveyed","points":"[[0,1],[1,0]]"}}`, "/section/points", "This must be a list of lists of two numbers, not a string. Write the list without quotes."},
		{`{"section":{"kind":"surveyed","points":"0 1, 1 0"}}`, "/section/points", "This must be a list of lists of two numbers, not a string."},
		{`{"section":{"kind":"surveyed","points":["3 4"]}}`, "/section/points/0", "This must be a list of two numbers, not a string."},
		{`{"units":"feet"}`, "/units", `not "feet". Did you mean "us"?`},
		{`{"units":"Metric"}`, "/units", `not "Metric". Did you mean "si"?`},
		{`{"section":{"kind":"Round"}}`, "/section/kind", `not "Round". Did you mean "circular"?`},
		{`{"section":{"kind":"culvert"}}`, "/section/kind", `not "culvert". Did you mean "circular" or "box"?`},
		{`{"section":{"kind":"v-ditch"}}`, "/section/kind", `not "v-ditch". Did you mean "triangular"?`},
		{`{"section":{"shape":"trapezoidal"}}`, "/section/shape", "There is no member shape here. Did you mean kind?"},
		{`{` + good + `,"discharge":1,"z":1}`, "/z", "There is no member z here. Accepted are id, "},
		{`{` + section + `,"roughness":0.03,"bed_slope":0.002,"discharge":1}`, "/roughness", `This must be an object, not a number. Give one such as {"manning": 0.03}.`},
		{`[{` + good + `,"discharge":1}]`, "", "This must be an object, not a list. Send one object a request, or one a line in bulk."},
		{`{` + section + `,` + roughness + `,"bed_slope":2,"discharge":1}`, "/bed_slope", "not 2. A fall of 2 % or 20 in 1000 is 0.02."},
		{`{` + roughness + `,"bed_slope":0.002,"discharge":1}`, "/section", `section is missing: give an object such as {"kind": "rectangular", "bottom_width": 2}.`},
		{`{` + section + `,` + roughness + `,"bed_slope":-9999,"discharge":1}`, "/bed_slope", "not -9999. Leave an unknown number out or give null."},
		{`{"units":"us",` + good + `,"discharge":-9999.0}`, "/discharge", "not -9999. Leave an unknown number out or give null."},
		{`{"section":{"kind":"egg","height":1,"inverted":"t"}}`, "/section/inverted", "This must be true or false, not a string. Write true, without quotes."},
		{`{"section":{"kind":"egg","height":1,"inverted":"False"}}`, "/section/inverted", "This must be true or false, not a string. Write false, without quotes."},
		{`{"section":{"kind":"egg","height":1,"inverted":"blunt"}}`, "/section/inverted", "This must be true or false, not a string."},
		{`{` + good + `,"discharge":"0.3"}`, "/discharge", "not a string. Write the number without quotes."},
		{`{` + good + `,"discharge":"0,3"}`, "/discharge", "not a string. Write the number without quotes, with a point before its decimals."},
		{`{` + good + `,"discharge":"300 l/s"}`, "/discharge", "not a string. Write the number alone, without its unit and without quotes."},
		{`{` + good + `,"discharge":" "}`, "/discharge", "not a string. Leave an unknown number out or give null."},
		{`{` + good + `,"discharge":"none"}`, "/discharge", "not a string. Leave an unknown number out or give null."},
		{`{` + good + `,"discharge":"NULL"}`, "/discharge", "not a string. Leave an unknown number out or give null."},
		{`{` + good + `,"discharge":"much"}`, "/discharge", "This must be a number, not a string."},
		{`{` + section + `,` + roughness + `,"bed_slope":"1:300","discharge":1}`, "/bed_slope", "not a string. Write a ratio as one decimal number, without quotes."},
		{`{` + section + `,` + roughness + `,"bed_slope":"3 in 1000","discharge":1}`, "/bed_slope", "not a string. Write a ratio as one decimal number, without quotes."},
		{`{` + section + `,` + roughness + `,"bed_slope":"0.2 %","discharge":1}`, "/bed_slope", "not a string. Write a percentage as a fraction, without quotes: 0.02 for 2 %."},
		{`{` + section + `,` + roughness + `,"bed_slope":"0.2%","discharge":1}`, "/bed_slope", "not a string. Write a percentage as a fraction, without quotes: 0.02 for 2 %."},
	} {
		var r DepthsRequest
		if told := detailAt(Decode([]byte(c.body), SI, &Limits{ArrayItems: 9, Points: 9}, &r), c.pointer); !strings.Contains(told, c.detail) || strings.HasSuffix(c.detail, "a string.") && told != c.detail {
			t.Errorf("%s: at %q\n got %q\nwant %q", c.body, c.pointer, told, c.detail)
		}
	}
	const reaches = `{"discharge":1,"reaches":[{"length":9,` + good + `}],"downstream":{"depth":1},"geometry":`
	for _, c := range []struct{ body, pointer, detail string }{
		{`{"type":"LineString","crs":{"type":"name"},"coordinates":[[0,0],[1,1]]}`, "/geometry/crs", "There is no member crs here. Leave it out: coordinates come back in the system in which they were sent."},
		{`{"type":"LineString","bbox":[0,0,1,1],"coordinates":[[0,0],[1,1]]}`, "/geometry/bbox", "There is no member bbox here. Leave it out: type and coordinates are enough."},
		{`{"type":"MultiLineString","coordinates":[[[0,0],[1,1]]]}`, "/geometry/type", `type must be "LineString", not "MultiLineString". Merge its parts to one LineString, from upstream to downstream.`},
		{`"LINESTRING (0 0, 1 1)"`, "/geometry", `This must be an object, not a string. Give one such as {"type": "LineString", "coordinates": [[0, 0], [100, 20]]}.`},
		{`{"type":"Point","coordinates":[0,0]}`, "/geometry/type", `type must be "LineString", not "Point".`},
		{`{"type":"linestring","coordinates":[[0,0],[1,1]]}`, "/geometry/type", `type must be "LineString", not "linestring". Did you mean "LineString"?`},
	} {
		var r ProfileRequest
		if told := detailAt(Decode([]byte(reaches+c.body+`}`), SI, &Limits{ArrayItems: 9, Points: 9, Reaches: 9}, &r), c.pointer); !strings.Contains(told, c.detail) {
			t.Errorf("%s: at %q\n got %q\nwant %q", c.body, c.pointer, told, c.detail)
		}
	}
}

// Every example of an object is accepted where it is advised.
func TestObjectExamples(t *testing.T) {
	const (
		section   = `"section":{"kind":"trapezoidal","bottom_width":1,"side_slope":1}`
		roughness = `"roughness":{"manning":0.03}`
		depth     = `"downstream":{"depth":1}`
	)
	places := map[string]string{
		"section":    `{"reaches":[{"length":9,"bed_slope":0,"section":%,` + roughness + `}],` + depth,
		"roughness":  `{"reaches":[{"length":9,"bed_slope":0,` + section + `,"roughness":%}],` + depth,
		"upstream":   `{"upstream":%,` + depth,
		"downstream": `{"downstream":%`,
		"weir":       `{"downstream":{"weir":%}`,
		"gate":       `{"upstream":{"gate":%},` + depth,
		"report":     `{"report":%,` + depth,
		"geometry":   `{"geometry":%,` + depth,
	}
	const appraised = `{` + section + `,"bed_slope":0.01,`
	appraisals := map[string]string{
		"flows":           appraised + roughness + `,"flows":%,"criteria":{"least_freeboard":1}}`,
		"criteria":        appraised + roughness + `,"flows":{"a":1},"criteria":%}`,
		"criterion_flows": appraised + roughness + `,"flows":{"hundred_year":1},"criteria":{"least_freeboard":1},"criterion_flows":%}`,
		"lining":          appraised + `"flows":{"a":1},"criteria":{"least_lining_safety":1},"lining":%}`,
		"critical_band":   appraised + roughness + `,"flows":{"a":1},"criteria":{"critical_band":%}}`,
		"bend":            appraised + roughness + `,"flows":{"a":1},"criteria":{"least_freeboard":1},"bend":%}`,
	}
	for name, example := range objectExamples {
		if body, known := appraisals[name]; known {
			var r AppraisalRequest
			body = strings.Replace(body, "%", example, 1)
			if p := Decode([]byte(body), SI, &Limits{ArrayItems: 9, Flows: 9}, &r); p != nil {
				t.Errorf("%s: %s", body, p.AppendJSON(nil))
			}
			continue
		}
		body, known := places[name]
		if !known {
			t.Fatalf("no place for the example of %s", name)
		}
		if !strings.Contains(body, `"reaches"`) {
			body += `,"reaches":[{"length":9,"bed_slope":0,` + section + `,` + roughness + `}]`
		}
		body = strings.Replace(body, "%", example, 1) + `,"discharge":1}`
		var r ProfileRequest
		if p := Decode([]byte(body), SI, &Limits{ArrayItems: 9, Points: 9, Reaches: 9, ReportPoints: 9}, &r); p != nil {
			t.Errorf("%s: %s", body, p.AppendJSON(nil))
		}
	}
}

// detailAt returns the detail of a problem's fault at a pointer.
func detailAt(p *Problem, pointer string) string {
	if p != nil {
		for _, f := range p.Errors {
			if f.Pointer == pointer {
				return f.Detail
			}
		}
	}
	return ""
}
