package operation

import "testing"

// BenchmarkSolve takes one request through an operation, from its bytes to its answer.
func BenchmarkSolve(b *testing.B) {
	sections := []struct{ name, section string }{
		{"trapezoid", `{"kind":"trapezoidal","bottom_width":2,"side_slope":1.5,"bank_height":1.6}`},
		{"circle", `{"kind":"circular","diameter":1.5}`},
		{"survey", `{"kind":"surveyed","points":[[0,3.1],[1.5,2.2],[3,1.9],[4,0.7],[4.8,0.1],[5.6,0],[6.5,0.15],[7.1,0.8],[8.4,2],[10,2.3],[11.5,3]]}`},
	}
	for _, s := range sections {
		rest := `"section":` + s.section + `,"roughness":{"manning":0.025},"bed_slope":0.002,`
		for _, o := range []struct {
			operation *Operation
			body      string
		}{
			{&Depths, "{" + rest + `"discharge":1.2}`},
			{&Appraisal, "{" + rest + `"flows":{"design":1.2,"dry_weather":0.05},"criteria":{"least_velocity":0.3,"greatest_fill":0.8}}`},
		} {
			b.Run(o.operation.Name+"/"+s.name, func(b *testing.B) {
				b.ReportAllocs()
				for b.Loop() {
					if _, problem := o.operation.Solve([]byte(o.body), Options{Brief: true}); problem != nil {
						b.Fatal(problem)
					}
				}
			})
		}
	}
}
