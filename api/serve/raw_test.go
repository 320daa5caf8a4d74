package serve

import (
	"bufio"
	"io"
	"net/http"
	"strings"
	"testing"
	"time"
)

// exchangeRaw writes bytes to a fresh connection, closes its own direction, and reads all that comes back.
func (r *running) exchangeRaw(text string) string {
	r.t.Helper()
	return r.converse(text, true)
}

// converse can leave its own direction open: to net/http a client that closes it while an answer is made has gone.
func (r *running) converse(text string, closes bool) string {
	r.t.Helper()
	c := r.dial()
	c.SetDeadline(time.Now().Add(5 * time.Second))
	if _, err := io.WriteString(c, text); err != nil {
		r.t.Fatal(err)
	}
	if closes {
		c.CloseWrite()
	}
	got, err := io.ReadAll(c)
	if err != nil {
		r.t.Fatalf("%q: read %q, %v", text, got, err)
	}
	return string(got)
}

// What net/http refuses before any handler runs is answered by itself, in plain text; those rows pin the status line only.
func TestRawRequests(t *testing.T) {
	r := start(t, nil)
	const post = "POST /v1/depths HTTP/1.1\r\nHost: leat\r\nContent-Type: application/json\r\n"
	for _, row := range []struct {
		name, text string
		status     string   // of the first answer
		answers    int      // status lines in all
		says       []string // anywhere in what comes back
		not        []string
	}{
		{name: "plain", text: post + "Content-Length: 2\r\nConnection: close\r\n\r\n{}", status: "200 OK", answers: 1, says: []string{`"units":"si"`}},
		{name: "chunked", text: post + "Transfer-Encoding: chunked\r\nConnection: close\r\n\r\n1\r\n{\r\n1\r\n}\r\n0\r\n\r\n", status: "200 OK", answers: 1},
		{name: "two equal lengths", text: post + "Content-Length: 2\r\nContent-Length: 2\r\nConnection: close\r\n\r\n{}", status: "200 OK", answers: 1},
		{name: "two lengths", text: post + "Content-Length: 2\r\nContent-Length: 3\r\n\r\n{}", status: "400 Bad Request", answers: 1},
		{name: "negative length", text: post + "Content-Length: -2\r\n\r\n{}", status: "400 Bad Request", answers: 1},
		{name: "length and chunks: nothing after them is taken for a request", text: post + "Content-Length: 4\r\nTransfer-Encoding: chunked\r\n\r\n2\r\n{}\r\n0\r\n\r\nGET /livez HTTP/1.1\r\nHost: leat\r\n\r\n", status: "200 OK", answers: 1},
		{name: "unknown transfer coding", text: post + "Transfer-Encoding: gzip, chunked\r\n\r\n0\r\n\r\n", status: "501 Not Implemented", answers: 1},
		{name: "bad chunk length", text: post + "Transfer-Encoding: chunked\r\n\r\nzz\r\n{}\r\n0\r\n\r\n", status: "400 Bad Request", answers: 1, says: []string{"incomplete_body", "application/problem+json"}},
		{name: "chunk longer than announced", text: post + "Transfer-Encoding: chunked\r\n\r\n1\r\n{}\r\n0\r\n\r\n", status: "400 Bad Request", answers: 1, says: []string{"incomplete_body"}},
		{name: "body shorter than announced", text: post + "Content-Length: 5\r\n\r\n{}", status: "400 Bad Request", answers: 1, says: []string{"incomplete_body"}},
		{name: "bare line feeds", text: "GET /livez HTTP/1.1\nHost: leat\nConnection: close\n\n", status: "200 OK", answers: 1},
		{name: "NUL in a header", text: "GET /livez HTTP/1.1\r\nHost: leat\r\nX: a\x00b\r\n\r\n", status: "400 Bad Request", answers: 1},
		{name: "space before the colon", text: "GET /livez HTTP/1.1\r\nHost: leat\r\nX : a\r\n\r\n", status: "400 Bad Request", answers: 1},
		{name: "no host", text: "GET /livez HTTP/1.1\r\n\r\n", status: "400 Bad Request", answers: 1},
		{name: "HTTP/1.0", text: "GET /livez HTTP/1.0\r\n\r\n", status: "200 OK", answers: 1},
		{name: "HTTP/3.0", text: "GET /livez HTTP/3.0\r\nHost: leat\r\n\r\n", status: "505 HTTP Version Not Supported", answers: 1},
		{name: "absolute form", text: "GET http://leat/livez HTTP/1.1\r\nHost: leat\r\nConnection: close\r\n\r\n", status: "200 OK", answers: 1},
		{name: "header too long", text: "GET /livez HTTP/1.1\r\nHost: leat\r\nX: " + strings.Repeat("a", 30_000) + "\r\n\r\n", status: "431 Request Header Fields Too Large", answers: 1},
		{name: "HEAD", text: "HEAD /v1/limits HTTP/1.1\r\nHost: leat\r\nConnection: close\r\n\r\n", status: "200 OK", answers: 1, says: []string{"Content-Length: ", "Etag: "}, not: []string{"body_bytes"}},
		{name: "HEAD of a probe", text: "HEAD /readyz HTTP/1.1\r\nHost: leat\r\nConnection: close\r\n\r\n", status: "200 OK", answers: 1, not: []string{"ready\""}},
		{name: "HEAD of an operation", text: "HEAD /v1/depths HTTP/1.1\r\nHost: leat\r\nConnection: close\r\n\r\n", status: "405 Method Not Allowed", answers: 1, says: []string{"Allow: OPTIONS, POST", "application/problem+json"}, not: []string{"instance"}},
		{name: "OPTIONS of everything", text: "OPTIONS * HTTP/1.1\r\nHost: leat\r\nConnection: close\r\n\r\n", status: "204 No Content", answers: 1, says: []string{"Allow: GET, HEAD, OPTIONS, POST\r\n"}, not: []string{"Content-Length", "application"}},
		{name: "CONNECT", text: "CONNECT leat:80 HTTP/1.1\r\nHost: leat\r\nConnection: close\r\n\r\n", status: "404 Not Found", answers: 1, says: []string{"application/problem+json"}},
		{name: "TRACE", text: "TRACE / HTTP/1.1\r\nHost: leat\r\nCookie: secret\r\nConnection: close\r\n\r\n", status: "405 Method Not Allowed", answers: 1, says: []string{"Allow: GET, HEAD"}, not: []string{"secret"}},
		{name: "pipelining", text: "GET /livez HTTP/1.1\r\nHost: leat\r\n\r\n" + post + "Content-Length: 2\r\n\r\n{}GET /nothing HTTP/1.1\r\nHost: leat\r\nConnection: close\r\n\r\n", status: "200 OK", answers: 3, says: []string{"alive", `"units"`, "404 Not Found"}},
		{name: "a refused body is not taken for a request", text: "POST /v1/depths HTTP/1.1\r\nHost: leat\r\nContent-Length: 37\r\n\r\nGET /livez HTTP/1.1\r\nHost: leat\r\n\r\n\r\n", status: "415 Unsupported Media Type", answers: 1, not: []string{"alive"}},
		{name: "two request ids", text: "GET /livez HTTP/1.1\r\nHost: leat\r\nRequest-Id: a1\r\nRequest-Id: b2\r\nConnection: close\r\n\r\n", status: "200 OK", answers: 1, not: []string{"Request-Id: a1", "Request-Id: b2"}},
		{name: "upgrade", text: "GET /livez HTTP/1.1\r\nHost: leat\r\nConnection: Upgrade, HTTP2-Settings, close\r\nUpgrade: h2c\r\nHTTP2-Settings: AAMAAABkAAQAAP__\r\n\r\n", status: "200 OK", answers: 1},
	} {
		t.Run(row.name, func(t *testing.T) {
			got := r.exchangeRaw(row.text)
			if !strings.HasPrefix(got, "HTTP/1.1 "+row.status) && !strings.HasPrefix(got, "HTTP/1.0 "+row.status) {
				t.Errorf("answer %q, want %s", got, row.status)
			}
			if n := strings.Count(got, "HTTP/1."); n != row.answers {
				t.Errorf("%d answers, want %d: %q", n, row.answers, got)
			}
			for _, part := range row.says {
				if !strings.Contains(got, part) {
					t.Errorf("answer %q does not say %q", got, part)
				}
			}
			for _, part := range row.not {
				if strings.Contains(got, part) {
					t.Errorf("answer %q says %q", got, part)
				}
			}
		})
	}
}

