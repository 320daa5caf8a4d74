package solve

import (
	"math"
	"testing"
)

func TestSecondKind(t *testing.T) {
	// Abramowitz and Stegun 1964, table 17.2: the complete integral E(m).
	for _, c := range []struct{ m, want float64 }{{0, 1.570796326794897}, {0.25, 1.467462209339427}, {0.5, 1.350643881047675}, {0.75, 1.211056027568460}, {0.9, 1.104774732704073}} {
		if got := SecondKind(1, 0, 1-c.m); !(math.Abs(got-c.want) <= 1e-14) {
			t.Errorf("E(%v) = %.17g, want %v", c.m, got, c.want)
		}
	}
	// E(phi | 1) = sin phi, E(phi | 0) = phi.
	for _, phi := range []float64{1e-12, 1e-6, 0.01, 0.5, 1, 1.5, 1.57} {
		s, c := math.Sincos(phi)
		if got := SecondKind(s, c, 1); !(math.Abs(got-phi) <= 8e-16*phi) {
			t.Errorf("E(%v|0) = %.17g", phi, got)
		}
		if got := SecondKind(s, c, 1e-30); !(math.Abs(got-s) <= 8e-16*s) {
			t.Errorf("E(%v|1) = %.17g", phi, got)
		}
	}
}
