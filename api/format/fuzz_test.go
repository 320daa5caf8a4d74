package format

import (
	"bytes"
	"encoding/csv"
	"errors"
	"io"
	"strings"
	"testing"

	"github.com/go-json-experiment/json/jsontext"

	"leat/api/operation"
	"leat/api/stream"
)

// fuzzKind feeds anything at all to the reader of one kind. Whatever comes, each record has one answer, the same in whatever pieces the body came; a
// whole answer is well-formed, and a body without an answer has a problem.
func fuzzKind(f *testing.F, in Kind) {
	rows := registerRows(f, 3)
	all := bodies(f, rows, "")
	for _, name := range map[Kind][]string{NDJSON: {"flat NDJSON", "NDJSON"}, JSONArray: {"array", "flat array"}, GeoJSON: {"features", "flat features"}, CSV: {"CSV"}}[in] {
		f.Add([]byte(all[name]), "", true)
		f.Add([]byte(bodies(f, rows[:2], "leat_")[name]), "leat_", true)
		f.Add([]byte(all[name][:len(all[name])/2]), "", false)
	}
	for _, seed := range map[Kind][]string{
		NDJSON:    {`{"section":"{\"kind\":\"box\"}","section_width":1}`, `{"a":NaN}`, "[]\n\n7"},
		JSONArray: {"[]", "[,]", `[{"a":"]\\"},{}}]`, "[{}] x", `[null,{"id":1e999}]`},
		GeoJSON: {`{"features":[{"type":"Feature","id":7,"properties":null},{}],"type":"FeatureCollection"}`, `{"type":"FeatureCollection","features":[{"properties":{"id":1},"id":2}`,
			`{"type":"FeatureCollection","features":[{"type":"Feature","properties":{"normal_depth":1,"depth":null}}]}`},
		CSV: {"id,discharge\n\"a\"\"b\",\"1\n2\"\n", "id;discharge\n1;2", "\ufeffid\r\n\r\n1\r\n", "id,depth\n\"x", "id\n\xff\n", "leat_id,own\n1,\"2\"x\n"},
	}[in] {
		f.Add([]byte(seed), "", true)
		f.Add([]byte(seed), "leat_", false)
	}
	f.Fuzz(func(t *testing.T, body []byte, prefix string, flat bool) {
		if prefix != "" {
			prefix = "leat_"
		}
		flat = flat || prefix != ""
		for _, out := range Kinds {
			b, problem := New(&operation.Depths, operation.Options{}, Choice{In: in, Out: out, Flat: flat, Prefix: prefix}, 4<<10)
			if problem != nil {
				continue
			}
			text, s, err := fuzzRun(t, b, bytes.NewReader(body))
			again, s2, err2 := fuzzRun(t, b, inPieces{bytes.NewReader(body), func() int { return 7 }})
			if (err == nil) != (err2 == nil) || err == nil && (s != s2 || text != again) {
				t.Fatalf("in pieces it is another: %v %+v\n%s\n%v %+v\n%s", err, s, text, err2, s2, again)
			}
			var refusal *Refusal
			if err != nil {
				if !errors.As(err, &refusal) || refusal.Problem.Status >= 500 {
					t.Fatalf("no refusal but %v", err)
				}
				continue
			}
			checkWhole(t, out, text, s.Lines, in)
		}
	})
}

// fuzzRun is the pump without its goroutines, whose turns would look like new ground to the fuzzer.
func fuzzRun(t *testing.T, b *Bulk, body io.Reader) (string, stream.Summary, error) {
	run := b.Open(body)
	var out []byte
	s := stream.Summary{Complete: true}
	for begun := false; ; s.Lines++ {
		record, line, err := run.Reader.Next(nil)
		if !begun && (err == nil || err == io.EOF || isFault(err)) {
			begun = true
			out = run.Writer.Begin(out)
		}
		if err == io.EOF {
			return string(run.Writer.End(run.Writer.Flush(out), s)), s, nil
		}
		if err != nil && !isFault(err) {
			return "", s, err
		}
		if line != s.Lines+1 && b.choice.In != NDJSON {
			t.Fatalf("record %d is said to be %d", s.Lines+1, line)
		}
		var answer []byte
		if r := (stream.Record{Line: line, Bytes: record}); err != nil {
			answer = run.Solver.Refuse(0, r, errors.Unwrap(err), nil)
			s.Problems++
		} else {
			var problem bool
			if answer, problem = run.Solver.Solve(0, r, nil); problem {
				s.Problems++
			}
		}
		out = run.Writer.Answer(out, answer)
	}
}

func isFault(err error) bool {
	var fault *stream.Fault
	return errors.As(err, &fault)
}

// checkWhole holds a whole answer to its form.
func checkWhole(t *testing.T, out Kind, text string, records int64, in Kind) {
	t.Helper()
	var n int64
	switch out {
	case NDJSON:
		for line := range strings.Lines(text) {
			if !jsontext.Value(line).IsValid() {
				t.Fatalf("not JSON: %s", line)
			}
			n++
		}
		n--
	case JSONArray:
		if !jsontext.Value(text).IsValid() {
			t.Fatalf("not JSON: %s", text)
		}
		n = int64(strings.Count(text, "\n{"))
	case GeoJSON:
		if !jsontext.Value(text).IsValid() {
			t.Fatalf("not JSON: %s", text)
		}
		return
	case CSV:
		r := csv.NewReader(strings.NewReader(text))
		r.LazyQuotes = in == CSV // what is handed through is not ours to mend
		rows, err := r.ReadAll()
		if in == CSV {
			return
		}
		if err != nil {
			t.Fatalf("%v: %s", err, text)
		}
		n = int64(len(rows)) - 1
	}
	if n != records {
		t.Fatalf("%d answers to %d records:\n%s", n, records, text)
	}
}

func FuzzFlatLines(f *testing.F) { fuzzKind(f, NDJSON) }

func FuzzArray(f *testing.F) { fuzzKind(f, JSONArray) }

func FuzzFeatures(f *testing.F) { fuzzKind(f, GeoJSON) }

func FuzzCSV(f *testing.F) { fuzzKind(f, CSV) }
