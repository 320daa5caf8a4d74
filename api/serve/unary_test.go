package serve

import (
	"context"
	"errors"
	"strings"
	"sync/atomic"
	"testing"
	"time"

	"github.com/go-json-experiment/json"

	"leat/api/admit"
	"leat/api/wire"
)

const jsonHeader = "application/json"

func TestUnaryAnswers(t *testing.T) {
	r := start(t, nil)
	for _, path := range []string{"/v1/section", "/v1/depths", "/v1/rating"} {
		for query, want := range map[string]string{
			"":                       `{"units":"si","brief":false,"pad":""}`,
			"?":                      `{"units":"si","brief":false,"pad":""}`,
			"?units=us":              `{"units":"us","brief":false,"pad":""}`,
			"?detail=brief&units=si": `{"units":"si","brief":true,"pad":""}`,
			"?detail=full":           `{"units":"si","brief":false,"pad":""}`,
			"?uni%74s=u%73":          `{"units":"us","brief":false,"pad":""}`,
		} {
			got := r.send("POST", path+query, `{}`, "Content-Type", jsonHeader)
			if got.status != 200 || string(got.body) != want {
				t.Errorf("%s%s = %d %s, want 200 %s", path, query, got.status, got.body, want)
			}
			if got.header.Get("Content-Type") != "application/json" || got.header.Get("Request-Id") == "" {
				t.Errorf("%s: header %v", path, got.header)
			}
		}
	}
}

