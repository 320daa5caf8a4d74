package profile

import (
	"errors"
	"math"
	"testing"

	"leat/compute/flow"
	"leat/compute/friction"
	"leat/compute/friction/frictiontest"
)

// FuzzProfile: whatever the numbers, a chain of two reaches is refused, or answered without a number that is none; and it ends.
func FuzzProfile(f *testing.F) {
	for kind := range uint8(14) {
		f.Add(kind, uint8(1), 2.0, 1.5, 0.5, 0.25, 0.001, 1.0, 100.0, 1.2, 0.0)
		f.Add(kind, uint8(5), 2.0, 1.5, 0.5, 0.25, 0.05, 3.0, 1e5, 0.1, 0.001)
		f.Add(kind, kind, 1.0, 0.5, 0.2, 0.1, -0.001, 0.1, 1.0, 5.0, 0.0)
	}
	f.Fuzz(func(t *testing.T, kind, other uint8, a, b, c, d, slope, q, length, depth, lateral float64) {
		upper, err := frictiontest.AnySection(kind, a, b, c, d)
		if err != nil || !(math.Abs(slope) < 1 && (slope == 0 || math.Abs(slope) >= 1e-15)) || !(q >= 1e-9 && q <= 1e9) ||
			!(length >= 1e-3 && length <= 1e6) || !(depth > 0 && depth < 1e6) || !(lateral >= 0 && lateral*length < 1e9) {
			return
		}
		lower, err := frictiontest.AnySection(other, b, a, c, d)
		if err != nil {
			return
		}
		law, err := friction.NewManning(0.03)
		if err != nil {
			t.Fatal(err)
		}
		calls := 0
		run := &Run{Discharge: q, Downstream: Boundary{Kind: Depth, Value: depth}, Reaches: []Reach{
			{Channel: flow.Channel{Section: upper, Law: law, Slope: slope, Gravity: 9.80665}, Length: length, Lateral: lateral},
			{Channel: flow.Channel{Section: lower, Law: law, Slope: slope / 10, Gravity: 9.80665}, Length: length},
		}, Checkpoint: func() error {
			if calls++; calls > 300_000 {
				return errors.New("it does not end")
			}
			return nil
		}}
		answer, err := Solve(run)
		if err != nil {
			if err.Error() == "it does not end" {
				t.Error(err)
			}
			return
		}
		for _, p := range answer.Stations {
			if !(p.State.Geometry.Depth > 0) || math.IsNaN(p.WaterLevel) || math.IsNaN(p.EnergyLevel) {
				t.Errorf("station %+v", p)
			}
		}
	})
}
