package solve

import (
	"math"
	"testing"
)

// TestTurn finds where x^2 comes to 2, from either side: between neighbours of math.Sqrt2, whose digits are those of OEIS A002193.
func TestTurn(t *testing.T) {
	for _, ends := range [][2]float64{{0, 2}, {2, 0}, {1.4, 1.5}} {
		below := ends[0] < ends[1]
		last, first := Turn(func(x float64) bool { return (x*x < 2) == below }, ends[0], ends[1])
		if !(math.Abs(last-math.Sqrt2) <= 1e-15) || !(math.Abs(first-math.Sqrt2) <= 1e-15) || (last*last < 2) != below || (first*first < 2) == below {
			t.Errorf("from %v to %v: %v and %v", ends[0], ends[1], last, first)
		}
	}
	if n := testing.AllocsPerRun(10, func() { Turn(func(x float64) bool { return x < 0.3 }, 0, 1) }); n != 0 {
		t.Errorf("%v allocations", n)
	}
}
