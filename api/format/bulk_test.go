package format

import (
	"bytes"
	"crypto/sha256"
	"encoding/hex"
	"encoding/json"
	"errors"
	"fmt"
	"io"
	"strconv"
	"strings"
	"testing"
	"testing/iotest"

	"go.uber.org/goleak"
	"pgregory.net/rapid"

	"leat/api/operation"
	"leat/api/stream"
	"leat/api/wire"
)

func TestMain(m *testing.M) { goleak.VerifyTestMain(m) }

// double stands in for an operation: {"id":…,"value":x} gives {"double":2x}, a negative value is a problem, 13 panics.
var double = &operation.Operation{Name: "double", Solve: func(body []byte, options operation.Options) (operation.Solved, *wire.Problem) {
	var in struct {
		ID    json.RawMessage
		Value float64
	}
	if options.Inside {
		return operation.Solved{}, wire.Internal("the id must not be inside")
	}
	if err := json.Unmarshal(body, &in); err != nil {
		return operation.Solved{}, wire.MalformedJSON(wire.Fault{Code: "syntax_error", Detail: "This is no JSON."})
	}
	switch {
	case in.Value < 0:
		return operation.Solved{ID: wire.ID(in.ID)}, wire.InvalidRequest(wire.Fault{Pointer: "/value", Code: "out_of_range", Detail: `It is "negative".`})
	case in.Value == 13:
		panic("thirteen")
	}
	return operation.Solved{Answer: fixedAnswer(`{"double":` + strconv.FormatFloat(2*in.Value, 'g', -1, 64) + `}`), ID: wire.ID(in.ID)}, nil
}}

// fixedAnswer is the text of an answer.
type fixedAnswer string

func (a fixedAnswer) AppendJSON(dst []byte, _ wire.System, _ wire.ID) []byte {
	return append(dst, a...)
}

func (a fixedAnswer) SetFingerprint(string) {}

func (a fixedAnswer) NonFinite() string { return "" }

func newBulk(t testing.TB, op *operation.Operation, options operation.Options, choice Choice, lineBytes int) *Bulk {
	t.Helper()
	b, problem := New(op, options, choice, lineBytes)
	if problem != nil {
		t.Fatal(problem)
	}
	return b
}

func newNDJSON(t testing.TB, op *operation.Operation, options operation.Options, lineBytes int) *Bulk {
	return newBulk(t, op, options, Choice{}, lineBytes)
}

func pump(t testing.TB, b *Bulk, body io.Reader) (string, stream.Summary) {
	t.Helper()
	var out bytes.Buffer
	run := b.Open(body)
	p := stream.Pump{Reader: run.Reader, Writer: run.Writer, Solver: run.Solver, Output: &out, Workers: 3}
	s, err := p.Run(t.Context())
	if err != nil {
		t.Fatal(err)
	}
	return out.String(), s
}

