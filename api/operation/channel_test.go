package operation

import (
	"strings"
	"testing"
	"unicode"

	"leat/api/wire"
	"leat/compute"
	"leat/compute/flow"
)

// The faults of a section name the members that the request gives, each once.
func TestFaultsNameTheMembersGiven(t *testing.T) {
	given := wire.Number{Value: 1, Given: true}
	sides := compute.Faults{
		{Member: "left_side_slope", Code: "negative", Detail: "D."}, {Member: "right_side_slope", Code: "negative", Detail: "D."},
		{Member: "left_bench_width", Code: "negative", Detail: "E."}, {Member: "right_bench_width", Code: "out_of_range", Detail: "F."},
		{Member: "bottom_width", Code: "not_positive", Detail: "G."},
	}
	for _, row := range []struct {
		section wire.Section
		want    string
	}{
		{wire.Section{}, "left_side_slope negative, right_side_slope negative, left_bench_width negative, right_bench_width out_of_range, bottom_width not_positive"},
		{wire.Section{SideSlope: given}, "side_slope negative, left_bench_width negative, right_bench_width out_of_range, bottom_width not_positive"},
		{wire.Section{BenchWidth: given}, "left_side_slope negative, right_side_slope negative, bench_width negative, bench_width out_of_range, bottom_width not_positive"},
	} {
		var got []string
		for _, f := range asGiven(&row.section, sides).(compute.Faults) {
			got = append(got, f.Member+" "+f.Code)
		}
		if strings.Join(got, ", ") != row.want {
			t.Errorf("got  %s\nwant %s", strings.Join(got, ", "), row.want)
		}
	}
	if asGiven(&wire.Section{SideSlope: given}, nil) != nil {
		t.Error("a fault out of nothing")
	}
	for body, want := range map[string]string{
		`{"section":{"kind":"triangular","side_slope":0},"depth":1}`:                           "/section/side_slope no_width",
		`{"section":{"kind":"triangular","left_side_slope":0,"right_side_slope":0},"depth":1}`: "/section/left_side_slope no_width",
	} {
		_, problem := Section.Solve([]byte(body), Options{})
		if problem == nil || len(problem.Errors) != 1 || problem.Errors[0].Pointer+" "+problem.Errors[0].Code != want {
			t.Errorf("%s: %+v, want %s", body, problem, want)
		}
	}
}

// isSentence reports whether a text is one sentence or more: a capital letter or a member's name at its beginning, a full stop at its end.
func isSentence(text string) bool {
	first, _, _ := strings.Cut(text, " ")
	return text != "" && strings.HasSuffix(text, ".") && !strings.HasSuffix(text, "..") &&
		(unicode.IsUpper([]rune(first)[0]) || strings.Contains(first, "_"))
}

// What callers read is told in sentences, whichever way it comes about.
func TestDetailsAreSentences(t *testing.T) {
	for absence := flow.Present + 1; absence <= flow.Unsolved; absence++ {
		if !isSentence(absence.String()) {
			t.Errorf("absence %s: %q", absence.Code(), absence)
		}
	}
	const (
		pipe    = `"section":{"kind":"circular","diameter":1},"roughness":{"manning":0.013}`
		survey  = `"section":{"kind":"surveyed","points":[[0,1],[1,0],[2,0.5],[3,0],[4,1]]},"roughness":{"manning":0.03}`
		rough   = `"section":{"kind":"rectangular","bottom_width":2},"roughness":{"sand_roughness":0.5}`
		laminar = `"section":{"kind":"rectangular","bottom_width":1},"roughness":{"sand_roughness":0.0001}`
	)
	seen := map[string]bool{}
	for _, row := range []struct {
		operation *Operation
		body      string
		codes     string
	}{
		{&Depths, pipe + `,"bed_slope":0.002,"discharge":5`, "surcharged"},
		{&Depths, pipe + `,"bed_slope":0.002,"discharge":1.1`, "several_normal_depths"},
		{&Depths, pipe + `,"bed_slope":0.002,"discharge":0.5,"depth":1`, "no_conjugate_depths"},
		{&Depths, pipe + `,"bed_slope":0,"discharge":0.5,"depth":0.05`, "alternate_depth_absent sequent_depth_absent"},
		{&Depths, survey + `,"bed_slope":0.001,"discharge":9`, "above_survey overtopped"},
		{&Section, survey + `,"depths":[0.2,0.3,1.5,2]`, "separate_troughs above_survey"},
		{&Section, rough + `,"depths":[0.001,0.002]`, "conveyance_absent"},
		{&Section, rough + `,"depths":[0.001],"bed_slope":0.001`, "conveyance_absent"},
		{&Section, laminar + `,"depth":0.1,"discharge":0.00001`, "low_reynolds_number"},
		{&Rating, pipe + `,"bed_slope":0.002,"kind":"critical","from_depth":0.5,"to_depth":1,"count":3`, "discharge_absent"},
		{&Rating, pipe + `,"bed_slope":0.002,"kind":"uniform","discharges":[0.5,5,6]`, "depth_absent"},
		{&Section, pipe + `,"depth":2`, "above_section"},
		{&Section, `"section":{"kind":"tabulated","rows":[[1,1,3,1]],"bank_height":2},"depth":2`, "above_section"},
		{&Profile, `"discharge":1,"reaches":[{"length":100,"bed_slope":0.001,"section":{"kind":"rectangular","bottom_width":2},"roughness":{"manning":0.02}}],"upstream":{"depth":5},"downstream":{"depth":0.01}`,
			"boundary_does_not_govern boundary_below_critical"},
		{&Profile, `"discharge":1,"reaches":[{"length":100,"bed_slope":-0.001,"section":{"kind":"rectangular","bottom_width":2},"roughness":{"manning":0.02}}],"downstream":{"control":"normal"}`,
			"adverse_bed"},
	} {
		solved, problem := row.operation.Solve([]byte("{"+row.body+"}"), Options{})
		found := map[string]bool{}
		judge := func(code, detail string) {
			found[code], seen[code] = true, true
			if !isSentence(detail) {
				t.Errorf("%s: %s: %q is no sentence", row.body, code, detail)
			}
		}
		if problem != nil {
			detail := problem.Detail
			if detail[0] == '/' {
				_, detail, _ = strings.Cut(detail, ": ") // after the place
			}
			judge("problem", detail)
			for _, f := range problem.Errors {
				judge(f.Code, f.Detail)
			}
		} else {
			for _, w := range warningsOf(t, solved.Answer) {
				judge(w.Code, w.Detail)
			}
			if depths, ok := solved.Answer.(*wire.DepthsAnswer); ok {
				for _, absent := range []string{depths.NormalAbsent, depths.CriticalAbsent} {
					if absent != "" {
						judge("absent", absent)
					}
				}
			}
		}
		for code := range strings.FieldsSeq(row.codes) {
			if !found[code] {
				t.Errorf("%s: no %s, but %v", row.body, code, found)
			}
		}
	}
	if len(seen) < 15 {
		t.Errorf("only %d codes were seen", len(seen))
	}
}

func warningsOf(t *testing.T, answer wire.Answer) []wire.Warning {
	t.Helper()
	switch a := answer.(type) {
	case *wire.SectionAnswer:
		return a.Warnings
	case *wire.DepthsAnswer:
		return a.Warnings
	case *wire.RatingAnswer:
		return a.Warnings
	case *wire.ProfileAnswer:
		return a.Warnings
	}
	t.Fatalf("an answer of type %T", answer)
	return nil
}
