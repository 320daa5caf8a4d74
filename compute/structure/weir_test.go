package structure

import (
	"math"
	"testing"
)

func near(got, want, tolerance float64) bool { return math.Abs(got-want) <= tolerance*math.Abs(want) }

// Rehbock's formula at a head of 0.3 m over a crest of 0.5 m, 2 m wide (case rehbock-kc of testdata/published.json: g = 9.81).
func TestRehbock(t *testing.T) {
	if q := RehbockDischarge(0.3, 0.5, 2, 9.81); !near(q, 0.636333878214, 1e-11) {
		t.Errorf("discharge %v", q)
	}
	head, ok := RehbockHead(0.636333878214, 0.5, 2, 9.81)
	if !ok || !near(head, 0.3, 1e-11) {
		t.Errorf("head %v, %v", head, ok)
	}
	if _, ok := RehbockHead(1e-9, 0.5, 2, 9.81); ok {
		t.Error("a trickle that passes at no head has one")
	}
}

// The coefficient of broad-crested weirs, Q = 1.705*b*H^1.5 in metres (case bcw-si of testdata/published.json: g = 9.81, to four digits).
func TestBroadCrested(t *testing.T) {
	for _, h := range []float64{0.1, 0.5, 2} {
		q := 1.705 * 3 * h * math.Sqrt(h)
		if e := BroadCrestedEnergy(q, 0.4, 3, 1, 9.81); !near(e-0.4, h, 3e-4) {
			t.Errorf("head %v: energy %v above the crest", h, e-0.4)
		}
	}
}

// The ideal coefficient of a sharp crest, Q = 2.953*b*h^1.5 in metres, for a coefficient of 1 (case scw-si of testdata/published.json: g = 9.81).
func TestSharpCrested(t *testing.T) {
	for _, h := range []float64{0.05, 0.3, 1} {
		if head := SharpCrestedHead(2.953*1.5*h*math.Sqrt(h), 1.5, 1, 9.81); !near(head, h, 2e-4) {
			t.Errorf("head %v, want %v", head, h)
		}
	}
}

func TestLimitsOfRehbock(t *testing.T) {
	if !WithinRehbock(0.3, 0.5, 2) || WithinRehbock(0.01, 0.5, 2) || WithinRehbock(0.6, 0.5, 2) {
		t.Error("the limits of ISO 1438 are not kept")
	}
}
