package format

import (
	"bytes"
	"encoding/json"
	"fmt"
	"strings"
	"testing"

	"leat/api/operation"
	"leat/api/stream"
)

// requests that any operation answers or refuses, one of each kind of outcome.
var requests = []string{
	`{"id":"ditch","section":{"kind":"trapezoidal","bottom_width":1.2,"side_slope":1.5},"roughness":{"manning":0.03},"bed_slope":0.002,"discharge":1.7}`,
	`{"id":17.50,"section":{"kind":"circular","diameter":0.9},"roughness":{"manning":0.013},"bed_slope":0.01,"discharge":0.8,"depth":0.4}`,
	`{"section":{"kind":"rectangular","bottom_width":3},"roughness":{"sand_roughness":0.003},"bed_slope":-0.001,"discharge":2}`,
	`{"units":"us","section":{"kind":"triangular","side_slope":2},"roughness":{"manning":0.02},"bed_slope":0.004,"discharge":9,"from_depth":0.5,"to_depth":2,"count":4,"kind":"uniform"}`,
	`{"section":{"kind":"rectangular","bottom_width":3},"roughness":{"manning":0.03},"bed_slope":0.001,"from_depth":0.5,"to_depth":2,"count":4,"kind":"uniform"}`,
	`{"section":{"kind":"rectangular","bottom_width":3},"depths":[0.5,1]}`,
	`{"id":"run","discharge":3,"reaches":[{"length":100,"bed_slope":0.002,"section":{"kind":"rectangular","bottom_width":3},"roughness":{"manning":0.02}}],"downstream":{"depth":1}}`,
	`{"id":"judged","section":{"kind":"trapezoidal","bottom_width":1,"side_slope":2,"bank_height":1},"bed_slope":0.02,"flows":{"b":0.4,"a":0.2},"criteria":{"least_freeboard":0.2,"least_lining_safety":1},"lining":{"kind":"riprap","stone_size":0.15,"angle_of_repose":40}}`,
	`{"id":"wrong","section":{"kind":"trapezoidal","bottom_width":-1,"side_slope":1.5},"bed_slope":2}`,
	`{"id":"no json"`,
	`[]`,
}

// Every operation gives in bulk what it gives alone, bit for bit.
func TestEveryOperationGivesInBulkWhatItGivesAlone(t *testing.T) {
	operations := operation.All()
	if len(operations) == 0 {
		t.Fatal("there are no operations")
	}
	const repeats = 40
	body := strings.Repeat(strings.Join(requests, "\n")+"\n", repeats)
	for _, op := range operations {
		out, s := pump(t, newNDJSON(t, op, operation.Options{}, 1<<20), strings.NewReader(body))
		lines := strings.Split(out, "\n")
		answered := 0
		for i, line := range lines[:repeats*len(requests)] {
			answer, id, problem := op.Answer(nil, []byte(requests[i%len(requests)]), operation.Options{})
			var want bytes.Buffer
			want.WriteByte('{')
			if id != nil {
				fmt.Fprintf(&want, `"id":%s,`, id)
			}
			fmt.Fprintf(&want, `"line":%d,`, i+1)
			if problem != nil {
				fmt.Fprintf(&want, `"problem":%s}`, problem.AppendJSON(nil))
			} else {
				fmt.Fprintf(&want, `"result":%s}`, answer)
				answered++
			}
			if line != want.String() || !json.Valid([]byte(line)) {
				t.Fatalf("%s line %d\ngot  %s\nwant %s", op.Name, i+1, line, want.String())
			}
		}
		if s.Lines != int64(repeats*len(requests)) || s.Lines-s.Problems != int64(answered) || answered == 0 || s.Problems == 0 {
			t.Errorf("%s: summary %+v, %d answered", op.Name, s, answered)
		}
	}
}

// BenchmarkDepths is the whole of bulk but the network: lines of depths, read, solved, framed and hashed.
func BenchmarkDepths(b *testing.B) {
	var depths *operation.Operation
	for _, op := range operation.All() {
		if op.Name == "depths" {
			depths = op
		}
	}
	const n = 100_000
	body := strings.Repeat(requests[0]+"\n", n)
	f := newNDJSON(b, depths, operation.Options{Brief: true}, 1<<20)
	for b.Loop() {
		run := f.Open(strings.NewReader(body))
		p := stream.Pump{Reader: run.Reader, Writer: run.Writer, Solver: run.Solver, Output: nowhere{}}
		if s, err := p.Run(b.Context()); err != nil || s.Lines != n || s.Problems != 0 {
			b.Fatalf("summary %+v, error %v", s, err)
		}
	}
	b.ReportMetric(n*float64(b.N)/b.Elapsed().Seconds(), "lines/s")
}

type nowhere struct{}

func (nowhere) Write(p []byte) (int, error) { return len(p), nil }
