package drive

import (
	"bytes"
	"context"
	"fmt"
	"io"
	"math"
	"math/rand/v2"
	"net"
	"net/http"
	"net/http/httptest"
	"os"
	"path/filepath"
	"slices"
	"strings"
	"sync/atomic"
	"testing"
	"time"

	"github.com/go-json-experiment/json"
	"github.com/prometheus/client_golang/prometheus/testutil/promlint"

	"leat/api/operation"
	"leat/api/serve"
	"leat/openapi"
)

// startLeat starts the real service, and returns its address.
func startLeat(t *testing.T, change func(*serve.Config)) string {
	t.Helper()
	config := serve.Default()
	config.Listen, config.SpoolDir = "127.0.0.1:0", t.TempDir()
	if change != nil {
		change(&config)
	}
	server, err := serve.New(config, operation.All(), serve.Surroundings{
		Log: serve.NewLog(io.Discard), Ready: func() error { return nil }, Contract: openapi.YAML,
	})
	if err != nil {
		t.Fatal(err)
	}
	address, err := server.Start()
	if err != nil {
		t.Fatal(err)
	}
	t.Cleanup(func() {
		if err := server.Stop(); err != nil {
			t.Error(err)
		}
	})
	return address.String()
}

const ditch = `{"section":{"kind":"triangular","side_slope":1},"roughness":{"manning":0.0125},"bed_slope":0.0004,"discharge":0.8}`

// The service under more than it can do: nothing breaks, nobody gets a wrong answer, refusals say when to come again, streams end right. How fast all that
// goes is the business of .ci/long overload, not of a test.
func TestOverload(t *testing.T) {
	address := startLeat(t, func(c *serve.Config) { c.Solves, c.Queue, c.QueueWait = 1, 4, 100*time.Millisecond })
	plan := &Plan{
		About:    "A test.",
		Requests: []Request{{Name: "drain", Share: 1, Path: "/v1/profile", TakeSeconds: 0.01}, {Name: "ditch", Share: 1, Path: "/v1/depths", Body: []byte(ditch), Expect: map[string]float64{"/normal_depth": 1}}},
		Capacity: &Capacity{Seconds: 0.5, AtOnce: 2},
		Stages:   []Stage{{Name: "over", TimesCapacity: 6, Seconds: 2}},
		Probes:   &Probes{Paths: []string{"/livez", "/readyz"}, EverySeconds: 0.1},
		Streams:  []Stream{{Path: "/v1/bulk/depths", AtOnce: 2, Lines: 300, LinesPerSecond: 300, Record: []byte(ditch)}},
	}
	if err := plan.check(); err != nil {
		t.Fatal(err)
	}
	r, err := Drive(t.Context(), plan, address)
	if err != nil {
		t.Fatal(err)
	}
	var text bytes.Buffer
	r.WriteText(&text)
	t.Logf("\n%s", &text)
	if len(r.Missed) > 0 {
		t.Error("something never allowed happened")
	}
	over := r.Stages[1]
	if over.Accepted.Count == 0 || over.Refused.Count == 0 || over.Sent != over.Accepted.Count+over.Refused.Count {
		t.Errorf("%d sent, %d accepted, %d refused", over.Sent, over.Accepted.Count, over.Refused.Count)
	}
	if over.Probes.Count < 20 || r.StreamsWhole < 2 || r.StreamLines < 300 {
		t.Errorf("%d probes, %d streams, %d lines", over.Probes.Count, r.StreamsWhole, r.StreamLines)
	}
}

