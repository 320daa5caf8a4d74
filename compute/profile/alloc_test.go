package profile

import (
	"fmt"
	"testing"
)

// A solver that has solved a run allocates nothing for the next but the answer and its lists: stations, reaches, curves and controls, and jumps where there are any.
func TestSolverAllocatesItsAnswerOnly(t *testing.T) {
	mild, steep := trapezoid(t, 2, 1.5, 0.025, 0.001), trapezoid(t, 2, 1.5, 0.025, 0.05)
	at := []float64{0, 10, 50, 120, 200}
	for _, c := range []struct {
		name string
		run  Run
		want float64
	}{
		{"M1", Run{Discharge: 5, Reaches: []Reach{reachOf(mild, 3000)}, Downstream: Boundary{Kind: Depth, Value: 2.5}, Report: Report{At: at}}, 5},
		{"M1 as straight lines need", Run{Discharge: 5, Reaches: []Reach{reachOf(mild, 3000)}, Downstream: Boundary{Kind: Depth, Value: 2.5}}, 5},
		{"S2", Run{Discharge: 5, Reaches: []Reach{reachOf(steep, 300)}, Downstream: Boundary{Kind: FreeOverfall}, Report: Report{Spacing: 10}}, 5},
		{"chain", Run{Discharge: 5, Reaches: []Reach{reachOf(mild, 3000), reachOf(mild, 200), reachOf(steep, 500)}, Downstream: Boundary{Kind: FreeOverfall}}, 5},
	} {
		var solver Solver
		got := testing.AllocsPerRun(5, func() {
			if _, err := solver.Solve(&c.run); err != nil {
				t.Fatal(err)
			}
		})
		if got != c.want {
			t.Errorf("%s: %v allocations, want %v", c.name, got, c.want)
		}
	}
}

// What a solver solved before has no part in its answers.
func TestSolverForgets(t *testing.T) {
	mild, steep := trapezoid(t, 2, 1.5, 0.025, 0.001), trapezoid(t, 2, 1.5, 0.025, 0.05)
	runs := []Run{
		{Discharge: 5, Reaches: []Reach{reachOf(mild, 3000), reachOf(steep, 200), reachOf(mild, 1000)}, Downstream: Boundary{Kind: Normal}},
		{Discharge: 5, Reaches: []Reach{reachOf(mild, 3000)}, Downstream: Boundary{Kind: Depth, Value: 2.5}},
		{Discharge: 5, Reaches: []Reach{reachOf(mild, 1000)}, Downstream: Boundary{Kind: Rating, Curve: [][2]float64{{1, 1}, {2, 2}}}}, // outside
		{Discharge: 5, Reaches: []Reach{reachOf(steep, 300)}, Downstream: Boundary{Kind: Depth, Value: 2.5}},
	}
	var kept Solver
	for round := range 3 {
		for i := range runs {
			fresh, first := Solve(&runs[i])
			again, second := kept.Solve(&runs[i])
			if told(fresh, first) != told(again, second) {
				t.Errorf("round %d, run %d: %s, want %s", round, i, told(again, second), told(fresh, first))
			}
		}
	}
}

func told(a *Answer, err error) string {
	if err != nil {
		return err.Error()
	}
	return fmt.Sprintf("%+v", *a)
}
