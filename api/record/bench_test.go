package record

import (
	"os"
	"path/filepath"
	"testing"

	"leat/api/operation"
)

// BenchmarkRecord is the cost of a record beside the solve, its picture included.
func BenchmarkRecord(b *testing.B) {
	for _, name := range []string{"depths.pipe", "profile.drain", "appraisal.ditch"} {
		b.Run(name, func(b *testing.B) {
			op := operationOf(b, name)
			body, err := os.ReadFile(filepath.Join("..", "..", "openapi", "examples", name+".request.json"))
			if err != nil {
				b.Fatal(err)
			}
			solved, problem := op.Solve(body, operation.Options{Fingerprint: true})
			if problem != nil {
				b.Fatal(problem)
			}
			form := Renderings(op)[0]
			var page []byte
			b.ReportAllocs()
			for b.Loop() {
				if page, problem = form.Append(page[:0], &solved); problem != nil {
					b.Fatal(problem)
				}
			}
			b.ReportMetric(float64(len(page)), "B/page")
		})
	}
}