// Every refusal that does not depend on what a body says, for unary and bulk.
func TestRefusals(t *testing.T) {
	r := start(t, func(c *Config, _ *Surroundings) { c.BodyBytes = 2000; c.HeldBytes = 1 << 20 })
	const ndjson = "application/x-ndjson"
	for _, row := range []struct {
		name, method, path, body string
		headers                  []string
		status                   int
		says                     []string // parts of the detail
		parameters               []string
		header, value            string
	}{
		{name: "unknown path", method: "POST", path: "/v1/deptsh", status: 404, says: []string{"GET / lists"}},
		{name: "unknown path, GET", method: "GET", path: "/nothing", status: 404},
		{name: "trailing slash", method: "POST", path: "/v1/depths/", status: 404, says: []string{"/v1/depths"}},
		{name: "double slash", method: "POST", path: "//v1/depths", status: 404},
		{name: "other case", method: "POST", path: "/V1/depths", status: 404},
		{name: "dots", method: "POST", path: "/v1/x/../depths", status: 404},
		{name: "GET of an operation", method: "GET", path: "/v1/depths", status: 405, says: []string{"POST"}, header: "Allow", value: "OPTIONS, POST"},
		{name: "PUT of an operation", method: "PUT", path: "/v1/bulk/depths", status: 405, header: "Allow", value: "OPTIONS, POST"},
		{name: "POST of a document", method: "POST", path: "/v1/limits", status: 405, header: "Allow", value: "GET, HEAD, OPTIONS"},
		{name: "DELETE of the page", method: "DELETE", path: "/", status: 405, header: "Allow", value: "GET, HEAD, OPTIONS"},
		{name: "invented method", method: "BREW", path: "/v1/depths", status: 405, header: "Allow", value: "OPTIONS, POST"},

		{name: "unknown parameter", method: "POST", path: "/v1/depths?unit=us", status: 400, says: []string{`"unit"`, "detail", "units"}, parameters: []string{"unit"}},
		{name: "unknown value", method: "POST", path: "/v1/depths?units=metric", status: 400, says: []string{"si", "us", `"metric"`}, parameters: []string{"units"}},
		{name: "empty value", method: "POST", path: "/v1/depths?units=", status: 400, parameters: []string{"units"}},
		{name: "value in other case", method: "POST", path: "/v1/depths?units=US", status: 400, parameters: []string{"units"}},
		{name: "twice", method: "POST", path: "/v1/depths?units=us&units=us", status: 400, says: []string{"once"}, parameters: []string{"units"}},
		{name: "several faults", method: "POST", path: "/v1/depths?units=x&detail=y&z=1", status: 400, parameters: []string{"units", "detail", "z"}},
		{name: "bad escape", method: "POST", path: "/v1/depths?units=%7", status: 400, parameters: []string{"units"}},
		{name: "semicolon", method: "POST", path: "/v1/depths?units=us;detail=brief", status: 400, parameters: []string{"units"}},
		{name: "fingerprint by another word", method: "POST", path: "/v1/depths?fingerprint=yes", status: 400, says: []string{"true, false", `"yes"`}, parameters: []string{"fingerprint"}},
		{name: "bulk's parameter", method: "POST", path: "/v1/depths?flat=true", headers: []string{"Content-Type", jsonHeader}, status: 400, parameters: []string{"flat"}},
		{name: "bulk parameter", method: "POST", path: "/v1/bulk/depths?flat=1", headers: []string{"Content-Type", ndjson}, status: 400, says: []string{"true, false"}, parameters: []string{"flat"}},
		{name: "prefix that is none", method: "POST", path: "/v1/bulk/depths?flat=true&prefix=leat", headers: []string{"Content-Type", ndjson}, status: 400, says: []string{"end with an underscore"}, parameters: []string{"prefix"}},
		{name: "prefix of what is not flat", method: "POST", path: "/v1/bulk/depths?prefix=leat_", headers: []string{"Content-Type", ndjson}, status: 400, says: []string{"flat=true"}, parameters: []string{"prefix"}},

		{name: "no type", method: "POST", path: "/v1/depths", body: `{}`, headers: []string{"Content-Type", ""}, status: 415, says: []string{"no Content-Type", "application/json"}, header: "Accept", value: "application/json"},
		{name: "form type of urllib", method: "POST", path: "/v1/depths", body: `{}`, headers: []string{"Content-Type", "application/x-www-form-urlencoded"}, status: 415,
			says: []string{`headers={"Content-Type": "application/json"}`, "-H"}},
		{name: "text", method: "POST", path: "/v1/depths", body: `{}`, headers: []string{"Content-Type", "text/plain"}, status: 415},
		{name: "a type that cannot be read", method: "POST", path: "/v1/depths", body: `{}`, headers: []string{"Content-Type", "json;;"}, status: 415},
		{name: "two types", method: "POST", path: "/v1/depths", body: `{}`, headers: []string{"Content-Type", jsonHeader, "Content-Type", jsonHeader}, status: 415},
		{name: "NDJSON to unary", method: "POST", path: "/v1/depths", body: `{}`, headers: []string{"Content-Type", ndjson}, status: 415, says: []string{"under /v1/bulk"}},
		{name: "CSV to unary", method: "POST", path: "/v1/depths", body: `{}`, headers: []string{"Content-Type", "text/csv; charset=utf-8"}, status: 415, says: []string{"under /v1/bulk"}},
		{name: "text to bulk", method: "POST", path: "/v1/bulk/depths", body: `{}`, headers: []string{"Content-Type", "text/plain"}, status: 415, says: []string{ndjson, "text/csv", "application/geo+json"},
			header: "Accept", value: "application/x-ndjson, application/json, application/geo+json, text/csv"},
		{name: "CSV without its header line", method: "POST", path: "/v1/bulk/depths", body: "1", headers: []string{"Content-Type", "text/csv; header=absent"}, status: 415, says: []string{"header line"}},
		{name: "charset", method: "POST", path: "/v1/depths", body: `{}`, headers: []string{"Content-Type", "application/json; charset=latin1"}, status: 415, says: []string{"UTF-8"}},
		{name: "coding", method: "POST", path: "/v1/depths", body: `{}`, headers: []string{"Content-Type", jsonHeader, "Content-Encoding", "gzip"}, status: 415, says: []string{`"gzip"`}, header: "Accept-Encoding", value: "identity"},
		{name: "coding of bulk", method: "POST", path: "/v1/bulk/depths", body: `{}`, headers: []string{"Content-Type", ndjson, "Content-Encoding", "zstd"}, status: 415},

		{name: "accept", method: "POST", path: "/v1/depths", body: `{}`, headers: []string{"Content-Type", jsonHeader, "Accept", "text/csv"}, status: 406, says: []string{"application/json"}},
		{name: "accept, refused by quality", method: "POST", path: "/v1/depths", body: `{}`, headers: []string{"Content-Type", jsonHeader, "Accept", "application/json;q=0, */*"}, status: 406},
		{name: "accept of bulk", method: "POST", path: "/v1/bulk/depths", body: `{}`, headers: []string{"Content-Type", ndjson, "Accept", "application/geo+json"}, status: 406, says: []string{ndjson, "text/csv"}},
		{name: "flat answers where there are none", method: "POST", path: "/v1/bulk/rating", body: `{}`, headers: []string{"Content-Type", "text/csv"}, status: 406, says: []string{"rating", "without flat"}},
		{name: "accept of a document", method: "GET", path: "/openapi.yaml", headers: []string{"Accept", "image/png"}, status: 406, says: []string{"application/yaml"}},
		{name: "accept of the page", method: "GET", path: "/", headers: []string{"Accept", "text/csv"}, status: 406, says: []string{"text/html", "application/json"}},

		{name: "too large", method: "POST", path: "/v1/depths", body: strings.Repeat(" ", 2001), headers: []string{"Content-Type", jsonHeader}, status: 413, says: []string{"body_bytes", "2000"}},
		{name: "much too large", method: "POST", path: "/v1/depths", body: strings.Repeat(" ", 100_000), headers: []string{"Content-Type", jsonHeader}, status: 413},
		{name: "what the body says", method: "POST", path: "/v1/depths", body: `{`, headers: []string{"Content-Type", jsonHeader}, status: 400},
		{name: "what the request says", method: "POST", path: "/v1/depths", body: `{"act":"refuse"}`, headers: []string{"Content-Type", jsonHeader}, status: 422},
		{name: "whatever accept says, a problem is a problem", method: "POST", path: "/v1/depths", body: `{"act":"refuse"}`, headers: []string{"Content-Type", jsonHeader, "Accept", "application/json"}, status: 422},
		{name: "panic", method: "POST", path: "/v1/depths", body: `{"act":"panic"}`, headers: []string{"Content-Type", jsonHeader}, status: 500, says: []string{"request id"}},
	} {
		t.Run(row.name, func(t *testing.T) {
			got := r.send(row.method, row.path, row.body, row.headers...)
			p := got.problem(t, row.status)
			for _, part := range row.says {
				if !strings.Contains(p.Detail, part) {
					t.Errorf("detail %q does not say %q", p.Detail, part)
				}
			}
			if row.header != "" && got.header.Get(row.header) != row.value {
				t.Errorf("%s: %q, want %q", row.header, got.header.Get(row.header), row.value)
			}
			var parameters []string
			for _, e := range p.Errors {
				if e.Parameter != nil {
					parameters = append(parameters, *e.Parameter)
				}
			}
			if strings.Join(parameters, " ") != strings.Join(row.parameters, " ") {
				t.Errorf("parameters %q, want %q", parameters, row.parameters)
			}
			if got.header.Get("X-Content-Type-Options") != "nosniff" || !strings.HasPrefix(got.header.Get("Content-Security-Policy"), "default-src 'none'") {
				t.Errorf("security headers missing: %v", got.header)
			}
		})
	}
}

