package solve

import (
	"math"
	"testing"
)

func TestDip(t *testing.T) {
	// The least of (x-2)^2 + 1 lies at 2 (calculus); a minimum is told no better than by the root of the last place.
	if x := Dip(func(x float64) float64 { return (x-2)*(x-2) + 1 }, 0, 3, 5); !(math.Abs(x-2) < 1e-7) {
		t.Errorf("least at %v", x)
	}
	// Where it dips below zero, any place there will do.
	if x := Dip(func(x float64) float64 { return (x-2)*(x-2) - 0.01 }, 0, 3, 5); !(math.Abs(x-2) <= 0.1) {
		t.Errorf("not positive at %v", x)
	}
}
