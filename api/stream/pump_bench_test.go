package stream

import (
	"bytes"
	"io"
	"runtime"
	"testing"
)

// BenchmarkPump pumps a million trivial lines: what remains is the pump's own cost.
func BenchmarkPump(b *testing.B) {
	const n = 1_000_000
	line := append(bytes.Repeat([]byte("x"), 179), '\n')
	var before, after runtime.MemStats
	runtime.ReadMemStats(&before)
	for b.Loop() {
		p := &Pump{Reader: newLines(&repeated{line: line, n: n}), Writer: lineFeeds{}, Solver: echo{}, Output: io.Discard}
		s, err := p.Run(b.Context())
		if err != nil || s.Lines != n {
			b.Fatalf("summary %+v, error %v", s, err)
		}
	}
	runtime.ReadMemStats(&after)
	lines := float64(n) * float64(b.N)
	b.ReportMetric(lines/b.Elapsed().Seconds(), "lines/s")
	b.ReportMetric(float64(after.Mallocs-before.Mallocs)/lines, "allocs/line")
}
