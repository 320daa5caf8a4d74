package serve

import (
	"bufio"
	"bytes"
	"context"
	"crypto/sha256"
	"encoding/hex"
	"errors"
	"fmt"
	"io"
	"net"
	"net/http"
	"strings"
	"testing"
	"time"

	"github.com/gin-gonic/gin"
	"github.com/go-json-experiment/json"
	"go.uber.org/goleak"

	"leat/api/admit"
	"leat/api/format"
	"leat/api/operation"
	"leat/api/stream"
)

const ndjsonHeader = "application/x-ndjson"

// An endLine is the last line of a stream.
type endLine struct {
	End      *bool  `json:"end"`
	Reason   string `json:"reason"`
	ResumeAt int64  `json:"resume_at"`
	Lines    int64  `json:"lines"`
	Problems int64  `json:"problems"`
	SHA256   string `json:"sha256"`
}

// checkStream holds a whole stream to the contract: an answer for each line in order, and an end line whose hash covers them.
func checkStream(t *testing.T, text []byte) endLine {
	t.Helper()
	cut := bytes.LastIndexByte(bytes.TrimSuffix(text, []byte("\n")), '\n') + 1
	var end endLine
	if err := json.Unmarshal(bytes.TrimSpace(text[cut:]), &end); err != nil || end.End == nil {
		t.Fatalf("no end line but %q: %v", text[cut:], err)
	}
	if sum := sha256.Sum256(text[:cut]); hex.EncodeToString(sum[:]) != end.SHA256 {
		t.Errorf("sha256 %s, the bytes have %x", end.SHA256, sum)
	}
	var last, lines, problems int64
	for line := range bytes.Lines(text[:cut]) {
		var answer struct {
			Line    int64 `json:"line"`
			Problem any   `json:"problem"`
			Result  any   `json:"result"`
		}
		if err := json.Unmarshal(line, &answer); err != nil {
			t.Fatalf("line %q: %v", line, err)
		}
		if answer.Line <= last || (answer.Problem == nil) == (answer.Result == nil) {
			t.Fatalf("after line %d: %s", last, line)
		}
		last = answer.Line
		lines++
		if answer.Problem != nil {
			problems++
			if bytes.Contains(line, []byte("instance")) {
				t.Errorf("a problem in bulk has an instance: %s", line)
			}
		}
	}
	if lines != end.Lines || problems != end.Problems {
		t.Errorf("%d lines and %d problems, the end says %+v", lines, problems, end)
	}
	return end
}

// openStream begins a bulk request whose body the test writes by and by.
func (r *running) openStream(client *http.Client) (io.WriteCloser, func() *http.Response) {
	r.t.Helper()
	out, in := io.Pipe()
	request, err := http.NewRequestWithContext(r.t.Context(), "POST", r.url("/v1/bulk/depths"), out)
	if err != nil {
		r.t.Fatal(err)
	}
	request.Header.Set("Content-Type", ndjsonHeader)
	type result struct {
		response *http.Response
		err      error
	}
	done := make(chan result, 1)
	go func() {
		response, err := client.Do(request)
		done <- result{response, err}
	}()
	return in, func() *http.Response {
		r.t.Helper()
		got := <-done
		if got.err != nil {
			r.t.Fatal(got.err)
		}
		r.t.Cleanup(func() { got.response.Body.Close() })
		return got.response
	}
}

func (r *running) h2cClient() *http.Client {
	var protocols http.Protocols
	protocols.SetUnencryptedHTTP2(true)
	transport := &http.Transport{Protocols: &protocols}
	r.t.Cleanup(transport.CloseIdleConnections)
	return &http.Client{Transport: transport, Timeout: 30 * time.Second}
}

func TestBulkAnswersEachLineInOrder(t *testing.T) {
	r := start(t, func(c *Config, _ *Surroundings) { c.LineBytes = 1024 })
	lines := []string{`{"id":"a"}`, ``, `{"id":"b","act":"refuse"}`, `{"id":"c","act":"panic"}`, `not json`, `{"pad":"` + strings.Repeat("x", 2000) + `"}`, "{\"id\":\"d\"}\r"}
	got := r.send("POST", "/v1/bulk/depths?units=us", strings.Join(lines, "\n"), "Content-Type", ndjsonHeader, "Request-Id", "bulk-1")
	if got.status != 200 || got.header.Get("Content-Type") != ndjsonHeader {
		t.Fatalf("%d %v", got.status, got.header)
	}
	end := checkStream(t, got.body)
	if !*end.End || end.Lines != 6 || end.Problems != 4 {
		t.Errorf("end %+v", end)
	}
	for i, start := range []string{`{"id":"a","line":1,"result":{"units":"us"`, `{"id":"b","line":3,"problem":{`, `{"id":"c","line":4,"problem":{`, `{"line":5,"problem":{`, `{"line":6,"problem":{`, `{"id":"d","line":7,"result":{`} {
		if line := strings.Split(string(got.body), "\n")[i]; !strings.HasPrefix(line, start) {
			t.Errorf("answer %d: %s", i, line)
		}
	}
	entry := r.log.access(t, "bulk-1")
	if entry["route"] != "/v1/bulk/depths" || entry["lines"] != 6.0 || entry["problems"] != 4.0 || entry["bytes_out"] != float64(len(got.body)) {
		t.Errorf("log line %v", entry)
	}
}