// A service that does everything wrong is found out.
func TestWhatIsWrongIsSeen(t *testing.T) {
	var n atomic.Int64
	wrong := httptest.NewServer(http.HandlerFunc(func(w http.ResponseWriter, r *http.Request) {
		io.Copy(io.Discard, r.Body)
		switch {
		case r.URL.Path == "/v1/limits":
			io.WriteString(w, `{"queue_wait_seconds":0.5}`)
			return
		case r.URL.Path == "/readyz":
			w.WriteHeader(503)
			return
		case strings.HasPrefix(r.URL.Path, "/v1/bulk/"):
			io.WriteString(w, `{"line":1,"result":{}}`+"\n"+`{"end":true,"lines":1,"problems":0,"sha256":"00"}`+"\n")
			return
		}
		i := n.Add(1)
		if i <= 21 { // while its normal time is taken
			io.WriteString(w, `{"normal_depth":1}`)
			return
		}
		switch i % 5 {
		case 0:
			io.WriteString(w, `{"normal_depth":2}`)
		case 1:
			w.WriteHeader(503)
		case 2:
			w.WriteHeader(500)
		case 3:
			panic(http.ErrAbortHandler)
		default:
			io.WriteString(w, `{"normal_depth":1}`)
		}
	}))
	defer wrong.Close()
	plan := &Plan{
		Requests: []Request{{Name: "ditch", Share: 1, Path: "/v1/depths", Body: []byte(ditch)}},
		Stages:   []Stage{{Name: "only", Rate: 100, Seconds: 1}},
		Probes:   &Probes{Paths: []string{"/readyz"}, EverySeconds: 0.1},
		Streams:  []Stream{{Path: "/v1/bulk/depths", AtOnce: 1, Lines: 1, LinesPerSecond: 1000, Record: []byte(ditch)}},
	}
	r, err := Drive(t.Context(), plan, wrong.Listener.Addr().String())
	if err != nil {
		t.Fatal(err)
	}
	s := r.Stages[0]
	if s.Sent != 100 || s.Wrong != 20 || s.Silent != 20 || s.Odd != 20 || s.Broken != 20 || s.Accepted.Count != 20 || s.Failed == 0 || r.StreamsWrong == 0 || r.StreamsWhole != 0 {
		t.Errorf("%+v", r)
	}
	all := strings.Join(r.Missed, "\n")
	for _, part := range []string{"20 wrong answers", "20 refusals without Retry-After", "20 broken connections", "20 answers with a status other", "probes that failed", "streams that did not end right"} {
		if !strings.Contains(all, part) {
			t.Errorf("no %q in %s", part, all)
		}
	}
	plan.Requests[0].Expect = map[string]float64{"/normal_depth": 1.5}
	n.Store(0)
	if _, err := Drive(t.Context(), plan, wrong.Listener.Addr().String()); err == nil || !strings.Contains(err.Error(), "must be 1.5") {
		t.Errorf("an answer that is not expected: %v", err)
	}
}

// Latency counts from when a request was due: a service that stops for a while cannot hide it.
func TestLatencyCountsFromWhenARequestWasDue(t *testing.T) {
	begin := time.Now()
	var stopped atomic.Bool
	slow := httptest.NewServer(http.HandlerFunc(func(w http.ResponseWriter, r *http.Request) {
		io.Copy(io.Discard, r.Body)
		if r.URL.Path == "/v1/limits" {
			io.WriteString(w, `{"queue_wait_seconds":0.5}`)
			return
		}
		if stopped.Load() {
			time.Sleep(time.Until(begin.Add(time.Second))) // nobody is answered before then
		}
		io.WriteString(w, `{}`)
	}))
	defer slow.Close()
	plan := &Plan{Requests: []Request{{Name: "any", Share: 1, Path: "/v1/depths", Body: []byte(`{}`)}}, Stages: []Stage{{Name: "only", Rate: 200, Seconds: 1}}}
	d := &drive{plan: plan, address: slow.Listener.Addr().String(), client: &client{address: slow.Listener.Addr().String()}}
	defer d.client.close()
	target := &target{Request: plan.Requests[0], bytes: post(d.address, "/v1/depths", []byte(`{}`))}
	if _, err := d.time(t.Context(), target, 1); err != nil {
		t.Fatal(err)
	}
	d.targets = append(d.targets, target)
	begin = time.Now()
	stopped.Store(true)
	tally := d.open(t.Context(), &plan.Stages[0], 200)
	if tally.accepted.total != 200 {
		t.Fatalf("%d accepted, %v", tally.accepted.total, tally.said)
	}
	if p := tally.accepted.quantile(0.5); p < 400*time.Millisecond {
		t.Errorf("half of the requests waited for half a second and more, and the median is %v", p)
	}
}