func TestBodyOfExactlyTheLimitPasses(t *testing.T) {
	const limit = 40_000 // more than one buffer
	r := start(t, func(c *Config, _ *Surroundings) { c.BodyBytes = limit })
	for size, want := range map[int]int{limit - 1: 200, limit: 200, limit + 1: 413} {
		body := `{}` + strings.Repeat(" ", size-2)
		if got := r.send("POST", "/v1/depths", body, "Content-Type", jsonHeader); got.status != want {
			t.Errorf("body of %d bytes: status %d, want %d", size, got.status, want)
		}
	}
	if held := r.bodies.held.Load(); held != 0 {
		t.Errorf("%d bytes still held", held)
	}
}

func TestAcceptedTypes(t *testing.T) {
	r := start(t, nil)
	for _, media := range []string{"application/json", "Application/JSON", "application/json; charset=utf-8", `application/json;charset="UTF-8"`} {
		if got := r.send("POST", "/v1/depths", `{}`, "Content-Type", media); got.status != 200 {
			t.Errorf("Content-Type %s: %d %s", media, got.status, got.body)
		}
	}
	for _, accept := range []string{"*/*", "application/*", "application/json", "text/html, application/json;q=0.1", "text/html;level=1, */*;q=0.5", ", ,", "nonsense/, */*"} {
		if got := r.send("POST", "/v1/depths", `{}`, "Content-Type", jsonHeader, "Accept", accept); got.status != 200 {
			t.Errorf("Accept %s: %d %s", accept, got.status, got.body)
		}
	}
}

