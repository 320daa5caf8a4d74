package operation

import (
	"math"
	"strings"
	"testing"

	"leat/api/wire"
)

// TestNoNumberIsNoAnswer injects NaN and infinity into numbers of right answers, on the path that all operations take.
func TestNoNumberIsNoAnswer(t *testing.T) {
	const section = `"section":{"kind":"circular","diameter":0.6},"roughness":{"manning":0.013}`
	for _, row := range []struct {
		op   *Operation
		body string
		bad  []func(wire.Answer) *float64
	}{
		{&Section, `{` + section + `,"bed_slope":0.004,"discharge":0.2,"depth":0.3}`, []func(wire.Answer) *float64{
			func(a wire.Answer) *float64 { return &a.(*wire.SectionAnswer).States[0].Area },
			func(a wire.Answer) *float64 { return &a.(*wire.SectionAnswer).States[0].SpecificForce },
		}},
		{&Rating, `{` + section + `,"bed_slope":0.004,"kind":"uniform","from_depth":0.1,"to_depth":0.5,"count":3}`, []func(wire.Answer) *float64{
			func(a wire.Answer) *float64 { return &a.(*wire.RatingAnswer).States[2].Velocity },
		}},
		{&Depths, `{` + section + `,"bed_slope":0.004,"discharge":0.2,"depth":0.3}`, []func(wire.Answer) *float64{
			func(a wire.Answer) *float64 { return &a.(*wire.DepthsAnswer).NormalDepth },
			func(a wire.Answer) *float64 { return &a.(*wire.DepthsAnswer).CriticalDepth },
			func(a wire.Answer) *float64 { return &a.(*wire.DepthsAnswer).Capacity.Depth },
			func(a wire.Answer) *float64 { return &a.(*wire.DepthsAnswer).Normal[0].TopWidth },
			func(a wire.Answer) *float64 { return &a.(*wire.DepthsAnswer).Critical[0].CentroidDepth },
			func(a wire.Answer) *float64 { return &a.(*wire.DepthsAnswer).Given.State.Area },
		}},
		{&Appraisal, `{` + section + `,"bed_slope":0.004,"flows":{"a":0.2},"criteria":{"greatest_fill":0.8}}`, []func(wire.Answer) *float64{
			func(a wire.Answer) *float64 { return &a.(*wire.AppraisalAnswer).Flows[0].Depths.NormalVelocity },
		}},
		{&Profile, `{"discharge":0.2,"reaches":[{"length":50,"bed_slope":0.004,` + section + `}],"downstream":{"control":"free_overfall"}}`, []func(wire.Answer) *float64{
			func(a wire.Answer) *float64 { return &a.(*wire.ProfileAnswer).Stations[1].WaterLevel },
			func(a wire.Answer) *float64 { return &a.(*wire.ProfileAnswer).Stations[1].State.VelocityHead },
		}},
	} {
		for i, bad := range row.bad {
			for _, value := range []float64{math.NaN(), math.Inf(1), math.Inf(-1)} {
				solved, problem := row.op.Solve([]byte(row.body), Options{})
				if problem != nil {
					t.Fatalf("%s: %v", row.op.Name, problem)
				}
				*bad(solved.Answer) = value
				var request wire.SectionRequest // any that decodes
				_, problem = Run(row.op.Name, []byte(`{`+section+`,"depth":0.3}`), Options{}, &request, &request.Common, func() (wire.Answer, *wire.Problem) { return solved.Answer, nil })
				if problem == nil || problem.Status != 500 || !strings.HasSuffix(problem.Type, "non_finite_result") {
					t.Errorf("%s: number %d as %v gives %v", row.op.Name, i, value, problem)
				}
			}
		}
	}
}