func TestEmptyStreamHasItsEnd(t *testing.T) {
	r := start(t, nil)
	got := r.send("POST", "/v1/bulk/depths", "", "Content-Type", ndjsonHeader)
	if end := checkStream(t, got.body); !*end.End || end.Lines != 0 {
		t.Errorf("%s", got.body)
	}
}

// Each answer must come before the next request is sent: full duplex, and nothing waits for a full batch.
func TestBulkIsFullDuplex(t *testing.T) {
	r := start(t, nil)
	for name, client := range map[string]*http.Client{"HTTP/1.1": r.client(), "h2c": r.h2cClient()} {
		t.Run(name, func(t *testing.T) {
			out, answered := r.openStream(client)
			var text bytes.Buffer
			var in *bufio.Reader
			for i := 1; i <= 20; i++ {
				fmt.Fprintf(out, "{\"id\":\"%d\"}\n", i)
				if in == nil {
					response := answered()
					if response.StatusCode != 200 || strings.HasPrefix(name, "h2") != (response.ProtoMajor == 2) {
						t.Fatalf("%s %s", response.Status, response.Proto)
					}
					in = bufio.NewReader(response.Body)
				}
				line, err := in.ReadString('\n')
				if err != nil || !strings.HasPrefix(line, fmt.Sprintf(`{"id":"%d","line":%d,`, i, i)) {
					t.Fatalf("answer %d: %q, %v", i, line, err)
				}
				text.WriteString(line)
			}
			out.Close()
			rest, err := io.ReadAll(in)
			if err != nil {
				t.Fatal(err)
			}
			if end := checkStream(t, append(text.Bytes(), rest...)); !*end.End || end.Lines != 20 {
				t.Errorf("end %+v", end)
			}
		})
	}
}

// Without full duplex net/http silently drops what it has not read of a chunked upload when the answer begins.
func TestChunkedUploadLosesNothing(t *testing.T) {
	r := start(t, nil)
	const lines = 60_000
	for name, client := range map[string]*http.Client{"HTTP/1.1": r.client(), "h2c": r.h2cClient()} {
		t.Run(name, func(t *testing.T) {
			body := strings.Repeat(`{"id":"asset in the district of Ostermere"}`+"\n", lines)
			request, err := http.NewRequest("POST", r.url("/v1/bulk/depths"), io.MultiReader(strings.NewReader(body))) // hides the length
			if err != nil {
				t.Fatal(err)
			}
			request.Header.Set("Content-Type", ndjsonHeader)
			response, err := client.Do(request)
			if err != nil {
				t.Fatal(err)
			}
			defer response.Body.Close()
			text, err := io.ReadAll(response.Body)
			if err != nil {
				t.Fatal(err)
			}
			if end := checkStream(t, text); !*end.End || end.Lines != lines {
				t.Errorf("end %+v", end)
			}
		})
	}
}

