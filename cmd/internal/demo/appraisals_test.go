package demo_test

import (
	"bytes"
	"encoding/json"
	"fmt"
	"maps"
	"math"
	"os"
	"slices"
	"strings"
	"testing"

	"leat/api/operation"
	"leat/api/wire"
	"leat/cmd/internal/demo"
)

const appraisalsFile = "../../../testdata/ostermere_appraisals.ndjson"

func TestCommittedAppraisalsAreTheGeneratorsOutput(t *testing.T) {
	var made bytes.Buffer
	if err := demo.WriteAppraisals(&made); err != nil {
		t.Fatal(err)
	}
	if *update {
		if err := os.WriteFile(appraisalsFile, made.Bytes(), 0o644); err != nil {
			t.Fatal(err)
		}
	}
	committed, err := os.ReadFile(appraisalsFile)
	if err != nil {
		t.Fatal(err)
	}
	if !bytes.Equal(made.Bytes(), committed) {
		t.Error("testdata/ostermere_appraisals.ndjson differs from what the generator writes; if that is meant: go test ./cmd/internal/demo -update")
	}
}

// The appraisals are of the register's assets: the same ids, sections and slopes in the same order.
func TestAppraisalsAreOfTheRegister(t *testing.T) {
	type asset struct {
		Section json.RawMessage
		Slope   json.RawMessage `json:"bed_slope"`
	}
	register, same := demo.Register(), 0
	appraisals := demo.Appraisals()
	if len(appraisals) != len(register) {
		t.Fatalf("%d appraisals of %d assets", len(appraisals), len(register))
	}
	for i, a := range appraisals {
		if a.Line != i+1 || !strings.HasPrefix(a.Text, `{"id":`+a.ID+`,`) || strings.ContainsAny(a.Text, "\r\n") {
			t.Errorf("line %d: %s", i+1, a.Text)
		}
		if a.Place == "" || register[i].Place == "" {
			continue
		}
		var here, there asset
		if json.Unmarshal([]byte(a.Text), &here) != nil || json.Unmarshal([]byte(register[i].Text), &there) != nil {
			t.Fatalf("line %d is no JSON", i+1)
		}
		if a.ID != register[i].ID || string(here.Section) != string(there.Section) || string(here.Slope) != string(there.Slope) {
			t.Errorf("line %d is another asset", i+1)
		}
		same++
	}
	if same < 550 {
		t.Errorf("only %d assets are those of the register", same)
	}
}

// An appraisedAsset is an answer as callers read it.
type appraisedAsset struct {
	Verdict   string
	Flow      string   `json:"governing_flow"`
	Criterion string   `json:"governing_criterion"`
	Value     *float64 `json:"governing_value"`
	Limit     *float64 `json:"governing_limit"`
	Flows     map[string]struct {
		Findings []struct {
			Criterion, Reason string
			Value, Limit      *float64
			Met               *bool
		}
	}
}

// judge draws the verdict and the governing finding from the findings, by the words of the contract: `falls_short` if any is not met, else `undetermined` if any
// could not be judged, else `meets`; the unmet one furthest beyond its limit governs, else the met one nearest to it.
func (a *appraisedAsset) judge(t *testing.T, line int) {
	t.Helper()
	const unmet, unknown, met = 0, 1, 2
	var count [3]int
	furthest, nearest := -1.0, math.Inf(1)
	distance := func(value, limit *float64) float64 {
		if value == nil || limit == nil || *limit == 0 && *value != 0 {
			return math.Inf(1)
		}
		if *value == *limit {
			return 0
		}
		return math.Abs(*value-*limit) / math.Abs(*limit)
	}
	for _, flow := range a.Flows {
		for _, f := range flow.Findings {
			switch {
			case f.Reason == "not_applicable":
				if f.Met != nil {
					t.Errorf("line %d: %s does not apply and is judged", line, f.Criterion)
				}
			case f.Met == nil:
				count[unknown]++
			case *f.Met:
				count[met]++
				nearest = min(nearest, distance(f.Value, f.Limit))
			default:
				count[unmet]++
				furthest = max(furthest, distance(f.Value, f.Limit))
			}
		}
	}
	want, governs := "meets", nearest
	switch {
	case count[unmet] > 0:
		want, governs = "falls_short", furthest
	case count[unknown] > 0 || count[met] == 0:
		want = "undetermined"
	}
	if a.Verdict != want {
		t.Errorf("line %d: %s, want %s: %+v", line, a.Verdict, want, a.Flows)
	}
	if count[unmet]+count[met] == 0 {
		if a.Criterion != "" || a.Flow != "" || a.Value != nil {
			t.Errorf("line %d: %s governs, and nothing was judged", line, a.Criterion)
		}
		return
	}
	if got := distance(a.Value, a.Limit); got != governs {
		t.Errorf("line %d: %s governs at a distance of %v, want %v", line, a.Criterion, got, governs)
	}
	for _, f := range a.Flows[a.Flow].Findings {
		if f.Criterion == a.Criterion && f.Met != nil && *f.Met != (count[unmet] > 0) {
			return
		}
	}
	t.Errorf("line %d: the finding of %s by %s that governs is not there", line, a.Flow, a.Criterion)
}