func TestExpectContinue(t *testing.T) {
	r := start(t, nil)
	c := r.dial()
	in := bufio.NewReader(c)
	io.WriteString(c, "POST /v1/depths HTTP/1.1\r\nHost: leat\r\nContent-Type: application/json\r\nContent-Length: 2\r\nExpect: 100-continue\r\n\r\n")
	if line, err := in.ReadString('\n'); err != nil || line != "HTTP/1.1 100 Continue\r\n" {
		t.Fatalf("%q, %v", line, err)
	}
	in.ReadString('\n')
	io.WriteString(c, "{}")
	response, err := http.ReadResponse(in, nil)
	if err != nil || response.StatusCode != 200 {
		t.Fatalf("%v, %v", response, err)
	}
	io.Copy(io.Discard, response.Body)

	// What is refused by its header is refused before the body is asked for.
	for _, header := range []string{"Content-Type: application/json\r\nContent-Length: 9000000\r\n", "Content-Type: text/plain\r\nContent-Length: 2\r\n"} {
		c := r.dial()
		io.WriteString(c, "POST /v1/depths HTTP/1.1\r\nHost: leat\r\n"+header+"Expect: 100-continue\r\n\r\n")
		response, err := http.ReadResponse(bufio.NewReader(c), nil)
		if err != nil {
			t.Fatal(err)
		}
		if response.StatusCode != 413 && response.StatusCode != 415 {
			t.Errorf("%q: status %d", header, response.StatusCode)
		}
	}
}

