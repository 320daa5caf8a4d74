package mapping

import (
	"crypto/sha256"
	"encoding/hex"
	"errors"
	"slices"
	"strings"
	"testing"

	"leat/api/operation"
	"leat/cmd/internal/register/row"
	"leat/compute"
)

const appraised = `operation: appraisal
source: {format: csv, path: d.csv, key: asset}
target: {format: csv, path: r.csv}
columns:
  section_kind: {constant: circular}
  section_diameter: {column: diameter, unit: mm}
  roughness_manning: 0.013
  bed_slope: slope
flows:
  design: {column: flow, unit: l/s}
  a_check: 0.2
criteria:
  by: class
  classes:
    trunk: {greatest_fill: {constant: 75, unit: "%"}, critical_band: [0.86, 1.13]}
    local: {greatest_fill: 0.9, least_velocity: {column: least, unit: cm/s}}
  otherwise: {greatest_fill: 1}
criterion_flows:
  greatest_fill: [design]
`

var appraisedColumns = []row.Column{{Name: "asset"}, {Name: "diameter"}, {Name: "slope"}, {Name: "flow"}, {Name: "class"}, {Name: "least"}}

func appraisedRequest(t *testing.T, text string, cells map[string]any) (string, []Problem) {
	t.Helper()
	f, err := Parse("m.yaml", []byte(text))
	if err != nil {
		t.Fatal(err)
	}
	m, err := f.Compile(appraisedColumns, nil)
	if err != nil {
		t.Fatal(err)
	}
	r := Row{Values: make([]row.Value, len(m.Columns))}
	for i, name := range m.Columns {
		r.Values[i] = valueOf(cells[name])
	}
	body, problems := m.NewWriter().Append(nil, r)
	return string(body), problems
}

// The flows of a criterion that the row's class does not have are left out.
func TestCriterionFlowsOfAClass(t *testing.T) {
	text := strings.Replace(appraised, "  greatest_fill: [design]\n", "  least_velocity: [design]\n  critical_band: [a_check]\n", 1)
	cells := map[string]any{"asset": "A", "diameter": 300, "slope": 0.01, "flow": 50, "least": 60}
	for class, want := range map[string]string{
		"trunk": `"criterion_flows":{"critical_band":["a_check"]},`, "local": `"criterion_flows":{"least_velocity":["design"]},`, "other": "",
	} {
		cells["class"] = class
		body, problems := appraisedRequest(t, text, cells)
		if len(problems) > 0 || !strings.Contains(body, want+`"flows"`) || want == "" && strings.Contains(body, "criterion_flows") {
			t.Errorf("%s: %s %v", class, body, problems)
		}
		if problem := operation.Appraisal.Check([]byte(body), operation.Options{}); problem != nil {
			t.Errorf("%s: %v", class, problem)
		}
	}
	cells["class"], cells["least"] = "local", nil // the limit is fed and missing
	if body, problems := appraisedRequest(t, text, cells); len(problems) > 0 || strings.Contains(body, "criterion_flows") {
		t.Errorf("%s %v", body, problems)
	}
}

// Criteria go by the class of the asset; what one class does not name it is not judged by.
func TestCriteriaByClass(t *testing.T) {
	const rest = `,"criterion_flows":{"greatest_fill":["design"]},"flows":{"a_check":0.2,"design":0.05},"roughness":{"manning":0.013},` +
		`"section":{"diameter":0.3,"kind":"circular"},"units":"si"}`
	cells := map[string]any{"asset": "A", "diameter": 300, "slope": 0.01, "flow": 50, "least": 60}
	for class, want := range map[any]string{
		"trunk": `{"bed_slope":0.01,"criteria":{"critical_band":[0.86,1.13],"greatest_fill":0.75}`,
		"local": `{"bed_slope":0.01,"criteria":{"greatest_fill":0.9,"least_velocity":0.6}`,
		"other": `{"bed_slope":0.01,"criteria":{"greatest_fill":1}`,
		nil:     `{"bed_slope":0.01,"criteria":{"greatest_fill":1}`,
	} {
		cells["class"] = class
		got, problems := appraisedRequest(t, appraised, cells)
		if got != want+rest || len(problems) > 0 {
			t.Errorf("%v: %s %v", class, got, problems)
		}
		if problem := operation.Appraisal.Check([]byte(got), operation.Options{}); problem != nil {
			t.Errorf("%v: %v", class, problem)
		}
	}
	strict := strings.Replace(appraised, "  otherwise: {greatest_fill: 1}\n", "", 1)
	for class, want := range map[any]string{"trunc": `did you mean "trunk"`, nil: "is empty"} {
		cells["class"] = class
		_, problems := appraisedRequest(t, strict, cells)
		if len(problems) != 1 || problems[0].Code != CodeUnknownClass || problems[0].Column != "class" || !strings.Contains(problems[0].Text, want) {
			t.Errorf("%v: %v", class, problems)
		}
	}
}

