package register_test

import (
	"bytes"
	"context"
	"encoding/csv"
	"encoding/json"
	"fmt"
	"math"
	"os"
	"path/filepath"
	"strconv"
	"strings"
	"testing"

	"leat/api/operation"
	"leat/cmd/internal/register"
)

const drainsMapping = `operation: depths
source: {format: csv, path: drains.csv, key: asset}
target: {format: csv, path: results.csv, columns: [normal_depth, critical_depth, capacity_ratio, slope_class, surcharged, warnings], prefix: leat_}
missing: [-999]
columns:
  section_kind: {column: shape, values: {C: circular, T: trapezoidal}}
  section_diameter: {column: size, unit: mm}
  section_bottom_width: {column: size, unit: mm}
  section_side_slope: {column: side, unit: "1:x"}
  section_bank_height: 1.5
  roughness_manning: {column: material, values: {concrete: 0.013, earth: 0.025}}
  bed_slope: {column: fall, unit: "%"}
  discharge: {column: flow, unit: l/s}
`

// folder writes files into a new folder.
func folder(t *testing.T, files map[string]string) string {
	t.Helper()
	path := t.TempDir()
	for name, content := range files {
		if err := os.WriteFile(filepath.Join(path, name), []byte(content), 0o600); err != nil {
			t.Fatal(err)
		}
	}
	return path
}

// drainsCSV makes a register; one in a hundred rows is bad, in the column that is returned by key.
func drainsCSV(n int) (text string, requests map[string]string, bad map[string]string) {
	var b strings.Builder
	b.WriteString("asset,shape,size,side,material,fall,flow\n")
	requests, bad = map[string]string{}, map[string]string{}
	for i := range n {
		key := "D" + strconv.Itoa(i)
		cells := []string{key, []string{"C", "T"}[i%2], strconv.Itoa(150 + i%1500), "1:2", []string{"concrete", "earth"}[i/2%2], fmt.Sprintf("%.2f", 0.05+float64(i%290)/100), strconv.Itoa(1 + i*7%400)}
		millimetres, _ := strconv.ParseFloat(cells[2], 64)
		percent, _ := strconv.ParseFloat(cells[5], 64)
		litres, _ := strconv.ParseFloat(cells[6], 64)
		section := map[string]any{"kind": "circular", "diameter": millimetres / 1000}
		if i%2 == 1 {
			section = map[string]any{"kind": "trapezoidal", "bottom_width": millimetres / 1000, "side_slope": 2, "bank_height": 1.5}
		}
		tangent := percent / 100
		body, _ := json.Marshal(map[string]any{
			"section": section, "roughness": map[string]any{"manning": map[string]float64{"concrete": 0.013, "earth": 0.025}[cells[4]]},
			"bed_slope": tangent / math.Sqrt(1+tangent*tangent), "discharge": litres / 1000,
		})
		requests[key] = string(body)
		if i%100 == 57 {
			at := 1 + i/100%6
			if at == 3 {
				at = 4 // the side slope counts for trapezoids only
			}
			bad[key] = strings.Split("asset,shape,size,side,material,fall,flow", ",")[at]
			cells[at] = []string{"", "X", "wide", "", "wood", "-999", "1;5"}[at]
			delete(requests, key)
		}
		b.WriteString(strings.Join(cells, ",") + "\n")
	}
	return b.String(), requests, bad
}

func records(t *testing.T, path string) (rows []map[string]string) {
	t.Helper()
	f, err := os.Open(path)
	if err != nil {
		t.Fatal(err)
	}
	defer f.Close()
	all, err := csv.NewReader(f).ReadAll()
	if err != nil {
		t.Fatal(err)
	}
	for _, record := range all[1:] {
		row := map[string]string{}
		for i, name := range all[0] {
			row[name] = record[i]
		}
		rows = append(rows, row)
	}
	return rows
}

// Ten thousand rows of a CSV file with one in a hundred bad, by the command: results are the unary answers bit for bit, in the order of the
// register; each bad row is in the file of problems with its line and column.
func TestTenThousandRowsOfCSV(t *testing.T) {
	text, requests, bad := drainsCSV(10_000)
	path := folder(t, map[string]string{"m.yaml": drainsMapping, "drains.csv": text})
	outcome, out, stderr := command(t, "run", "--rows", "333", filepath.Join(path, "m.yaml"))
	if outcome != register.Problems || !strings.Contains(out, "10000 rows") || !strings.Contains(out, "9900 computed") || !strings.Contains(out, "100 bad") {
		t.Fatalf("%v\n%s\n%s", outcome, out, stderr)
	}
	judgeDrains(t, records(t, filepath.Join(path, "results.csv")), requests)
	problems := records(t, filepath.Join(path, "results_problems.csv"))
	if len(problems) != len(bad) {
		t.Errorf("%d problems, want %d", len(problems), len(bad))
	}
	for _, p := range problems {
		i, _ := strconv.Atoi(p["asset"][1:])
		if bad[p["asset"]] != p["column"] || p["line"] != strconv.Itoa(i+2) || p["text"] == "" || p["code"] == "" {
			t.Errorf("%v, bad in %s", p, bad[p["asset"]])
		}
	}
}

