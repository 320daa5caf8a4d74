package picture

import (
	"bytes"
	"fmt"
	"testing"

	"leat/api/operation"
	"leat/api/wire"
)

// BenchmarkProfileSVG draws long sections that are solved before: one of 500 surveyed stations, and one whose request wants 500 places reported, so that
// its picture takes a solve of its own.
func BenchmarkProfileSVG(b *testing.B) {
	var surveyed bytes.Buffer
	surveyed.WriteString(`{"discharge":7.57,"downstream":{"level":2.4},"stations":[`)
	for i := range 500 {
		if i > 0 {
			surveyed.WriteByte(',')
		}
		fmt.Fprintf(&surveyed, `{"chainage":%d,"bed_level":%g,"section":{"kind":"trapezoidal","bottom_width":%g,"side_slope":2,"bank_height":3},"roughness":{"manning":0.03}}`,
			24*i, 3.6-0.0072*float64(i), 6+0.01*float64(i%7))
	}
	surveyed.WriteString("]}")
	for name, body := range map[string][]byte{
		"500 stations": surveyed.Bytes(),
		"500 reported": []byte(`{"discharge":7.57,"reaches":[{"length":12000,"bed_slope":0.0003,"section":{"kind":"trapezoidal","bottom_width":6,"side_slope":2},"roughness":{"manning":0.03}}],"downstream":{"level":2.4},"report":{"spacing":24}}`),
	} {
		b.Run(name, func(b *testing.B) {
			solved, problem := operation.Profile.Solve(body, operation.Options{})
			if problem != nil {
				b.Fatal(problem)
			}
			if n := len(solved.Answer.(*wire.ProfileAnswer).Stations); n < 500 {
				b.Fatalf("only %d stations", n)
			}
			var out []byte
			b.ReportAllocs()
			for b.Loop() {
				if out, problem = AppendSVG(out[:0], &solved); problem != nil {
					b.Fatal(problem)
				}
			}
			b.ReportMetric(float64(len(out)), "bytes")
		})
	}
}