// Flows may be called anything; the request is canonical all the same, and a fault leads back to the column.
func TestNamesOfFlows(t *testing.T) {
	text := strings.Replace(appraised, "  a_check: 0.2\n", "  \"\\U0001F600\": 0.3\n  \"\\uFFEE\": 0.4\n  \"a/b~c\": least\n  \"say \\\"so\\\" \\t\": 0.5\n  é: 0.6\n  10: 0.7\n", 1)
	cells := map[string]any{"asset": "A", "diameter": 300, "slope": 0.01, "flow": 50, "class": "trunk", "least": 0.2}
	body, problems := appraisedRequest(t, text, cells)
	if len(problems) > 0 {
		t.Fatal(problems)
	}
	if problem := operation.Appraisal.Check([]byte(body), operation.Options{}); problem != nil {
		t.Fatalf("%s: %v", body, problem)
	}
	want, _ := operation.Appraisal.Fingerprint([]byte(body), operation.Options{})
	sum := sha256.Sum256([]byte("appraisal\n" + compute.EngineVersion + "\n" + body))
	if got := hex.EncodeToString(sum[:]); got != want {
		t.Errorf("%s is not canonical", body)
	}
	f, err := Parse("m.yaml", []byte(text))
	if err != nil {
		t.Fatal(err)
	}
	m, err := f.Compile(appraisedColumns, nil)
	if err != nil || m.ColumnsAt("/flows/a~1b~0c") != "least" {
		t.Errorf("%v %q", err, m.ColumnsAt("/flows/a~1b~0c"))
	}
	cells["least"] = "x"
	if _, problems := appraisedRequest(t, text, cells); len(problems) != 1 || problems[0].Pointer != "/flows/a~1b~0c" {
		t.Errorf("%v", problems)
	}
	long := strings.Replace(appraised, "  a_check: 0.2\n", "  "+strings.Repeat("é", 257)+": 0.3\n", 1)
	if _, err := Parse("m.yaml", []byte(long)); err == nil || !strings.Contains(err.Error(), "at most 256 characters") {
		t.Errorf("%v", err)
	}
}

func TestFaultsOfCriteria(t *testing.T) {
	for _, c := range []struct {
		old, new string
		line     int
		want     string
	}{
		{"by: class", "by: clas", 13, `did you mean "class"`},
		{"  by: class\n", "", 12, "criteria by class need by"},
		{"least_velocity: {", "lest_velocity: {", 16, `did you mean "least_velocity"`},
		{"unit: cm/s", "unit: mm", 16, "it may be in m/s, cm/s"},
		{"{constant: 75, unit: \"%\"}", "{constant: 75, unit: permile}", 15, "it may be in 1, %"},
		{"{constant: 75, unit: \"%\"}", "75", 15, "greatest_fill must be from 1e-9 to 1, not 75. A fill of"},
		{"greatest_fill: [design]", "greatest_fill: [desing]", 19, `did you mean "design"`},
		{"column: flow", "column: flo", 10, `did you mean "flow"`},
		{"greatest_fill: [design]", "least_freeboard: [design]", 19, "criteria has no least_freeboard"},
		{"greatest_fill: [design]", "greatest_fil: [design]", 19, `did you mean "greatest_fill"`},
		{"flows:\n  design: {column: flow, unit: l/s}\n  a_check: 0.2\n", "", 4, "Nothing feeds flows"},
	} {
		f, err := Parse("m.yaml", []byte(strings.Replace(appraised, c.old, c.new, 1)))
		if err == nil {
			_, err = f.Compile(appraisedColumns, nil)
		}
		var faults Faults
		if !errors.As(err, &faults) || !slices.ContainsFunc(faults, func(f *Fault) bool { return f.Line == c.line && strings.Contains(f.Detail, c.want) }) {
			t.Errorf("%s: %v", c.new, err)
		}
	}
}