func TestRatesAreKept(t *testing.T) {
	s := Stage{Seconds: 10}
	n := 0
	for ; ; n++ {
		if _, inside := s.due(n, 50); !inside {
			break
		}
	}
	if n != 500 {
		t.Errorf("%d in 10 s at 50 a second", n)
	}
	for _, ends := range [][2]float64{{10, 90}, {90, 10}} {
		s := Stage{Seconds: 10, FromRate: ends[0]}
		n, firstHalf, before := 0, 0, time.Duration(-1)
		for ; ; n++ {
			at, inside := s.due(n, ends[1])
			if !inside {
				break
			}
			if at < before {
				t.Fatalf("request %d is due before the one before it", n)
			}
			if before = at; at < 5*time.Second {
				firstHalf++
			}
		}
		// The mean rate is 50, that of the first half a quarter of the difference away from it.
		if half := 5 * (0.75*ends[0] + 0.25*ends[1]); n < 499 || n > 501 || math.Abs(float64(firstHalf)-half) > 2 {
			t.Errorf("from %v to %v: %d, %d in the first half", ends[0], ends[1], n, firstHalf)
		}
	}
}

// Against the sorted times themselves.
func TestQuantiles(t *testing.T) {
	die := rand.New(rand.NewPCG(1, 2))
	var h histogram
	var all []time.Duration
	for range 10_000 {
		d := time.Duration(math.Exp(8 + 10*die.Float64()))
		h.add(d)
		all = append(all, d)
	}
	slices.Sort(all)
	for _, share := range []float64{0.01, 0.5, 0.9, 0.99, 0.999, 1} {
		want := all[int(math.Ceil(share*10_000))-1]
		if got := h.quantile(share); got < min(want, time.Microsecond) || float64(got) > 1.0201*float64(max(want, time.Microsecond)) || float64(got) < float64(want)/1.0001 {
			t.Errorf("quantile %v is %v, of the sorted %v", share, got, want)
		}
	}
	if h.most != all[len(all)-1] {
		t.Error(h.most)
	}
	if new(histogram).quantile(0.5) != 0 {
		t.Error("a quantile of nothing")
	}
}

func TestOnlyThisMachineUnlessAllowed(t *testing.T) {
	for where, want := range map[string]string{
		"http://127.0.0.1:8080": "127.0.0.1:8080", "http://localhost": "127.0.0.1:80", "http://[::1]:9/": "[::1]:9", "http://127.3.2.1:1": "127.3.2.1:1",
		"http://192.0.2.1:80": "", "http://staging.example": "", "https://127.0.0.1": "", "127.0.0.1:80": "", "http://127.0.0.1/v1": "", "http://0.0.0.0:80": "",
	} {
		if got, err := addressOf(where, false); got != want || (err == nil) != (want != "") {
			t.Errorf("%s: %q, %v", where, got, err)
		}
	}
	if got, err := addressOf("http://192.0.2.1:80", true); got != "192.0.2.1:80" || err != nil {
		t.Errorf("%q, %v", got, err)
	}
}

func TestPlansOfTheTree(t *testing.T) {
	files, err := filepath.Glob("../../../deploy/load/*.json")
	if err != nil || len(files) < 2 {
		t.Fatalf("%v, %v", files, err)
	}
	address := startLeat(t, nil)
	for _, file := range files {
		plan, err := Load(file)
		if err != nil {
			t.Error(err)
			continue
		}
		for _, r := range plan.Requests {
			if r.TakeSeconds > 0 {
				r.Body = drain(5)
			}
			d := &drive{address: address, client: &client{address: address}}
			target := &target{Request: r, bytes: post(address, r.Path, r.Body)}
			if _, err := d.time(t.Context(), target, 1); err != nil {
				t.Errorf("%s: %v", file, err)
			} else if err := target.judge(); err != nil {
				t.Errorf("%s: %v", file, err)
			}
			d.client.close()
		}
	}
}

