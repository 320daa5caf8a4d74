package demo_test

import (
	"encoding/json"
	"slices"
	"testing"

	"leat/api/operation"
	"leat/cmd/internal/demo"
)

func depths(t *testing.T) *operation.Operation {
	t.Helper()
	return operationNamed(t, "depths")
}

// The rows that are wrong on purpose get the problem that the table promises, at the place that it promises; every other row
// gets a depth, or the reason why there is none.
func TestEveryRowOfTheRegisterIsAnswered(t *testing.T) {
	depths := depths(t)
	wrong := map[int]demo.Mistake{}
	for _, m := range demo.Mistakes {
		wrong[m.Line] = m
	}
	classes := map[string]int{}
	over := 0
	for _, a := range demo.Register() {
		answer, id, problem := depths.Answer(nil, []byte(a.Text), operation.Options{})
		if m, isWrong := wrong[a.Line]; isWrong && m.Status != 200 {
			if problem == nil {
				t.Errorf("line %d (%s): answered %s, want a problem with status %d", a.Line, m.Told, answer, m.Status)
				continue
			}
			if problem.Status != m.Status {
				t.Errorf("line %d (%s): status %d, want %d: %s", a.Line, m.Told, problem.Status, m.Status, problem.Detail)
			}
			var pointers []string
			for _, f := range problem.Errors {
				pointers = append(pointers, f.Pointer)
				if f.Code == "" || f.Detail == "" {
					t.Errorf("line %d: a fault without code or detail: %+v", a.Line, f)
				}
			}
			slices.Sort(pointers)
			pointers = slices.Compact(pointers)
			want := slices.Sorted(slices.Values(m.Pointers))
			if m.Pointers != nil && !slices.Equal(pointers, want) || len(pointers) == 0 {
				t.Errorf("line %d (%s): faults at %q, want %q: %s", a.Line, m.Told, pointers, want, problem.Detail)
			}
			if m.Status == 422 && string(id) != a.ID {
				t.Errorf("line %d: id %s comes back as %s", a.Line, a.ID, id)
			}
			continue
		}
		if problem != nil {
			t.Errorf("line %d: %d %s %+v\n%s", a.Line, problem.Status, problem.Detail, problem.Errors, a.Text)
			continue
		}
		if string(id) != a.ID {
			t.Errorf("line %d: id %s comes back as %s", a.Line, a.ID, id)
		}
		var got struct {
			Normal         *float64 `json:"normal_depth"`
			Critical       *float64 `json:"critical_depth"`
			NormalAbsent   string   `json:"normal_absent"`
			CriticalAbsent string   `json:"critical_absent"`
			Class          string   `json:"slope_class"`
			Capacity       *struct {
				Ratio *float64 `json:"ratio"`
			} `json:"capacity"`
		}
		if err := json.Unmarshal(answer, &got); err != nil {
			t.Errorf("line %d: the answer is no JSON: %v", a.Line, err)
			continue
		}
		if !(got.Normal != nil && *got.Normal > 0 && got.NormalAbsent == "" || got.Normal == nil && got.NormalAbsent != "") {
			t.Errorf("line %d: neither a normal depth nor a reason, or both: %s", a.Line, answer)
		}
		if !(got.Critical != nil && *got.Critical > 0 && got.CriticalAbsent == "" || got.Critical == nil && got.CriticalAbsent != "") {
			t.Errorf("line %d: neither a critical depth nor a reason, or both: %s", a.Line, answer)
		}
		classes[got.Class]++
		if got.Capacity != nil && got.Capacity.Ratio != nil && *got.Capacity.Ratio > 1 {
			over++
		}
	}
	// The generator aims at nine in a hundred that are too small for their flow.
	if over < 30 || over > 90 {
		t.Errorf("%d assets are too small for their flow; such a register would not be believed", over)
	}
	for _, class := range []string{"mild", "steep", "horizontal", "adverse"} {
		if classes[class] == 0 {
			t.Errorf("no asset lies on a %s slope", class)
		}
	}
	t.Logf("slope classes %v, too small for their flow %d", classes, over)
}