// A client that sends everything before it reads a byte: the answers are far more than sockets hold, and go through the spool.
func TestClientThatSendsAllBeforeItReads(t *testing.T) {
	r := start(t, func(c *Config, _ *Surroundings) { c.MemoryBytes = 1 << 20 })
	const lines = 60_000
	line := `{"id":"x","bytes":600}` + "\n"
	for name, framing := range map[string]string{
		"length": fmt.Sprintf("Content-Length: %d\r\n", lines*len(line)),
		"chunks": "Transfer-Encoding: chunked\r\n",
	} {
		t.Run(name, func(t *testing.T) {
			c := r.dial()
			c.SetReadBuffer(64 << 10)
			io.WriteString(c, "POST /v1/bulk/depths HTTP/1.1\r\nHost: leat\r\nContent-Type: application/x-ndjson\r\n"+framing+"\r\n")
			out := bufio.NewWriterSize(c, 256<<10)
			for i := 0; i < lines; i += 1000 {
				piece := strings.Repeat(line, 1000)
				if name == "chunks" {
					fmt.Fprintf(out, "%x\r\n%s\r\n", len(piece), piece)
				} else {
					out.WriteString(piece)
				}
			}
			if name == "chunks" {
				out.WriteString("0\r\n\r\n")
			}
			if err := out.Flush(); err != nil {
				t.Fatal(err)
			}
			waitFor(t, "answers in the spool", func() bool { return r.store.Used() > 1<<20 })
			response, err := http.ReadResponse(bufio.NewReader(c), nil)
			if err != nil {
				t.Fatal(err)
			}
			text, err := io.ReadAll(response.Body)
			if err != nil {
				t.Fatal(err)
			}
			if end := checkStream(t, text); !*end.End || end.Lines != lines || len(text) < lines*600 {
				t.Errorf("end %+v", end)
			}
			waitFor(t, "the spool to be empty", func() bool { return r.store.Used() == 0 })
		})
	}
}

func TestClientThatVanishesLeavesNothingBehind(t *testing.T) {
	r := start(t, nil)
	before := goleak.IgnoreCurrent()
	for name, vanish := range map[string]func(*net.TCPConn){
		"closed": func(c *net.TCPConn) { c.Close() },
		"reset":  func(c *net.TCPConn) { c.SetLinger(0); c.Close() },
	} {
		for state, text := range map[string]string{
			"in the middle of the body": "Transfer-Encoding: chunked\r\n\r\n" + "3\r\n{}\n\r\n" + "6\r\n{\"id\":\r\n",
			"waiting for answers":       "Content-Length: 6000000\r\n\r\n" + strings.Repeat("{\"bytes\":5000}\n", 400_000),
		} {
			t.Run(name+" "+state, func(t *testing.T) {
				c := r.dial()
				go io.WriteString(c, "POST /v1/bulk/depths HTTP/1.1\r\nHost: leat\r\nRequest-Id: "+strings.ReplaceAll(name+state, " ", "-")+"\r\nContent-Type: application/x-ndjson\r\n"+text)
				if _, err := c.Read(make([]byte, 1)); err != nil { // it runs
					t.Fatal(err)
				}
				began := time.Now()
				vanish(c)
				entry := r.log.access(t, strings.ReplaceAll(name+state, " ", "-"))
				if noticed := time.Since(began); noticed > 2*time.Second {
					t.Errorf("noticed after %v", noticed)
				}
				if entry["level"] != "WARN" || !strings.HasPrefix(entry["message"].(string), "answer broken off") {
					t.Errorf("log line %v", entry)
				}
				if err := goleak.Find(before, goleak.IgnoreTopFunction("net/http.(*Server).Serve")); err != nil {
					t.Error(err)
				}
				if used := r.store.Used(); used != 0 {
					t.Errorf("%d bytes left in the spool", used)
				}
			})
		}
	}
}

func TestDrainEndsStreamsAndLosesNothing(t *testing.T) {
	for _, protocol := range []string{"HTTP/1.1", "h2c"} {
		t.Run(protocol, func(t *testing.T) {
			r := start(t, func(c *Config, _ *Surroundings) { c.DrainDelay = 200 * time.Millisecond })
			client := r.client()
			if protocol == "h2c" {
				client = r.h2cClient()
			}
			out, answered := r.openStream(client)
			io.WriteString(out, "{}\n\n{}\n")
			response := answered()
			in := bufio.NewReader(response.Body)
			first, _ := in.ReadString('\n')
			second, err := in.ReadString('\n')
			if err != nil {
				t.Fatal(err)
			}
			slow := make(chan int, 1)
			go func() {
				response, err := http.Post(r.url("/v1/depths"), jsonHeader, strings.NewReader(`{"act":"sleep"}`))
				if err != nil {
					slow <- 0
					return
				}
				io.Copy(io.Discard, response.Body)
				response.Body.Close()
				slow <- response.StatusCode
			}()
			time.Sleep(100 * time.Millisecond) // so that it is under way
			stopped := make(chan error, 1)
			go func() { stopped <- r.Stop() }()
			waitFor(t, "the server to be unready", r.unready.Load)
			r.send("GET", "/readyz", "").problem(t, 503)
			if got := r.send("GET", "/livez", ""); got.status != 200 {
				t.Errorf("/livez while draining: %d", got.status)
			}
			rest, err := io.ReadAll(in)
			if err != nil {
				t.Fatal(err)
			}
			end := checkStream(t, []byte(first+second+string(rest)))
			if *end.End || end.Reason != "draining" || end.ResumeAt != 4 || end.Lines != 2 {
				t.Errorf("end %+v", end)
			}
			out.Close()
			if status := <-slow; status != 200 {
				t.Errorf("the unary request under way got %d", status)
			}
			if err := <-stopped; err != nil {
				t.Errorf("stop: %v", err)
			}
		})
	}
}

