package serve_test

import (
	"bytes"
	"encoding/json"
	"maps"
	"os"
	"path/filepath"
	"regexp"
	"strconv"
	"strings"
	"testing"

	"leat/api/serve"
	"leat/openapi"
)

// TestContractAppraisals sends the appraisals of Ostermere through bulk, in every form that the query parameters allow; every line is judged on its way.
func TestContractAppraisals(t *testing.T) {
	appraisals, err := os.ReadFile(filepath.Join("..", "..", "testdata", "ostermere_appraisals.ndjson"))
	if err != nil {
		t.Fatal(err)
	}
	s := startService(t)
	for _, query := range []string{"?detail=full&units=si", "?detail=brief&fingerprint=true", "?units=us"} {
		status, answer := s.post("/v1/bulk/appraisal"+query, ndjsonMedia, appraisals)
		if status != 200 {
			t.Fatalf("%s: %d %s", query, status, answer)
		}
		results, lines := bytes.Count(answer, []byte(`,"result":`)), bytes.Count(appraisals, []byte("\n"))
		if results < lines*95/100 || bytes.Contains(answer, []byte(`"status":5`)) {
			t.Errorf("%s: %d results of %d lines", query, results, lines)
		}
		reasons := regexp.MustCompile(`"reason":"([a-z_]+)"`).FindAllSubmatch(answer, -1)
		if len(reasons) < 100 {
			t.Errorf("%s: %d findings with a reason", query, len(reasons))
		}
		for _, reason := range reasons {
			code := string(reason[1])
			if member, missing := strings.CutPrefix(code, "missing_"); missing && strings.Contains(string(openapi.YAML), "\n        "+member+":\n") {
				continue
			}
			if !strings.Contains(string(openapi.YAML), "`"+code+"`") {
				t.Errorf("the contract does not name the reason %s", code)
			}
		}
	}
}

// TestContractRegister sends the register of Ostermere through bulk, in every form that the query parameters allow, and asks the other operations
// about its assets: at depths from a film to the crown or above the bank, and for ratings of both kinds with depths and discharges
// that some cannot have. Every line of every answer is judged on its way; what is looked at here is that they were answers.
func TestContractRegister(t *testing.T) {
	register, err := os.ReadFile(filepath.Join("..", "..", "testdata", "ostermere.ndjson"))
	if err != nil {
		t.Fatal(err)
	}
	s := startService(t)
	var assets []map[string]any // those with an answer
	for _, query := range []string{"?detail=full&units=si", "?detail=brief", "?units=us"} {
		status, answer := s.post("/v1/bulk/depths"+query, ndjsonMedia, register)
		if status != 200 {
			t.Fatalf("%s: %d %s", query, status, answer)
		}
		if query != "?detail=brief" {
			continue
		}
		rows := bytes.Split(bytes.TrimSpace(register), []byte("\n"))
		for i, line := range bytes.Split(bytes.TrimSpace(answer), []byte("\n")) {
			if i == len(rows) {
				break
			}
			var a struct{ Result json.RawMessage }
			if err := json.Unmarshal(line, &a); err != nil {
				t.Fatal(err)
			}
			if a.Result != nil {
				assets = append(assets, parse(t, rows[i]).(map[string]any))
			}
		}
	}
	if len(assets) < 500 {
		t.Fatalf("only %d of the register's assets have an answer", len(assets))
	}

	sections, ratings := new(bytes.Buffer), new(bytes.Buffer)
	add := func(to *bytes.Buffer, asset map[string]any, without []string, with map[string]any) {
		request := maps.Clone(asset)
		for _, k := range without {
			delete(request, k)
		}
		maps.Copy(request, with)
		text, err := json.Marshal(request)
		if err != nil {
			t.Fatal(err)
		}
		to.Write(text)
		to.WriteByte('\n')
	}
	for _, asset := range assets {
		section := asset["section"].(map[string]any)
		height := 1.0
		for _, k := range []string{"height", "diameter", "bank_height"} {
			if h, ok := section[k].(float64); ok {
				height = h
				break
			}
		}
		discharge := asset["discharge"].(float64)
		depths := map[string]any{"depths": []float64{1e-6 * height, 0.3 * height, 0.95 * height, height}}
		add(sections, asset, nil, depths)
		add(sections, asset, []string{"discharge"}, depths)
		add(sections, asset, []string{"roughness", "bed_slope"}, depths)
		add(sections, asset, []string{"roughness", "bed_slope", "discharge"}, depths)
		for _, kind := range []string{"uniform", "critical"} {
			add(ratings, asset, []string{"discharge"}, map[string]any{"kind": kind, "from_depth": 0.01 * height, "to_depth": height, "count": 5})
			add(ratings, asset, []string{"discharge"}, map[string]any{"kind": kind, "discharges": []float64{discharge / 100, discharge, 100 * discharge}})
		}
	}
	for op, body := range map[string]*bytes.Buffer{"section": sections, "rating": ratings} {
		for _, units := range []string{"si", "us"} {
			status, answer := s.post("/v1/bulk/"+op+"?units="+units, ndjsonMedia, body.Bytes())
			if status != 200 {
				t.Fatalf("%s: %d %s", op, status, answer)
			}
			results, refused := bytes.Count(answer, []byte(`,"result":`)), bytes.Count(answer, []byte(`,"problem":`))
			t.Logf("%s in %s: %d results, %d problems", op, units, results, refused)
			if results < 3*refused {
				t.Errorf("%s in %s: %d results, %d problems: the requests are not what they are meant to be", op, units, results, refused)
			}
			for line := range bytes.SplitSeq(answer, []byte("\n")) {
				if bytes.Contains(line, []byte(`"status":5`)) {
					t.Errorf("%s in %s: %s", op, units, strconv.Quote(string(line)))
				}
			}
		}
	}
}

// TestContractFlowsLimit: the number of an appraisal's flows is bounded before they are solved, and the answer names the limit.
func TestContractFlowsLimit(t *testing.T) {
	s := startService(t)
	ask := func(n int) (int, []byte) {
		flows := map[string]float64{}
		for i := range n {
			flows[strconv.Itoa(i)] = 1
		}
		text, err := json.Marshal(map[string]any{
			"section": map[string]any{"kind": "rectangular", "bottom_width": 2}, "roughness": map[string]any{"manning": 0.02}, "bed_slope": 0.001,
			"flows": flows, "criteria": map[string]any{"greatest_velocity": 2},
		})
		if err != nil {
			t.Fatal(err)
		}
		return s.post("/v1/appraisal?detail=brief", jsonMedia, text)
	}
	limit := serve.Default().Flows
	if status, answer := ask(limit); status != 200 {
		t.Errorf("%d flows: %d %s", limit, status, answer)
	}
	if status, answer := ask(limit + 1); status != 413 || !bytes.Contains(answer, []byte("the limit `flows` of this service")) {
		t.Errorf("%d flows: %d %s", limit+1, status, answer)
	}
}
