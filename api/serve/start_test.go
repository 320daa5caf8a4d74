package serve

import (
	"bytes"
	"context"
	"errors"
	"io"
	"net"
	"net/http"
	"strings"
	"sync"
	"testing"
	"time"

	"github.com/go-json-experiment/json"
	"go.uber.org/goleak"

	"leat/api/operation"
	"leat/api/wire"
)

// fakeOperation stands in for the operations of the contract where a test is about the edge alone. It does what the body says.
func fakeOperation(name string) *operation.Operation {
	return &operation.Operation{Name: name, Solve: func(body []byte, options operation.Options) (operation.Solved, *wire.Problem) {
		var request struct {
			ID    string `json:"id"`
			Act   string `json:"act"`
			Bytes int    `json:"bytes"`
		}
		if err := json.Unmarshal(body, &request); err != nil {
			return operation.Solved{}, wire.MalformedJSON(wire.Fault{Code: "syntax", Detail: "This is no JSON."})
		}
		var id []byte
		if request.ID != "" {
			id = []byte(`"` + request.ID + `"`)
		}
		switch request.Act {
		case "panic":
			panic("as asked")
		case "sleep":
			time.Sleep(300 * time.Millisecond)
		case "refuse":
			return operation.Solved{ID: id}, wire.InvalidRequest(wire.Fault{Pointer: "/act", Code: "refused", Detail: "This was asked for."})
		}
		units := "si"
		if options.Units == wire.US {
			units = "us"
		}
		dst := []byte(`{"units":"` + units + `","brief":`)
		if options.Brief {
			dst = append(dst, `true`...)
		} else {
			dst = append(dst, `false`...)
		}
		dst = append(dst, `,"pad":"`...)
		dst = append(dst, strings.Repeat("x", request.Bytes)...)
		return operation.Solved{Answer: fakeAnswer(append(dst, `"}`...)), ID: id}, nil
	}}
}

// fakeAnswer is the text of an answer.
type fakeAnswer []byte

func (a fakeAnswer) AppendJSON(dst []byte, _ wire.System, _ wire.ID) []byte { return append(dst, a...) }

func (a fakeAnswer) SetFingerprint(string) {}

func (a fakeAnswer) NonFinite() string { return "" }

// A running server and what a test wants to know of it.
type running struct {
	*Server
	t       *testing.T
	address string
	log     *logBuffer
}

func (r *running) url(path string) string { return "http://" + r.address + path }

// logBuffer collects log lines.
type logBuffer struct {
	mutex sync.Mutex
	bytes.Buffer
}

func (b *logBuffer) Write(p []byte) (int, error) {
	b.mutex.Lock()
	defer b.mutex.Unlock()
	return b.Buffer.Write(p)
}

// lines returns the log so far, a map a line.
func (b *logBuffer) lines(t *testing.T) []map[string]any {
	t.Helper()
	b.mutex.Lock()
	defer b.mutex.Unlock()
	var out []map[string]any
	for _, line := range strings.Split(strings.TrimSpace(b.String()), "\n") {
		if line == "" {
			continue
		}
		var m map[string]any
		if err := json.Unmarshal([]byte(line), &m); err != nil {
			t.Fatalf("log line %q: %v", line, err)
		}
		out = append(out, m)
	}
	return out
}

// access waits for the access-log line of a request.
func (b *logBuffer) access(t *testing.T, requestID string) map[string]any {
	t.Helper()
	for deadline := time.Now().Add(5 * time.Second); time.Now().Before(deadline); time.Sleep(time.Millisecond) {
		for _, line := range b.lines(t) {
			if line["request_id"] == requestID && line["route"] != nil {
				return line
			}
		}
	}
	t.Fatalf("no access-log line of request %q in\n%s", requestID, b.String())
	return nil
}

func testConfig(t *testing.T) Config {
	config := Default()
	config.Listen = "127.0.0.1:0"
	config.SpoolDir = t.TempDir()
	config.DrainLimit = 10 * time.Second
	return config
}

func testSurroundings(log io.Writer) Surroundings {
	return Surroundings{
		Log:      NewLog(log),
		Build:    Build{Version: "v0.0.0-test", Revision: "0123"},
		Ready:    func() error { return nil },
		Contract: []byte("openapi: 3.1.0\ninfo:\n  title: Test\n  version: '1'\npaths: {}\n"),
	}
}

// start starts a server with fake operations over a real socket, adjusted before it listens; it is stopped when the test ends.
func start(t *testing.T, change func(*Config, *Surroundings), adjust ...func(*http.Server)) *running {
	t.Helper()
	return startOperations(t, []*operation.Operation{fakeOperation("section"), fakeOperation("depths"), fakeOperation("rating"), fakeOperation("profile"), fakeOperation("appraisal")}, change, adjust...)
}