func TestIdleStreamIsEnded(t *testing.T) {
	r := start(t, func(c *Config, _ *Surroundings) { c.IdleLimit = time.Second })
	out, answered := r.openStream(r.client())
	io.WriteString(out, "{}\n{")
	text, err := io.ReadAll(answered().Body)
	if err != nil {
		t.Fatal(err)
	}
	if end := checkStream(t, text); *end.End || end.Reason != "idle" || end.ResumeAt != 2 {
		t.Errorf("end %+v", end)
	}
	out.Close()
}

func TestClientThatTakesNothingIsCut(t *testing.T) {
	r := start(t, func(c *Config, _ *Surroundings) { c.IdleLimit = time.Second })
	c := r.dial()
	body := strings.Repeat("{\"bytes\":100000}\n", 500)
	fmt.Fprintf(c, "POST /v1/bulk/depths HTTP/1.1\r\nHost: leat\r\nRequest-Id: stuck\r\nContent-Type: application/x-ndjson\r\nContent-Length: %d\r\n\r\n%s", len(body), body)
	entry := r.log.access(t, "stuck")
	if !strings.HasPrefix(entry["message"].(string), "answer broken off: the client takes no answers") {
		t.Errorf("log line %v", entry)
	}
	text, _ := io.ReadAll(c)
	if bytes.Contains(text, []byte(`"end":`)) || bytes.HasSuffix(text, []byte("0\r\n\r\n")) {
		t.Error("a stream that was cut looks ended")
	}
}

// What a client makes of a break: no end line, and an error from its HTTP library.
func TestBrokenBodyInTheMiddleBreaksTheAnswer(t *testing.T) {
	r := start(t, nil)
	c := r.dial()
	io.WriteString(c, "POST /v1/bulk/depths HTTP/1.1\r\nHost: leat\r\nContent-Type: application/x-ndjson\r\nTransfer-Encoding: chunked\r\n\r\n3\r\n{}\n\r\n")
	in := bufio.NewReader(c)
	response, err := http.ReadResponse(in, nil)
	if err != nil {
		t.Fatal(err)
	}
	lines := bufio.NewReader(response.Body)
	if line, err := lines.ReadString('\n'); err != nil {
		t.Fatalf("%q, %v", line, err)
	}
	io.WriteString(c, "zz\r\n")
	rest, err := io.ReadAll(lines)
	if !errors.Is(err, io.ErrUnexpectedEOF) || strings.Contains(string(rest), `"end"`) {
		t.Errorf("%q, %v: want a break without an end line", rest, err)
	}
}

func TestBrokenBodyBeforeTheAnswerIsAProblem(t *testing.T) {
	r := start(t, nil)
	got := r.converse("POST /v1/bulk/depths HTTP/1.1\r\nHost: leat\r\nContent-Type: application/x-ndjson\r\nTransfer-Encoding: chunked\r\n\r\nzz\r\n", false)
	if !strings.HasPrefix(got, "HTTP/1.1 400 ") || !strings.Contains(got, "incomplete_body") {
		t.Errorf("%q", got)
	}
}

// A refused stream is refused readably, also to a client that sends all of it before it reads.
func TestRefusedStreamFindsItsProblem(t *testing.T) {
	r := start(t, nil)
	c := r.dial()
	body := strings.Repeat("{}\n", 10_000_000)
	fmt.Fprintf(c, "POST /v1/bulk/depths HTTP/1.1\r\nHost: leat\r\nContent-Type: text/plain\r\nContent-Length: %d\r\n\r\n", len(body))
	if _, err := io.WriteString(c, body); err != nil {
		t.Fatal(err)
	}
	response, err := http.ReadResponse(bufio.NewReader(c), nil)
	if err != nil || response.StatusCode != 415 {
		t.Fatalf("%v, %v", response, err)
	}
}