// judgeDrains holds results, in the order of the register, to the unary answers of their requests, bit for bit.
func judgeDrains(t *testing.T, results []map[string]string, requests map[string]string) {
	t.Helper()
	if len(results) != len(requests) {
		t.Fatalf("%d results, want %d", len(results), len(requests))
	}
	last := -1
	for _, row := range results {
		i, _ := strconv.Atoi(row["leat_asset"][1:])
		if i <= last {
			t.Errorf("row %d behind %d", i, last)
		}
		last = i
		answer, _, problem := operation.Depths.Answer(nil, []byte(requests[row["leat_asset"]]), operation.Options{Fingerprint: true})
		if problem != nil {
			t.Fatal(row["leat_asset"], problem)
		}
		var want struct {
			Normal, Critical *float64
			Capacity         *struct{ Ratio float64 }
			SlopeClass       *string
			Fingerprint      string
		}
		var members map[string]json.RawMessage
		if err := json.Unmarshal(answer, &members); err != nil {
			t.Fatal(err)
		}
		json.Unmarshal(members["normal_depth"], &want.Normal)
		json.Unmarshal(members["critical_depth"], &want.Critical)
		json.Unmarshal(members["capacity"], &want.Capacity)
		json.Unmarshal(members["fingerprint"], &want.Fingerprint)
		for column, number := range map[string]*float64{"leat_normal_depth": want.Normal, "leat_critical_depth": want.Critical, "leat_capacity_ratio": &want.Capacity.Ratio} {
			got, err := strconv.ParseFloat(row[column], 64)
			if number == nil {
				if row[column] != "" {
					t.Errorf("%s: %s is %s", row["leat_asset"], column, row[column])
				}
			} else if err != nil || math.Float64bits(got) != math.Float64bits(*number) {
				t.Errorf("%s: %s is %s, want %v", row["leat_asset"], column, row[column], *number)
			}
		}
		if row["leat_fingerprint"] != want.Fingerprint || row["leat_run"] == "" || row["leat_engine_version"] == "" || !strings.HasSuffix(row["leat_computed_at"], "Z") {
			t.Errorf("%v", row)
		}
	}
}

// What a mapping file has wrong stops the command before a file is written, with its line.
func TestNothingIsWrittenAfterAFault(t *testing.T) {
	text, _, _ := drainsCSV(10)
	for _, c := range []struct {
		name, old, new string
		files          map[string]string
		line           int
		want           string
	}{
		{"unknown column", "column: shape", "column: shap", nil, 6, `did you mean "shape"`},
		{"unknown unit", "unit: l/s", "unit: gallons", nil, 13, "it may be in"},
		{"unknown kind", "C: circular", "C: cirular", nil, 6, `did you mean "circular"`},
		{"unknown answer", "capacity_ratio", "capacity_rate", nil, 3, `did you mean "capacity_ratio"`},
		{"key twice", "key: asset", "key: shape", nil, 2, "not unique: several rows have C, T"},
		{"no such file", "path: drains.csv", "path: drain.csv", nil, 2, "drain.csv"},
		{"file that exists", "", "", map[string]string{"results.csv": "precious"}, 3, "overwrite: true"},
		{"problems that exist", "", "", map[string]string{"results_problems.csv": "precious"}, 3, "overwrite: true"},
		{"register itself", "path: results.csv", "path: ./drains.csv, overwrite: true", nil, 3, "the register itself"},
		{"register named again", "format: csv, path: results.csv", "format: geojson, path: drains.csv, overwrite: true", nil, 3, "the register itself"},
		{"wrong delimiter", "path: drains.csv", "path: drains.csv, delimiter: \";\"", nil, 2, `set delimiter to ","`},
		{"shared files", "", "", nil, 3, "PostgreSQL"},
	} {
		t.Run(c.name, func(t *testing.T) {
			files := map[string]string{"m.yaml": strings.Replace(drainsMapping, c.old, c.new, 1), "drains.csv": text}
			for name, content := range c.files {
				files[name] = content
			}
			path := folder(t, files)
			arguments := []string{"run", "--quiet", filepath.Join(path, "m.yaml")}
			if c.name == "shared files" {
				arguments = append(arguments, "--shared")
			}
			outcome, out, stderr := command(t, arguments...)
			if outcome != register.Misused || out != "" || !strings.Contains(stderr, fmt.Sprintf("m.yaml:%d:", c.line)) || !strings.Contains(stderr, c.want) {
				t.Errorf("%v %s\n%s", outcome, out, stderr)
			}
			left, _ := os.ReadDir(path)
			if len(left) != len(files) {
				t.Errorf("%v", left)
			}
			for name, content := range files {
				if now, _ := os.ReadFile(filepath.Join(path, name)); string(now) != content {
					t.Errorf("%s was changed", name)
				}
			}
		})
	}
}