// The rows that are wrong on purpose get the problem that the table promises; every other row gets a verdict, for each flow a finding for each criterion that is about it, and a
// reason for whatever is not judged.
func TestEveryAppraisalIsAnswered(t *testing.T) {
	wrong := map[int]demo.Mistake{}
	for _, m := range demo.AppraisalMistakes {
		wrong[m.Line] = m
	}
	verdicts, criteria, reasons, linings := map[string]int{}, map[string]int{}, map[string]int{}, map[string]int{}
	for _, a := range demo.Appraisals() {
		answer, _, problem := operationNamed(t, "appraisal").Answer(nil, []byte(a.Text), operation.Options{})
		if m, isWrong := wrong[a.Line]; isWrong && m.Status != 200 {
			var pointers []string
			status := 200
			if problem != nil {
				status = problem.Status
				for _, f := range problem.Errors {
					pointers = append(pointers, f.Pointer)
				}
			}
			slices.Sort(pointers)
			if status != m.Status || !slices.Equal(pointers, m.Pointers) {
				t.Errorf("line %d (%s): %d at %q, want %d at %q", a.Line, m.Told, status, pointers, m.Status, m.Pointers)
			}
			continue
		}
		if problem != nil {
			t.Errorf("line %d: %s\n%s", a.Line, problem.Detail, a.Text)
			continue
		}
		var got appraisedAsset
		var asked struct {
			Flows    map[string]float64
			Criteria map[string]any
			About    map[string][]string `json:"criterion_flows"`
			Lining   struct{ Kind string }
		}
		if json.Unmarshal(answer, &got) != nil || json.Unmarshal([]byte(a.Text), &asked) != nil {
			t.Fatalf("line %d: %s", a.Line, answer)
		}
		verdicts[got.Verdict]++
		got.judge(t, a.Line)
		linings[asked.Lining.Kind]++
		for flow := range asked.Flows {
			var want, judged []string
			for c := range asked.Criteria {
				if about, some := asked.About[c]; !some || slices.Contains(about, flow) {
					want = append(want, c)
				}
			}
			for _, f := range got.Flows[flow].Findings {
				judged = append(judged, f.Criterion)
				criteria[f.Criterion]++
				reasons[f.Reason]++
				if f.Met == nil && f.Reason == "" {
					t.Errorf("line %d: %s is neither judged nor is there a reason", a.Line, f.Criterion)
				}
			}
			slices.Sort(want)
			slices.Sort(judged)
			if !slices.Equal(want, judged) {
				t.Errorf("line %d, %s: judged %v, want %v", a.Line, flow, judged, want)
			}
		}
	}
	if told := fmt.Sprintf("%d meet their criteria, %d fall short, %d cannot be told", verdicts["meets"], verdicts["falls_short"], verdicts["undetermined"]); !bytes.Contains(readme(t), []byte(told)) {
		t.Errorf("the README does not say that %s", told)
	}
	t.Logf("verdicts %v\ncriteria %v\nreasons %v\nlinings %v", verdicts, criteria, reasons, linings)
	for verdict, least := range map[string]int{"meets": 200, "falls_short": 60, "undetermined": 10} {
		if verdicts[verdict] < least {
			t.Errorf("%d assets are %s; such a district would not be believed", verdicts[verdict], verdict)
		}
	}
	for _, c := range wire.AllCriteria() {
		if criteria[string(c)] == 0 {
			t.Errorf("nothing is judged by %s", c)
		}
	}
	for _, kind := range []wire.LiningKind{wire.ShearLimited, wire.BareSoil, wire.Vegetation, wire.Riprap, wire.Gravel, wire.Earth} {
		if linings[string(kind)] == 0 {
			t.Errorf("nothing is lined with %s: %v", kind, slices.Sorted(maps.Keys(linings)))
		}
	}
	for _, reason := range []string{"not_applicable", "surcharged", "overtopped", "missing_lining", "missing_water_carries", "missing_bank_height", "horizontal_bed", "adverse_bed"} {
		if reasons[reason] == 0 {
			t.Errorf("nothing is found %s: %v", reason, reasons)
		}
	}
}
