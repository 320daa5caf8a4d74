package profile_test

import (
	"testing"
	"time"

	"leat/compute/flow"
	"leat/compute/friction"
	"leat/compute/profile"
	"leat/compute/section"
)

// BenchmarkSolveM1 is a backwater curve of a prismatic trapezoid at 100 chainages. testdata/references/profiles_pace.py times SciPy's solve_ivp with the same
// run; its constants are these. The least time of a solve is what other work on the machine disturbs least, and what that program compares.
func BenchmarkSolveM1(b *testing.B) {
	s, err := section.NewTrapezoidal(6, 1.5, 1.5)
	if err != nil {
		b.Fatal(err)
	}
	law, err := friction.NewManning(0.025)
	if err != nil {
		b.Fatal(err)
	}
	const length = 5000.0
	run := &profile.Run{Discharge: 20, Reaches: []profile.Reach{{Channel: flow.Channel{Section: s, Law: law, Slope: 0.001, Gravity: gravity}, Length: length}},
		Downstream: profile.Boundary{Kind: profile.Depth, Value: 3}}
	for k := range 100 {
		run.Report.At = append(run.Report.At, length*float64(k)/99)
	}
	var solver profile.Solver
	least := time.Hour
	b.ReportAllocs()
	for b.Loop() {
		begun := time.Now()
		answer, err := solver.Solve(run)
		least = min(least, time.Since(begun))
		if err != nil || len(answer.Stations) < 100 {
			b.Fatal(err)
		}
	}
	b.ReportMetric(float64(least.Nanoseconds()), "least-ns/op")
}