func TestArguments(t *testing.T) {
	for arguments, want := range map[string]string{
		"":                         "say check, run",
		"walk m.yaml":              `there is no "walk"`,
		"run":                      "name the mapping file",
		"run a b":                  "one argument too many",
		"run m.yaml --rows 0":      "--rows",
		"run m.yaml --workers -1":  "--workers",
		"check m.yaml --dry-run":   "--dry-run",
		"work m.yaml --shared":     "--shared",
		"run --password=x m.yaml":  "--help lists the flags",
		"check --problems -2 a":    "--problems",
		"run m.yaml --run a\x1bb":  "control characters",
		"run --dry-run --shared m": "--dry-run",
	} {
		outcome, _, stderr := command(t, strings.Fields(arguments)...)
		if outcome != register.Misused || !strings.Contains(stderr, want) {
			t.Errorf("%q: %v %s", arguments, outcome, stderr)
		}
	}
	if outcome, out, _ := command(t, "--help"); outcome != register.Done || !strings.Contains(out, "leat register check MAPPING") || !strings.Contains(out, "Exit codes") {
		t.Errorf("%v %s", outcome, out)
	}
	if outcome, _, stderr := command(t, "run", "/nowhere/at/all.yaml"); outcome != register.Misused || !strings.Contains(stderr, "/nowhere/at/all.yaml") {
		t.Errorf("%v %s", outcome, stderr)
	}
}

func TestCheckAndDryRunWriteNothing(t *testing.T) {
	text, _, _ := drainsCSV(1000)
	path := folder(t, map[string]string{"m.yaml": drainsMapping, "drains.csv": text})
	mapping := filepath.Join(path, "m.yaml")
	outcome, out, _ := command(t, "check", mapping, "--problems", "3")
	if outcome != register.Problems || strings.Count(out, "asset D") != 3 || !strings.Contains(out, "and 7 more problems") || !strings.Contains(out, "1000 rows") ||
		!strings.Contains(out, "asset D57, line 59, column shape, /section/kind: unknown_value:") {
		t.Errorf("%v\n%s", outcome, out)
	}
	outcome, out, _ = command(t, "run", "--dry-run", mapping)
	if outcome != register.Problems || !strings.Contains(out, "nothing is written") || !strings.Contains(out, "990 computed") || !strings.Contains(out, "worst of the assets") {
		t.Errorf("%v\n%s", outcome, out)
	}
	if left, _ := os.ReadDir(path); len(left) != 2 {
		t.Errorf("%v", left)
	}
	// Without bad rows all is well, and the exit code says so.
	good, _, _ := drainsCSV(50)
	os.WriteFile(filepath.Join(path, "drains.csv"), []byte(good), 0o600)
	for _, verb := range []string{"check", "run"} {
		if outcome, out, stderr := command(t, verb, mapping); outcome != register.Done {
			t.Errorf("%s: %v\n%s%s", verb, outcome, out, stderr)
		}
	}
}

// A run that a signal stops says so, and leaves no file.
func TestStoppedRun(t *testing.T) {
	text, _, _ := drainsCSV(1000)
	path := folder(t, map[string]string{"m.yaml": drainsMapping, "drains.csv": text})
	ctx, stop := context.WithCancel(t.Context())
	stop()
	var stdout, stderr bytes.Buffer
	outcome := register.Run(ctx, []string{"run", "--quiet", filepath.Join(path, "m.yaml")}, &stdout, &stderr)
	if outcome != register.Failed || !strings.Contains(stderr.String(), "start it again") {
		t.Errorf("%v %s", outcome, &stderr)
	}
	if left, _ := os.ReadDir(path); len(left) != 2 {
		t.Errorf("%v", left)
	}
}

