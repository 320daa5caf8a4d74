package solve

import (
	"math"
	"testing"
)

func TestUnitRootOfPowers(t *testing.T) {
	for _, p := range []float64{-5, -2, -1, 0.5, 1, 5.0 / 3, 3, 8} {
		for _, root := range []float64{1e-30, 1e-9, 0.3, 1, 7, 1e12} {
			evaluations := 0
			f := func(x float64) (float64, float64) {
				evaluations++
				return math.Pow(x/root, p), p
			}
			x, ok := UnitRoot(f, 0, math.Inf(1), 1, p > 0)
			if !ok || !(math.Abs(x/root-1) < 1e-14) {
				t.Errorf("power %v: root %v found as %v, %v", p, root, x, ok)
			}
			if evaluations > 30 {
				t.Errorf("power %v, root %v: %d evaluations", p, root, evaluations)
			}
		}
	}
}

func TestUnitRootRefusesNaN(t *testing.T) {
	if _, ok := UnitRoot(func(float64) (float64, float64) { return math.NaN(), 1 }, 0, 1, 0.5, true); ok {
		t.Error("a function that is not a number has a root")
	}
}

// A function of wrong slopes still converges, by bisection.
func TestUnitRootWithUselessSlopes(t *testing.T) {
	for _, slope := range []float64{math.NaN(), 0, math.Inf(1)} {
		x, ok := UnitRoot(func(x float64) (float64, float64) { return x * x / 2, slope }, 0, math.Inf(1), 1e-6, true)
		if !ok || !(math.Abs(x-math.Sqrt2) < 1e-15*4) {
			t.Errorf("slope %v: %v, %v", slope, x, ok)
		}
	}
}

func TestUnitRootDoesNotAllocate(t *testing.T) {
	c := 3.0
	n := testing.AllocsPerRun(100, func() {
		x, _ := UnitRoot(func(x float64) (float64, float64) { return x * x / c, 2 }, 0, math.Inf(1), 1, true)
		sink = x
	})
	if n != 0 {
		t.Errorf("%v allocations", n)
	}
}

var sink float64