// The connection of a stream with a length may be used again; one of chunks is closed.
func TestConnectionAfterAStream(t *testing.T) {
	r := start(t, nil)
	got := r.converse("POST /v1/bulk/depths HTTP/1.1\r\nHost: leat\r\nContent-Type: application/x-ndjson\r\nTransfer-Encoding: chunked\r\n\r\n3\r\n{}\n\r\n0\r\n\r\nGET /livez HTTP/1.1\r\nHost: leat\r\n\r\n", false)
	if n := strings.Count(got, "HTTP/1.1 200 OK"); n != 1 || !strings.Contains(got, "Connection: close") {
		t.Errorf("%d answers: %q", n, got)
	}
	// Many short streams on kept connections: the reader of the next request must not meet that of the last body.
	client := r.client()
	for i := range 200 {
		response, err := client.Post(r.url("/v1/bulk/depths"), ndjsonHeader, strings.NewReader(strings.Repeat("{}\n", 1+i%50)))
		if err != nil {
			t.Fatal(err)
		}
		text, err := io.ReadAll(response.Body)
		response.Body.Close()
		if err != nil {
			t.Fatal(err)
		}
		checkStream(t, text)
	}
	if strings.Contains(r.log.String(), "invalid concurrent Body.Read") {
		t.Error(r.log.String())
	}
}

// breakingWriter has a run panic in its writer when the third answer is due.
func breakingWriter(open func(io.Reader) format.Stream) func(io.Reader) format.Stream {
	return func(body io.Reader) format.Stream {
		run := open(body)
		run.Writer = &brokenWriter{Writer: run.Writer}
		return run
	}
}

type brokenWriter struct {
	stream.Writer
	n int
}

func (w *brokenWriter) Answer(dst, answer []byte) []byte {
	if w.n++; w.n == 3 {
		panic("the writer breaks, as asked")
	}
	return w.Writer.Answer(dst, answer)
}

// serveRoute puts one handler behind the server's own middleware, over a real socket.
func (r *running) serveRoute(handle gin.HandlerFunc) string {
	engine := gin.New()
	engine.Use(r.observe(map[string]bool{}), r.recover)
	engine.POST("/route", handle)
	listener, err := net.Listen("tcp", "127.0.0.1:0")
	if err != nil {
		r.t.Fatal(err)
	}
	server := &http.Server{Handler: engine, ErrorLog: r.Server.http.ErrorLog}
	go server.Serve(listener)
	r.t.Cleanup(func() { server.Shutdown(context.Background()) })
	return "http://" + listener.Addr().String() + "/route"
}

func TestPanicAfterBytesBreaksTheAnswer(t *testing.T) {
	r := start(t, nil)
	for name, handle := range map[string]gin.HandlerFunc{
		"unary": func(c *gin.Context) {
			io.WriteString(c.Writer, `{"half":`)
			c.Writer.Flush()
			panic("in the middle")
		},
		"stream": func(c *gin.Context) {
			control := http.NewResponseController(c.Writer)
			if err := control.EnableFullDuplex(); err != nil {
				panic(err)
			}
			form, problem := format.New(fakeOperation("depths"), operation.Options{}, format.Choice{}, 1024)
			if problem != nil {
				panic(problem)
			}
			r.pump(c, control, breakingWriter(form.Open), func(int) *admit.Hold { return r.admission.pool.Hold(admit.Bulk) }, format.NDJSON, nil)
		},
	} {
		t.Run(name, func(t *testing.T) {
			out, in := io.Pipe()
			go func() {
				for range 100 {
					io.WriteString(in, "{}\n")
					time.Sleep(time.Millisecond)
				}
				in.Close()
			}()
			request := newRequest(t, "POST", r.serveRoute(handle))
			request.Body = out
			request.Header.Set("Request-Id", "broken-"+name)
			response, err := r.client().Do(request)
			if err != nil {
				t.Fatal(err)
			}
			defer response.Body.Close()
			text, err := io.ReadAll(response.Body)
			if err == nil || len(text) == 0 || strings.Contains(string(text), `"end":`) {
				t.Errorf("the client read %q, %v: want half an answer and an error", text, err)
			}
			entry := r.log.access(t, "broken-"+name)
			if !strings.HasPrefix(entry["message"].(string), "answer broken off") {
				t.Errorf("log line %v", entry)
			}
			if !strings.Contains(r.log.String(), "stack") {
				t.Error("the panic is not logged")
			}
		})
	}
}

func TestUnaryOverH2C(t *testing.T) {
	r := start(t, nil)
	response, err := r.h2cClient().Post(r.url("/v1/depths"), jsonHeader, strings.NewReader(`{}`))
	if err != nil {
		t.Fatal(err)
	}
	defer response.Body.Close()
	if text, _ := io.ReadAll(response.Body); response.StatusCode != 200 || response.ProtoMajor != 2 || len(text) == 0 {
		t.Errorf("%s %s %s", response.Proto, response.Status, text)
	}
}