// A GeoJSON register comes back with all its properties and geometries, ours beside them under their prefix.
func TestGeoJSONBackWithVerdicts(t *testing.T) {
	path := folder(t, map[string]string{"m.yaml": `operation: appraisal
source: {format: geojson, path: d.geojson, key: id}
target: {format: geojson, path: r.geojson, copy: all, prefix: leat_}
columns:
  section_kind: kind
  section_points: survey
  section_diameter: {column: diameter, unit: mm}
  roughness_manning: 0.03
  bed_slope: {column: fall, unit: "1:x"}
flows: {design: flow}
criteria: {least_freeboard: 0.2}
`, "d.geojson": `{"type":"FeatureCollection","features":[
{"type":"Feature","id":"a","geometry":{"type":"Point","coordinates":[1.0,2.0,3.0]},"properties":{"kind":"surveyed","survey":[[0, 2],[1,0.0],[3,0],[4,2]],"fall":"1:500","flow":1.5,"run":"morning"}},
{"type":"Feature","id":"b","geometry":null,"properties":{"kind":"circular","diameter":600,"fall":200,"flow":0.4,"run":"noon"}},
{"type":"Feature","id":"c","geometry":null,"properties":{"kind":"round","diameter":600,"fall":200,"flow":0.4}}]}`})
	outcome, out, stderr := command(t, "run", filepath.Join(path, "m.yaml"))
	if outcome != register.Problems {
		t.Fatalf("%v\n%s%s", outcome, out, stderr)
	}
	content, _ := os.ReadFile(filepath.Join(path, "r.geojson"))
	var got struct {
		Features []struct {
			ID         string
			Geometry   json.RawMessage
			Properties map[string]any
		}
	}
	if err := json.Unmarshal(content, &got); err != nil || len(got.Features) != 2 {
		t.Fatalf("%v %s", err, content)
	}
	a, b := got.Features[0], got.Features[1]
	if a.ID != "a" || string(a.Geometry) != `{"type":"Point","coordinates":[1.0,2.0,3.0]}` || a.Properties["run"] != "morning" || a.Properties["leat_verdict"] != "meets" ||
		a.Properties["leat_run"] == nil || a.Properties["fall"] != "1:500" || a.Properties["diameter"] != nil || len(a.Properties["survey"].([]any)) != 4 {
		t.Errorf("%v", a)
	}
	if b.ID != "b" || b.Properties["leat_verdict"] != "falls_short" || b.Properties["diameter"] != 600. {
		t.Errorf("%v", b)
	}
	problems := records(t, filepath.Join(path, "r_problems.csv"))
	if len(problems) != 1 || problems[0]["asset"] != "c" || problems[0]["column"] != "kind" || problems[0]["line"] != "3" {
		t.Errorf("%v", problems)
	}
}

// The mapping file that the README shows does what it says on a register of its columns.
func TestReadmeMapping(t *testing.T) {
	text, err := os.ReadFile(filepath.Join("..", "..", "..", "README.md"))
	if err != nil {
		t.Fatal(err)
	}
	_, block, _ := strings.Cut(string(text), "## A register in files and databases")
	_, block, _ = strings.Cut(block, "```yaml\n")
	block, _, found := strings.Cut(block, "```")
	if !found {
		t.Fatal("no mapping file in the README")
	}
	path := folder(t, map[string]string{"drains.yaml": block, "drains.csv": `asset,shape,size,side,bank,material,up,down,length,flow
D1,CIRC,600,,,concrete,12.4,12.1,60,90
D2,DITCH,500,1:1.5,0.9,earth,10.0,9.9,50,250
D3,DITCH,500,1:1.5,0.3,earth,10.0,9.9,50,250
D4,DITCH,-999,1:1.5,0.9,earth,10.0,9.9,50,250
`})
	outcome, out, stderr := command(t, "run", filepath.Join(path, "drains.yaml"))
	if outcome != register.Problems {
		t.Fatalf("%v\n%s%s", outcome, out, stderr)
	}
	var verdicts []string
	for _, row := range records(t, filepath.Join(path, "verdicts.csv")) {
		verdicts = append(verdicts, row["asset"]+" "+row["verdict"])
	}
	if got := strings.Join(verdicts, ", "); got != "D1 meets, D2 meets, D3 falls_short" {
		t.Error(got)
	}
	problems := records(t, filepath.Join(path, "verdicts_problems.csv"))
	if len(problems) != 1 || problems[0]["asset"] != "D4" || problems[0]["column"] != "size" || problems[0]["code"] != "missing_member" {
		t.Errorf("%v", problems)
	}
}