func TestClientThatSendsTooMuchBeforeItReadsFindsTheProblem(t *testing.T) {
	r := start(t, nil)
	const size = 6 << 20
	c := r.dial()
	io.WriteString(c, "POST /v1/depths HTTP/1.1\r\nHost: leat\r\nContent-Type: application/json\r\nContent-Length: 6291456\r\n\r\n")
	if n, err := c.Write(make([]byte, size)); err != nil {
		t.Fatalf("wrote %d of %d bytes: %v", n, size, err)
	}
	response, err := http.ReadResponse(bufio.NewReader(c), nil)
	if err != nil {
		t.Fatal(err)
	}
	if response.StatusCode != 413 {
		t.Errorf("status %d", response.StatusCode)
	}
}

func TestSlowHeaderIsCut(t *testing.T) {
	r := start(t, nil, func(s *http.Server) { s.ReadHeaderTimeout = 200 * time.Millisecond })
	c := r.dial()
	io.WriteString(c, "POST /v1/depths HTTP/1.1\r\nHost: le")
	began := time.Now()
	if text, err := io.ReadAll(c); err != nil || len(text) > 0 || time.Since(began) > 3*time.Second {
		t.Errorf("%q, %v after %v: want the connection closed", text, err, time.Since(began))
	}
}

func TestSlowBodyIs408(t *testing.T) {
	r := start(t, nil, func(s *http.Server) { s.ReadTimeout = 200 * time.Millisecond })
	c := r.dial()
	io.WriteString(c, "POST /v1/depths HTTP/1.1\r\nHost: leat\r\nContent-Type: application/json\r\nContent-Length: 20\r\n\r\n{")
	response, err := http.ReadResponse(bufio.NewReader(c), nil)
	if err != nil {
		t.Fatal(err)
	}
	if response.StatusCode != 408 || !response.Close {
		t.Errorf("status %d, close %v", response.StatusCode, response.Close)
	}
}