func TestRequestIDIsTakenOverIfHarmless(t *testing.T) {
	r := start(t, nil)
	for id, taken := range map[string]bool{
		"4f2c-Ab_9.x:1":          true,
		strings.Repeat("a", 128): true,
		strings.Repeat("a", 129): false,
		"with space":             false,
		`quote"`:                 false,
		"ümlaut":                 false,
		"<script>":               false,
	} {
		got := r.send("POST", "/v1/depths", `{"act":"refuse"}`, "Content-Type", jsonHeader, "Request-Id", id)
		answered := got.header.Get("Request-Id")
		if (answered == id) != taken || answered == "" {
			t.Errorf("Request-Id %q came back as %q, taken over = %v", id, answered, taken)
		}
		got.problem(t, 422) // checks instance
	}
	one, two := r.send("GET", "/livez", ""), r.send("GET", "/livez", "")
	if a, b := one.header.Get("Request-Id"), two.header.Get("Request-Id"); a == b || len(a) < 20 {
		t.Errorf("made ids %q and %q", a, b)
	}
}

func TestLateAnswerIs504(t *testing.T) {
	r := start(t, func(c *Config, _ *Surroundings) { c.TimeLimit = 100 * time.Millisecond })
	p := r.send("POST", "/v1/depths", `{"act":"sleep"}`, "Content-Type", jsonHeader).problem(t, 504)
	if !strings.Contains(p.Detail, "time_limit_seconds, 0.1") {
		t.Errorf("detail %q", p.Detail)
	}
}

func TestCheckpointEndsALongSolve(t *testing.T) {
	ctx, cancel := context.WithCancel(t.Context())
	slot := admit.New(admit.Settings{Slots: 1}).Hold(admit.Long)
	if err := slot.Acquire(ctx); err != nil {
		t.Fatal(err)
	}
	begin := checkpoints(ctx, 50*time.Millisecond, func(int) *admit.Hold { return slot })
	first := begin(0)
	if err := first(); err != nil {
		t.Errorf("at once: %v", err)
	}
	time.Sleep(60 * time.Millisecond)
	second := begin(0)
	if err := second(); err != nil {
		t.Errorf("the time of one solve counts against the next: %v", err)
	}
	var problem *wire.Problem
	if err := first(); !errors.As(err, &problem) || problem.Status != 504 {
		t.Errorf("past the limit: %v", err)
	}
	cancel()
	if err := second(); !errors.As(err, &problem) || problem.Status != 408 {
		t.Errorf("without a client: %v", err)
	}
}

func TestBodiesHeldAreBounded(t *testing.T) {
	r := start(t, func(c *Config, _ *Surroundings) { c.HeldBytes = 3 << 19 })
	// A body under way that holds 1 MiB of room and then waits.
	c := r.dial()
	c.Write([]byte("POST /v1/depths HTTP/1.1\r\nHost: leat\r\nContent-Type: application/json\r\nContent-Length: 1000000\r\n\r\n"))
	c.Write(make([]byte, 600_000))
	waitFor(t, "the body to be held", func() bool { return r.bodies.held.Load() > 600_000 })
	got := r.send("POST", "/v1/depths", `{}`+strings.Repeat(" ", 900_000), "Content-Type", jsonHeader)
	got.problem(t, 503)
	if got.header.Get("Retry-After") == "" {
		t.Error("no Retry-After")
	}
	if got := r.send("POST", "/v1/depths", `{}`, "Content-Type", jsonHeader); got.status != 200 {
		t.Errorf("a small body finds no room: %d", got.status)
	}
	c.Close()
	waitFor(t, "the bodies to be let go", func() bool { return r.bodies.held.Load() == 0 })
}