func TestNDJSON(t *testing.T) {
	const limit = 60
	body := strings.Join([]string{
		`{"id":"ditch 1","value":1.5}`,
		``,
		"{\"id\":2.50,\"value\":2}\r",
		`{"value":3}`,
		`{"id":"ä\"b","value":-1}`,
		`{"value":`,
		`{"value":13,"id":"panics"}`,
		strings.Repeat("x", limit+1),
		"\ufeff{\"value\":1}",
		` {"value":4} `,
	}, "\n")
	const problems = `"type":"/docs/problems/`
	want := []string{
		`{"id":"ditch 1","line":1,"result":{"double":3}}`,
		`{"id":2.50,"line":3,"result":{"double":4}}`,
		`{"line":4,"result":{"double":6}}`,
		`{"id":"ä\"b","line":5,"problem":{` + problems + `invalid_request","title":"The request breaks a rule","status":422,`,
		`{"line":6,"problem":{` + problems + `malformed_json","title":"The body is not acceptable JSON","status":400,`,
		`{"id":"panics","line":7,"problem":{` + problems + `internal_error","title":"The service failed","status":500,`,
		`{"line":8,"problem":{` + problems + `too_large","title":"The request is larger than a limit","status":413,`,
		`{"line":9,"problem":{` + problems + `malformed_json","title":"The body is not acceptable JSON","status":400,`,
		`{"line":10,"result":{"double":8}}`,
	}
	for name, r := range map[string]io.Reader{"whole": strings.NewReader(body), "bytes": iotest.OneByteReader(strings.NewReader(body))} {
		out, s := pump(t, newNDJSON(t, double, operation.Options{Inside: true}, limit), r)
		lines := strings.SplitAfter(out, "\n")
		if len(lines) != len(want)+2 || lines[len(want)+1] != "" {
			t.Fatalf("%s: %d lines:\n%s", name, len(lines), out)
		}
		for i, w := range want {
			if !strings.HasPrefix(lines[i], w) || !json.Valid([]byte(lines[i])) || strings.Contains(lines[i], "instance") {
				t.Errorf("%s: got  %swant %s", name, lines[i], w)
			}
		}
		sum := sha256.Sum256([]byte(strings.Join(lines[:len(want)], "")))
		end := fmt.Sprintf(`{"end":true,"lines":9,"problems":5,"sha256":"%s"}`+"\n", hex.EncodeToString(sum[:]))
		if lines[len(want)] != end {
			t.Errorf("%s: end %swant %s", name, lines[len(want)], end)
		}
		if !s.Complete || s.Lines != 9 || s.Problems != 5 {
			t.Errorf("%s: summary %+v", name, s)
		}
		if !strings.Contains(lines[6], `"code":"line_bytes"`) || !strings.Contains(lines[6], "60 bytes") {
			t.Errorf("%s: the limit is not named: %s", name, lines[6])
		}
	}
}

func TestTheEndOfAStreamThatStopsEarly(t *testing.T) {
	got := string(lineWriter{}.End([]byte("x\n"), stream.Summary{Reason: stream.SpoolFull, ResumeAt: 12, Lines: 9, Problems: 2, SHA256: [32]byte{0xab}}))
	want := "x\n" + `{"end":false,"reason":"spool_full","resume_at":12,"lines":9,"problems":2,"sha256":"ab` + strings.Repeat("0", 62) + "\"}\n"
	if got != want {
		t.Errorf("got  %swant %s", got, want)
	}
}

// The answer of a line is what the operation says of it alone, whatever stands around it and however it arrives.
func TestABulkAnswerIsTheUnaryOne(t *testing.T) {
	f := newNDJSON(t, double, operation.Options{}, 100)
	rapid.Check(t, func(t *rapid.T) {
		var body, want bytes.Buffer
		var n, problems int64
		for i, count := int64(1), rapid.Int64Range(0, 200).Draw(t, "lines"); i <= count; i++ {
			if rapid.IntRange(0, 5).Draw(t, "blank") == 0 {
				body.WriteString(rapid.SampledFrom([]string{"\n", "\r\n", " \t\n"}).Draw(t, "end"))
				continue
			}
			value := rapid.Float64Range(-1, 10).Draw(t, "value")
			request := fmt.Appendf(nil, `{"id":%d,"value":%v}`, i, value)
			answer, id, problem := double.Answer(nil, request, operation.Options{})
			if fmt.Fprintf(&want, `{"id":%s,"line":%d,`, id, i); problem != nil {
				problems++
				fmt.Fprintf(&want, `"problem":%s}`+"\n", problem.AppendJSON(nil))
			} else {
				fmt.Fprintf(&want, `"result":%s}`+"\n", answer)
			}
			n++
			body.Write(request)
			if i < count || rapid.Bool().Draw(t, "last ends") {
				body.WriteString(rapid.SampledFrom([]string{"\n", "\r\n"}).Draw(t, "end"))
			}
		}
		var in io.Reader = &body
		if rapid.Bool().Draw(t, "bytes") {
			in = iotest.OneByteReader(in)
		}
		var out bytes.Buffer
		run := f.Open(in)
		p := stream.Pump{Reader: run.Reader, Writer: run.Writer, Solver: run.Solver, Output: &out, Workers: rapid.IntRange(1, 4).Draw(t, "workers")}
		s, err := p.Run(t.Context())
		if err != nil || !s.Complete || s.Lines != n || s.Problems != problems || s.SHA256 != sha256.Sum256(want.Bytes()) {
			t.Fatalf("summary %+v, error %v, want %d lines, %d problems", s, err, n, problems)
		}
		if !bytes.HasPrefix(out.Bytes(), want.Bytes()) {
			t.Fatalf("got\n%swant\n%s", out.Bytes(), want.Bytes())
		}
	})
}

