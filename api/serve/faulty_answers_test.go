package serve

import (
	"bytes"
	"fmt"
	"math"
	"strings"
	"testing"

	"leat/api/operation"
	"leat/api/wire"
)

// faultySections answers as `section` does, on the path of all operations; but a depth of 0.1 m comes out as NaN, one of 0.2 m with an infinite area, and the answer of
// one of 0.3 m cannot be written.
func faultySections() *operation.Operation {
	return &operation.Operation{Name: "section", Form: operation.Section.Form, Request: operation.Section.Request, Solve: func(body []byte, options operation.Options) (operation.Solved, *wire.Problem) {
		var request wire.SectionRequest
		var answer wire.Answer
		return operation.Run("section", body, options, &request, &request.Common, func() (wire.Answer, *wire.Problem) {
			depth := request.Depth.Value
			states := &wire.SectionAnswer{States: []wire.State{{Depth: depth, Area: depth, WettedPerimeter: 1 + 2*depth, HydraulicRadius: depth / (1 + 2*depth), TopWidth: 1, HydraulicDepth: depth, CentroidDepth: depth / 2}}}
			answer = states
			switch depth {
			case 0.1:
				states.States[0].Depth = math.NaN()
			case 0.2:
				states.States[0].Area = math.Inf(1)
			case 0.3:
				answer = unwritable{states}
			}
			return answer, nil
		})
	}}
}

// unwritable panics after it has written a part.
type unwritable struct{ *wire.SectionAnswer }

func (unwritable) AppendJSON(dst []byte, _ wire.System, _ wire.ID) []byte {
	_ = append(dst, `{"units":"si","states":[`...)
	panic("the encoder fails, as asked")
}

// TestFaultyAnswers: a number that is none, and an answer that cannot be written, are a 500 or a line's problem; they are counted, and what comes after is answered.
func TestFaultyAnswers(t *testing.T) {
	r := startOperations(t, []*operation.Operation{faultySections()}, nil)
	request := func(depth float64) string {
		return fmt.Sprintf(`{"section":{"kind":"rectangular","bottom_width":1},"depth":%v}`, depth)
	}
	for _, row := range []struct {
		depth  float64
		status int
		kind   string
	}{{0.5, 200, ""}, {0.1, 500, "non_finite_result"}, {0.2, 500, "non_finite_result"}, {0.3, 500, "internal_error"}, {0.5, 200, ""}} {
		got := r.send("POST", "/v1/section", request(row.depth), "Content-Type", jsonHeader)
		if got.status != row.status || !bytes.Contains(got.body, []byte(row.kind)) || row.kind == "" && !bytes.Contains(got.body, []byte(`"depth":0.5,"area":0.5`)) {
			t.Errorf("a depth of %v: %d %s", row.depth, got.status, got.body)
		}
		if row.kind != "" && got.header.Get("Content-Type") != "application/problem+json" {
			t.Errorf("a depth of %v: %v", row.depth, got.header)
		}
	}
	var lines strings.Builder
	for _, depth := range []float64{0.5, 0.1, 0.2, 0.3, 0.5} {
		lines.WriteString(request(depth) + "\n")
	}
	got := r.send("POST", "/v1/bulk/section", lines.String(), "Content-Type", "application/x-ndjson")
	answers := strings.Split(string(got.body), "\n")
	if got.status != 200 || len(answers) != 7 || !strings.Contains(answers[5], `{"end":true,"lines":5,"problems":3,`) {
		t.Fatalf("bulk: %d %s", got.status, got.body)
	}
	for i, want := range []string{`"area":0.5`, "non_finite_result", "non_finite_result", "internal_error", `"area":0.5`} {
		if !strings.HasPrefix(answers[i], fmt.Sprintf(`{"line":%d,`, i+1)) || !strings.Contains(answers[i], want) {
			t.Errorf("line %d: %s, want %s", i+1, answers[i], want)
		}
	}
	text := string(r.send("GET", "/metrics", "").body)
	for _, series := range []string{
		`leat_refusals_total{problem="non_finite_result"} 2`,
		`leat_solves_total{kind="rectangular",operation="section",outcome="result"} 6`, // what cannot be written is solved
		`leat_solves_total{kind="rectangular",operation="section",outcome="problem"} 4`,
		`leat_refusals_total{problem="internal_error"} 1`,
		`leat_bulk_lines_total{operation="section",outcome="result"} 2`,
		`leat_bulk_lines_total{operation="section",outcome="problem"} 3`,
		`leat_requests_total{method="POST",route="/v1/section",status="500"} 3`,
	} {
		if !strings.Contains(text, series+"\n") {
			t.Errorf("no %s in\n%s", series, text)
		}
	}
	panics := 0
	for _, line := range r.log.lines(t) {
		if line["message"] == "panic" {
			panics++
		}
	}
	if panics != 2 {
		t.Errorf("%d panics logged, want those of the encoder, 2", panics)
	}
}