func startOperations(t *testing.T, operations []*operation.Operation, change func(*Config, *Surroundings), adjust ...func(*http.Server)) *running {
	t.Helper()
	config, log := testConfig(t), new(logBuffer)
	around := testSurroundings(log)
	if change != nil {
		change(&config, &around)
	}
	server, err := New(config, operations, around)
	if err != nil {
		t.Fatal(err)
	}
	for _, f := range adjust {
		f(server.http)
	}
	address, err := server.Start()
	if err != nil {
		t.Fatal(err)
	}
	t.Cleanup(func() {
		if !server.unready.Load() {
			if err := server.Stop(); err != nil {
				t.Errorf("stop: %v", err)
			}
		}
		if err := <-server.Served(); !errors.Is(err, http.ErrServerClosed) {
			t.Errorf("served: %v", err)
		}
	})
	return &running{server, t, address.String(), log}
}

// dial opens a raw connection with a deadline that no test should reach.
func (r *running) dial() *net.TCPConn {
	r.t.Helper()
	c, err := net.DialTimeout("tcp", r.address, 5*time.Second)
	if err != nil {
		r.t.Fatal(err)
	}
	c.SetDeadline(time.Now().Add(30 * time.Second))
	r.t.Cleanup(func() { c.Close() })
	return c.(*net.TCPConn)
}

// client is an HTTP client whose connections end with the test.
func (r *running) client() *http.Client {
	transport := &http.Transport{DisableCompression: true}
	r.t.Cleanup(transport.CloseIdleConnections)
	return &http.Client{Transport: transport, Timeout: 30 * time.Second, CheckRedirect: func(*http.Request, []*http.Request) error { return http.ErrUseLastResponse }}
}

func newRequest(t *testing.T, method, url string) *http.Request {
	t.Helper()
	request, err := http.NewRequest(method, url, nil)
	if err != nil {
		t.Fatal(err)
	}
	return request
}

// A reply is an answer read to its end.
type reply struct {
	status int
	header http.Header
	body   []byte
}

// send sends one request and reads the answer. Headers are pairs.
func (r *running) send(method, path, body string, headers ...string) reply {
	r.t.Helper()
	request, err := http.NewRequestWithContext(context.Background(), method, r.url(path), strings.NewReader(body))
	if err != nil {
		r.t.Fatal(err)
	}
	for i := 0; i < len(headers); i += 2 {
		if headers[i+1] == "" {
			request.Header.Del(headers[i])
			continue
		}
		request.Header.Add(headers[i], headers[i+1])
	}
	response, err := r.client().Do(request)
	if err != nil {
		r.t.Fatalf("%s %s: %v", method, path, err)
	}
	defer response.Body.Close()
	text, err := io.ReadAll(response.Body)
	if err != nil {
		r.t.Fatalf("%s %s: %v", method, path, err)
	}
	return reply{response.StatusCode, response.Header, text}
}

// A seenProblem is a problem as a client reads it.
type seenProblem struct {
	Type     string `json:"type"`
	Title    string `json:"title"`
	Status   int    `json:"status"`
	Detail   string `json:"detail"`
	Instance string `json:"instance"`
	Errors   []struct {
		Pointer   *string `json:"pointer"`
		Parameter *string `json:"parameter"`
		Column    *string `json:"column"`
		Code      string  `json:"code"`
		Detail    string  `json:"detail"`
	} `json:"errors"`
}

// problem checks that a reply is a whole problem with the status and returns it.
func (r reply) problem(t *testing.T, status int) seenProblem {
	t.Helper()
	if r.status != status {
		t.Fatalf("status %d, want %d: %s", r.status, status, r.body)
	}
	if got := r.header.Get("Content-Type"); got != "application/problem+json" {
		t.Errorf("Content-Type %q", got)
	}
	if got := r.header.Get("Cache-Control"); got != "no-store" {
		t.Errorf("Cache-Control %q", got)
	}
	var p seenProblem
	if err := json.Unmarshal(r.body, &p); err != nil {
		t.Fatalf("problem %s: %v", r.body, err)
	}
	if p.Status != status || p.Type == "" || p.Title == "" || p.Detail == "" {
		t.Errorf("problem is not whole: %s", r.body)
	}
	if want := "urn:request:" + r.header.Get("Request-Id"); p.Instance != want {
		t.Errorf("instance %q, want %q", p.Instance, want)
	}
	return p
}

func TestMain(m *testing.M) {
	goleak.VerifyTestMain(m)
}