func TestAccessLog(t *testing.T) {
	r := start(t, nil)
	got := r.send("POST", "/v1/depths?units=us", `{}`, "Content-Type", jsonHeader, "Request-Id", "abc-1",
		"Traceparent", "00-4bf92f3577b34da6a3ce929d0e0e4736-00f067aa0ba902b7-01")
	line := r.log.access(t, "abc-1")
	for name, want := range map[string]any{
		"level": "INFO", "request_id": "abc-1", "trace_id": "4bf92f3577b34da6a3ce929d0e0e4736", "caller": "127.0.0.1",
		"route": "/v1/depths", "status": 200.0, "bytes_in": 2.0, "bytes_out": float64(len(got.body)), "lines": 0.0, "problems": 0.0,
	} {
		if line[name] != want {
			t.Errorf("%s = %v, want %v", name, line[name], want)
		}
	}
	for _, name := range []string{"time", "message", "duration_seconds"} {
		if line[name] == nil {
			t.Errorf("no %s in %v", name, line)
		}
	}
	if at, err := time.Parse(time.RFC3339Nano, line["time"].(string)); err != nil || !strings.HasSuffix(line["time"].(string), "Z") || time.Since(at) > time.Minute {
		t.Errorf("time %v", line["time"])
	}
	if len(line) != 13 {
		t.Errorf("%d members, want the 13 of the contract: %v", len(line), line)
	}

	r.send("GET", "/secret/path?token=1", "", "Request-Id", "abc-2", "Traceparent", "00-xyz")
	line = r.log.access(t, "abc-2")
	if line["route"] != "unmatched" || line["level"] != "WARN" || line["trace_id"] != "" || line["problems"] != 1.0 {
		t.Errorf("line %v", line)
	}
	for _, path := range []string{"/livez", "/readyz", "/metrics"} {
		r.send("GET", path, "")
	}
	text := r.log.String()
	for _, hidden := range []string{"secret", "token", "livez", "readyz", "metrics"} {
		if strings.Contains(text, hidden) {
			t.Errorf("the log holds %q:\n%s", hidden, text)
		}
	}
	if n := len(r.log.lines(t)); n != 2 {
		t.Errorf("%d lines for two requests:\n%s", n, text)
	}
}

func TestPanicIsLoggedOnceWithItsCause(t *testing.T) {
	r := start(t, nil)
	r.send("POST", "/v1/depths", `{"act":"panic"}`, "Content-Type", jsonHeader, "Request-Id", "p-1").problem(t, 500)
	r.log.access(t, "p-1")
	var causes []string
	for _, line := range r.log.lines(t) {
		if line["cause"] != nil {
			causes = append(causes, line["cause"].(string))
			if !strings.Contains(line["stack"].(string), "fakeOperation") || line["request_id"] != "p-1" {
				t.Errorf("line %v", line)
			}
		}
	}
	if len(causes) != 1 || causes[0] != "as asked" {
		t.Errorf("causes %q", causes)
	}
}

func TestTraceID(t *testing.T) {
	const trace, span = "4bf92f3577b34da6a3ce929d0e0e4736", "00f067aa0ba902b7"
	for parent, want := range map[string]string{
		"00-" + trace + "-" + span + "-01":                    trace,
		"01-" + trace + "-" + span + "-01-more":               trace,
		"00-" + trace + "-" + span + "-01-more":               "",
		"01-" + trace + "-" + span + "-01more":                "",
		"ff-" + trace + "-" + span + "-01":                    "",
		"00-" + strings.ToUpper(trace) + "-" + span + "-01":   "",
		"00-" + strings.Repeat("0", 32) + "-" + span + "-01":  "",
		"00-" + trace + "-" + strings.Repeat("0", 16) + "-01": "",
		"": "", "garbage": "",
	} {
		if got := traceID(map[string][]string{"Traceparent": {parent}}); got != want {
			t.Errorf("traceID(%q) = %q, want %q", parent, got, want)
		}
	}
}

func TestProbes(t *testing.T) {
	var broken atomic.Bool
	r := start(t, func(_ *Config, around *Surroundings) {
		around.Ready = func() error {
			if broken.Load() {
				return errors.New("wrong digit")
			}
			return nil
		}
	})
	for _, path := range []string{"/livez", "/readyz"} {
		got := r.send("GET", path, "", "Accept", "image/png")
		var body map[string]string
		if err := json.Unmarshal(got.body, &body); err != nil || got.status != 200 || got.header.Get("Cache-Control") != "no-store" {
			t.Errorf("%s: %d %s", path, got.status, got.body)
		}
	}
	broken.Store(true)
	r.send("GET", "/readyz", "").problem(t, 503)
	if got := r.send("GET", "/livez", ""); got.status != 200 {
		t.Errorf("/livez: %d", got.status)
	}
	if !strings.Contains(r.log.String(), "wrong digit") {
		t.Error("the log does not say what came out wrong")
	}
}

func waitFor(t *testing.T, what string, holds func() bool) {
	t.Helper()
	for deadline := time.Now().Add(10 * time.Second); !holds(); time.Sleep(time.Millisecond) {
		if time.Now().After(deadline) {
			t.Fatalf("waited in vain for %s", what)
		}
	}
}
