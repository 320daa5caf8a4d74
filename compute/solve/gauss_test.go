package solve

import (
	"math"
	"testing"
)

// The rule must integrate x^14 over [-1, 1] to 2/15, and 1 to 2 (calculus).
func TestGaussRule(t *testing.T) {
	for _, degree := range []float64{0, 2, 8, 14} {
		sum := 0.0
		for i, node := range GaussNodes {
			sum += 2 * GaussWeights[i] * math.Pow(node, degree)
		}
		if want := 2 / (degree + 1); !(math.Abs(sum-want) < 4e-16) {
			t.Errorf("degree %v: %v, want %v", degree, sum, want)
		}
	}
}
