package demo_test

import (
	"bytes"
	"encoding/json"
	"fmt"
	"math"
	"os"
	"regexp"
	"strings"
	"testing"

	"leat/api/operation"
	"leat/api/wire"
	"leat/cmd/internal/demo"
)

func readme(t *testing.T) []byte {
	t.Helper()
	text, err := os.ReadFile("../../../README.md")
	if err != nil {
		t.Fatal(err)
	}
	return text
}

// The requests that the README shows get the answers that it shows, but for line breaks, a problem's instance, and the last digits of a profile.
func TestReadmeShowsRealAnswers(t *testing.T) {
	shown := regexp.MustCompile("(?s)```sh\n(curl [^`]*?/v1/(depths|profile|appraisal)[^`]*?)-d '(.*?)'\n```\n\n```json\n(.*?)```").FindAllSubmatch(readme(t), -1)
	if len(shown) != 4 {
		t.Fatalf("%d requests with answers in the README, want 4", len(shown))
	}
	instance := regexp.MustCompile(`"instance":"[^"]*",`)
	for _, s := range shown {
		options := operation.Options{Brief: strings.Contains(string(s[1]), "detail=brief"), Inside: true, Fingerprint: true}
		got, _, problem := operationNamed(t, string(s[2])).Answer(nil, s[3], options)
		if problem != nil {
			got = problem.AppendJSON(nil)
		}
		var want bytes.Buffer
		if err := json.Compact(&want, s[4]); err != nil {
			t.Fatalf("the README shows an answer that is no JSON: %v", err)
		}
		if string(s[2]) == "profile" {
			var a, b any
			if err := json.Unmarshal(got, &a); err != nil {
				t.Fatal(err)
			}
			if err := json.Unmarshal(want.Bytes(), &b); err != nil {
				t.Fatal(err)
			}
			if !alike(a, b) {
				t.Errorf("the README shows\n%s\nwhere the answer is\n%s", &want, got)
			}
			continue
		}
		if want := instance.ReplaceAll(want.Bytes(), nil); !bytes.Equal(got, want) {
			t.Errorf("the README shows\n%s\nwhere the answer is\n%s", want, got)
		}
	}
}

// alike reports whether two JSON values are the same but for the last digits of numbers.
func alike(a, b any) bool {
	switch a := a.(type) {
	case float64:
		b, ok := b.(float64)
		return ok && math.Abs(a-b) <= 1e-12*(1+math.Abs(a))
	case []any:
		b, ok := b.([]any)
		if !ok || len(a) != len(b) {
			return false
		}
		for i := range a {
			if !alike(a[i], b[i]) {
				return false
			}
		}
		return true
	case map[string]any:
		b, ok := b.(map[string]any)
		if !ok || len(a) != len(b) {
			return false
		}
		for k := range a {
			if v, has := b[k]; !has || !alike(a[k], v) {
				return false
			}
		}
		return true
	}
	return a == b
}

// The README's program for a run has at most 20 lines, and its table is that of the answer.
func TestReadmeShowsARealTable(t *testing.T) {
	shown := regexp.MustCompile("(?s)```python\n([^`]*?/v1/profile[^`]*?)```\n\n```text\n(.*?)```").FindSubmatch(readme(t))
	if shown == nil {
		t.Fatal("no program for a run with its output in the README")
	}
	if n := bytes.Count(shown[1], []byte{'\n'}); n > 20 {
		t.Errorf("the program has %d lines, want at most 20", n)
	}
	report := regexp.MustCompile(`run\["report"\] = (.*)`).FindSubmatch(shown[1])
	which := regexp.MustCompile(`readlines\(\)\[(\d+)\]`).FindSubmatch(shown[1])
	if report == nil || which == nil {
		t.Fatalf("the program does not say which run and where to report:\n%s", shown[1])
	}
	var line int
	if _, err := fmt.Sscan(string(which[1]), &line); err != nil {
		t.Fatal(err)
	}
	text := strings.TrimSuffix(demo.Runs()[line].Text, "}") + `,"report":` + string(report[1]) + "}"
	answer, _, problem := operationNamed(t, "profile").Answer(nil, []byte(text), operation.Options{})
	if problem != nil {
		t.Fatal(problem.Detail)
	}
	var a profileAnswer
	if err := json.Unmarshal(answer, &a); err != nil {
		t.Fatal(err)
	}
	var want strings.Builder
	want.WriteString("chainage  water level  curve    reach\n")
	for _, s := range a.Stations {
		name := s.Regime
		if s.Curve != nil {
			name = *s.Curve
		}
		fmt.Fprintf(&want, "%8.1f  %11.3f  %-7s  %s\n", s.Chainage, s.WaterLevel, name, strings.Trim(string(s.Reach), `"`))
	}
	for _, j := range a.Jumps {
		fmt.Fprintf(&want, "%s jump at %.1f in %s: from %.3f to %.3f deep, %.3f of energy lost\n", j.Form, j.Chainage, strings.Trim(string(j.Reach), `"`), j.UpstreamDepth, j.DownstreamDepth, j.EnergyLoss)
	}
	for _, w := range a.Warnings {
		fmt.Fprintf(&want, "warning: %s\n", w.Detail)
	}
	if got := string(shown[2]); got != want.String() {
		t.Errorf("the README shows\n%s\nwhere the answer is\n%s", got, want.String())
	}
}

// The rating that the README asks for is answered, and as a table.
func TestReadmeShowsARating(t *testing.T) {
	shown := regexp.MustCompile("(?s)```sh\ncurl [^`]*?/v1/rating[^`]*?text/csv[^`]*?-d '(.*?)'\n```").FindSubmatch(readme(t))
	if shown == nil {
		t.Fatal("no request for a rating in the README")
	}
	solved, problem := operationNamed(t, "rating").Solve(shown[1], operation.Options{})
	if problem != nil {
		t.Fatal(problem.Detail)
	}
	if _, isTable := solved.Answer.(wire.Tabular); !isTable {
		t.Errorf("%T is no table", solved.Answer)
	}
}