// A client that waits for each answer may send blank lines between.
func TestBlankLinesDoNotHoldAnswersBack(t *testing.T) {
	in, feed := io.Pipe()
	out, sink := io.Pipe()
	f := newNDJSON(t, double, operation.Options{}, 100)
	run := f.Open(in)
	p := stream.Pump{Reader: run.Reader, Writer: run.Writer, Solver: run.Solver, Output: sink}
	done := make(chan error, 1)
	go func() { _, err := p.Run(t.Context()); sink.Close(); done <- err }()
	b := make([]byte, 1000)
	for i := range 50 {
		fmt.Fprintf(feed, "{\"value\":%d}\n\n \r\n", 20+i)
		n, err := out.Read(b)
		want := fmt.Sprintf(`{"line":%d,"result":{"double":%d}}`+"\n", 3*i+1, 40+2*i)
		if err != nil || string(b[:n]) != want {
			t.Fatalf("got %q, error %v, want %q", b[:n], err, want)
		}
	}
	feed.Close()
	io.Copy(io.Discard, out)
	if err := <-done; err != nil {
		t.Fatal(err)
	}
}

func TestFindID(t *testing.T) {
	for request, want := range map[string]string{
		`{"id":"a","value":1}`:                `"a"`,
		`{"value":[1,{"id":2}],"id":-1.50e3}`: `-1.50e3`,
		` { "id" : "b" , broken`:              `"b"`,
		`{"id":null}`:                         ``,
		`{"id":{"id":1}}`:                     ``,
		`{"value":1}`:                         ``,
		`{"value":1`:                          ``,
		`["id",1]`:                            ``,
		``:                                    ``,
		`{"id":"` + strings.Repeat("x", longestID) + `"}`: ``,
	} {
		if got := string(findID([]byte(request), "id")); got != want {
			t.Errorf("%s: got %s, want %s", request, got, want)
		}
	}
}

func TestRefusalOfUnknownCauseIsOurFault(t *testing.T) {
	if p := refusal(errors.New("whatever"), NDJSON); p.Status != 500 {
		t.Errorf("status %d", p.Status)
	}
}

func TestSolvingALineAllocatesNothing(t *testing.T) {
	plain := &operation.Operation{Name: "plain", Solve: func(body []byte, _ operation.Options) (operation.Solved, *wire.Problem) {
		return operation.Solved{Answer: fixedAnswer(`{"answer":1}`), ID: body[6:7]}, nil
	}}
	f := newNDJSON(t, plain, operation.Options{}, 100)
	solver := f.Open(strings.NewReader("")).Solver
	record := stream.Record{Line: 7, Bytes: []byte(`{"id":5}`)}
	dst := make([]byte, 0, 1000)
	if n := testing.AllocsPerRun(1000, func() {
		if out, problem := solver.Solve(0, record, dst); problem || string(out) != `{"id":5,"line":7,"result":{"answer":1}}` {
			t.Fatalf("%s", out)
		}
	}); n > 0 {
		t.Errorf("%v allocations a line", n)
	}
}
