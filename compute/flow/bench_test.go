package flow

import (
	"testing"

	"leat/compute/friction"
	"leat/compute/section"
)

func must[T any](t testing.TB, v T, err error) T {
	t.Helper()
	if err != nil {
		t.Fatal(err)
	}
	return v
}

// The results of benchmarks end here, so that nothing is optimised away.
var sink float64

func benchmarkChannel(b *testing.B, s section.Section, law friction.Law, slope float64) {
	c := Channel{Section: s, Law: law, Slope: slope, Gravity: 9.80665}
	discharges := make([]float64, 256)
	for i := range discharges {
		discharges[i] = 0.2 + 0.05*float64(i*37%256)
	}
	b.Run("normal", func(b *testing.B) {
		b.ReportAllocs()
		var room [8]float64
		for i := 0; b.Loop(); i++ {
			d, _ := c.Normal(discharges[i&255], room[:0])
			if len(d) > 0 {
				sink += d[0]
			}
		}
	})
	b.Run("critical", func(b *testing.B) {
		b.ReportAllocs()
		var room [8]float64
		for i := 0; b.Loop(); i++ {
			d, _ := c.Critical(discharges[i&255], room[:0])
			if len(d) > 0 {
				sink += d[0]
			}
		}
	})
	b.Run("depths", func(b *testing.B) {
		b.ReportAllocs()
		var room Room
		for i := 0; b.Loop(); i++ {
			d := c.Depths(discharges[i&255], &room)
			sink += d.CriticalSlope
		}
	})
	b.Run("alternate", func(b *testing.B) {
		b.ReportAllocs()
		for i := 0; b.Loop(); i++ {
			d, _ := c.Alternate(discharges[i&255], 0.4)
			sink += d
		}
	})
}

func BenchmarkTrapezoidal(b *testing.B) {
	s, err := section.NewTrapezoidal(2, 1.5, 1.5)
	benchmarkChannel(b, must(b, s, err), manning(b, 0.025), 0.001)
}

func BenchmarkCircular(b *testing.B) {
	s, err := section.NewCircular(3)
	benchmarkChannel(b, must(b, s, err), manning(b, 0.013), 0.001)
}

func manning(t testing.TB, n float64) friction.Law {
	law, err := friction.NewManning(n)
	return must(t, law, err)
}
