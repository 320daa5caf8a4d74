package flow

import (
	"math"
	"testing"

	"leat/compute/friction"
	"leat/compute/friction/frictiontest"
)

// FuzzDepths: whatever the numbers, a section is refused, or every depth is found or absent for a reason, and nothing is NaN that can be given.
func FuzzDepths(f *testing.F) {
	for kind := range uint8(14) {
		f.Add(kind, uint8(kind), 2.0, 1.5, 0.5, 0.25, 0.001, 1.0, 0.4)
		f.Add(kind, uint8(kind+1), 1e-9, 1e9, 1e-9, 1e6, 0.9, 1e-15, 1e-18)
		f.Add(kind, uint8(kind+2), 1e9, 1e-9, 0.0, 0.0, -0.5, 1e12, 1e9)
	}
	f.Fuzz(func(t *testing.T, kind, law uint8, a, b, c, d, slope, q, depth float64) {
		s, err := frictiontest.AnySection(kind, a, b, c, d)
		if err != nil || !(math.Abs(slope) < 1 && (slope == 0 || math.Abs(slope) >= 1e-15)) || !(q >= 1e-15 && q <= 1e12) {
			return
		}
		channel := Channel{Section: s, Slope: slope, Gravity: 9.80665}
		switch law % 4 {
		case 0:
			channel.Law, err = friction.NewManning(0.03)
		case 1:
			channel.Law, err = friction.NewChezy(50)
		case 2:
			channel.Law, err = friction.NewSandRoughness(1e-3, 1.14e-6, 9.80665)
		case 3:
			channel.Law, err = friction.NewManningByDepth([][2]float64{{0.1, 0.05}, {1, 0.03}})
		}
		if err != nil {
			t.Fatal(err)
		}
		var room Room
		found := channel.Depths(q, &room)
		if found.NormalAbsent == Unsolved || found.CriticalAbsent == Unsolved {
			t.Errorf("unsolved: %v, %v", found.NormalAbsent, found.CriticalAbsent)
		}
		for _, list := range [][]float64{found.Normal, found.Critical} {
			last := 0.0
			for _, y := range list {
				if !(y > last) || math.IsInf(y, 1) {
					t.Errorf("depths %v", list)
				}
				last = y
			}
		}
		if depth > 0 && depth <= s.Height() {
			state := channel.State(depth, q)
			if math.IsNaN(state.SpecificEnergy) {
				t.Errorf("energy of %v is NaN", depth)
			}
		}
	})
}