func TestMistakesInPlansAreNamed(t *testing.T) {
	folder := t.TempDir()
	for text, want := range map[string]string{
		`{}`:                      "needs requests and stages",
		`{"stage":[]}`:            "unknown",
		`{"stages":[{"rate":1}]}`: "stage 1 needs seconds",
		`{"requests":[{"name":"a","share":1,"path":"/"}],"stages":[{"rate":1,"seconds":1}]}`:                                                  "request 1 needs either a body",
		`{"requests":[{"name":"a","share":0,"path":"/","body":{}}],"stages":[{"rate":1,"seconds":1}]}`:                                        "share greater than 0",
		`{"requests":[{"name":"a","share":1,"path":"/","body":{}}],"stages":[{"rate":60000,"seconds":1}]}`:                                    "up to 50000",
		`{"requests":[{"name":"a","share":1,"path":"/","body":{}}],"stages":[{"rate":1,"seconds":8000}]}`:                                     "up to 7200",
		`{"requests":[{"name":"a","share":1,"path":"/","body":{}}],"stages":[{"times_capacity":2,"seconds":1}]}`:                              "no capacity",
		`{"requests":[{"name":"a","share":1,"path":"/","body":{}}],"stages":[{"rate":1,"seconds":1}],"probes":{"paths":["/"]}}`:               "every_seconds",
		`{"requests":[{"name":"a","share":1,"path":"/","body":{}}],"stages":[{"rate":1,"seconds":1}],"streams":[{"path":"/v1/bulk/depths"}]}`: "at_once",
		`{"requests":[{"name":"a","share":1,"path":"/","body":{}}],"stages":[{"rate":1,"from_rate":-1,"seconds":1}]}`:                         "from_rate",
	} {
		file := filepath.Join(folder, "plan.json")
		if err := os.WriteFile(file, []byte(text), 0o600); err != nil {
			t.Fatal(err)
		}
		if _, err := Load(file); err == nil || !strings.Contains(err.Error(), want) {
			t.Errorf("%s: %v, want %q", text, err, want)
		}
	}
}

func TestCommand(t *testing.T) {
	address := startLeat(t, nil)
	folder := t.TempDir()
	plan := filepath.Join(folder, "plan.json")
	write := func(thresholds string) {
		text := fmt.Sprintf(`{"about":"A test.","requests":[{"name":"ditch","share":1,"path":"/v1/depths","body":%s,"expect":{"/normal_depth":1}}],"stages":[{"name":"only","rate":20,"seconds":60}],"thresholds":{%s}}`, ditch, thresholds)
		if err := os.WriteFile(plan, []byte(text), 0o600); err != nil {
			t.Fatal(err)
		}
	}
	run := func(arguments ...string) (Outcome, string, string) {
		var out, errors bytes.Buffer
		outcome := Run(context.Background(), arguments, &out, &errors)
		return outcome, out.String(), errors.String()
	}
	write(`"accepted_seconds":30`)
	report := filepath.Join(folder, "report.json")
	if outcome, out, errors := run("--target", "http://"+address, "--seconds", "0.5", "--json", report, "--metrics", folder+"/report.prom", plan); outcome != Held || !strings.Contains(out, "Everything held.") {
		t.Errorf("%d, %s, %s", outcome, out, errors)
	}
	var told Report
	if text, err := os.ReadFile(report); err != nil || json.Unmarshal(text, &told) != nil || told.Stages[0].Accepted.Count != 10 {
		t.Errorf("%v, %+v", err, told)
	}
	text, err := os.ReadFile(folder + "/report.prom")
	if err != nil {
		t.Fatal(err)
	}
	if problems, err := promlint.New(bytes.NewReader(text)).Lint(); err != nil || len(problems) > 0 {
		t.Errorf("%v, %v", problems, err)
	}
	for _, series := range []string{`leat_drive_requests{stage="only",outcome="accepted"} 10`, `leat_drive_missed 0`, `outcome="accepted",of="p99"} 0.`} {
		if !strings.Contains(string(text), series) {
			t.Errorf("no %s in\n%s", series, text)
		}
	}
	write(`"accepted_seconds":1e-9`)
	if outcome, out, _ := run("--target", "http://"+address, "--seconds", "0.5", plan); outcome != Missed || !strings.Contains(out, "99th percentile of the accepted") {
		t.Errorf("%d, %s", outcome, out)
	}
	for _, arguments := range [][]string{{}, {plan, "more"}, {"--target", "http://192.0.2.1", plan}, {folder + "/absent.json"}, {"--seconds", "-1", plan}, {"--unknown", plan}} {
		if outcome, _, errors := run(arguments...); outcome != Misused || errors == "" {
			t.Errorf("%v: %d, %q", arguments, outcome, errors)
		}
	}
	listener, err := net.Listen("tcp", "127.0.0.1:0")
	if err != nil {
		t.Fatal(err)
	}
	listener.Close()
	if outcome, _, errors := run("--target", "http://"+listener.Addr().String(), plan); outcome != Failed || !strings.Contains(errors, "does not answer") {
		t.Errorf("%d, %s", outcome, errors)
	}
	if outcome, out, _ := run("--help"); outcome != Held || !strings.Contains(out, "-allow-remote") {
		t.Errorf("%d, %s", outcome, out)
	}
}
