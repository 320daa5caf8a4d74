package serve

import (
	"errors"
	"io"
	"strings"
	"syscall"
	"testing"
)

// rawRows are requests as bytes, each with its fixed outcome. Those of own false are refused by net/http before any handler runs, in plain text.
var rawRows = []struct {
	name, text string
	status     string
	own        bool
	says, not  []string
}{
	{"lower-case method", "get /livez HTTP/1.1\r\nHost: leat\r\nConnection: close\r\n\r\n", "405", true, nil, nil},
	{"no token as method", "G@T /livez HTTP/1.1\r\nHost: leat\r\n\r\n", "400", false, nil, nil},
	{"no method", " /livez HTTP/1.1\r\nHost: leat\r\n\r\n", "400", false, nil, nil},
	{"trailing slash", "GET /livez/ HTTP/1.1\r\nHost: leat\r\nConnection: close\r\n\r\n", "404", true, nil, nil},
	{"two slashes", "GET //livez HTTP/1.1\r\nHost: leat\r\nConnection: close\r\n\r\n", "404", true, nil, nil},
	{"dot segments", "GET /v1/../livez HTTP/1.1\r\nHost: leat\r\nConnection: close\r\n\r\n", "404", true, nil, nil},
	{"encoded letter", "GET /%6civez HTTP/1.1\r\nHost: leat\r\nConnection: close\r\n\r\n", "200", true, nil, nil},
	{"encoded slash", "GET /v1%2flimits HTTP/1.1\r\nHost: leat\r\nConnection: close\r\n\r\n", "200", true, nil, nil},
	{"encoded NUL", "GET /livez%00 HTTP/1.1\r\nHost: leat\r\nConnection: close\r\n\r\n", "404", true, nil, nil},
	{"bad encoding", "GET /%zz HTTP/1.1\r\nHost: leat\r\n\r\n", "400", false, nil, nil},
	{"fragment", "GET /livez#top HTTP/1.1\r\nHost: leat\r\nConnection: close\r\n\r\n", "404", true, nil, nil},
	{"query of a probe", "GET /livez?verbose HTTP/1.1\r\nHost: leat\r\nConnection: close\r\n\r\n", "200", true, nil, nil},
	{"no slash", "GET livez HTTP/1.1\r\nHost: leat\r\n\r\n", "400", false, nil, nil},
	{"space in the path", "GET /li vez HTTP/1.1\r\nHost: leat\r\n\r\n", "400", false, nil, nil},
	{"no version", "GET /livez\r\nHost: leat\r\n\r\n", "400", false, nil, nil},
	{"short version", "GET /livez HTTP/1\r\nHost: leat\r\n\r\n", "400", false, nil, nil},
	{"lower-case version", "GET /livez http/1.1\r\nHost: leat\r\n\r\n", "400", false, nil, nil},
	{"HTTP/1.2", "GET /livez HTTP/1.2\r\nHost: leat\r\nConnection: close\r\n\r\n", "200", true, nil, nil},
	{"empty line before the request", "\r\nGET /livez HTTP/1.1\r\nHost: leat\r\nConnection: close\r\n\r\n", "400", false, nil, nil},
	{"two hosts", "GET /livez HTTP/1.1\r\nHost: leat\r\nHost: other\r\n\r\n", "400", false, nil, nil},
	{"bad host", "GET /livez HTTP/1.1\r\nHost: le at\r\n\r\n", "400", false, nil, nil},
	{"empty host", "GET /livez HTTP/1.1\r\nHost:\r\nConnection: close\r\n\r\n", "200", true, nil, nil},
	{"absolute form of another host", "GET http://other/livez HTTP/1.1\r\nHost: leat\r\nConnection: close\r\n\r\n", "200", true, nil, nil},
	{"absolute form of another scheme", "GET file:///etc/passwd HTTP/1.1\r\nHost: leat\r\nConnection: close\r\n\r\n", "404", true, nil, []string{"root:"}},
	{"folded header", "GET /livez HTTP/1.1\r\nHost: leat\r\nX: a\r\n b\r\nConnection: close\r\n\r\n", "200", true, nil, nil},
	{"header without a colon", "GET /livez HTTP/1.1\r\nHost: leat\r\nnonsense\r\n\r\n", "400", false, nil, nil},
	{"header without a name", "GET /livez HTTP/1.1\r\nHost: leat\r\n: a\r\n\r\n", "400", false, nil, nil},
	{"header whose name is no token", "GET /livez HTTP/1.1\r\nHost: leat\r\nX(Y): a\r\n\r\n", "400", false, nil, nil},
	{"bare carriage return in a header", "GET /livez HTTP/1.1\r\nHost: leat\r\nX: a\rb\r\n\r\n", "400", false, nil, nil},
	{"header outside ASCII", "GET /livez HTTP/1.1\r\nHost: leat\r\nX: \xe9\r\nConnection: close\r\n\r\n", "200", true, nil, nil},
	{"escape in a request id", "GET /livez HTTP/1.1\r\nHost: leat\r\nRequest-Id: \x1b[31m\r\nConnection: close\r\n\r\n", "400", false, nil, nil},
	{"a thousand short headers", "GET /livez HTTP/1.1\r\nHost: leat\r\n" + strings.Repeat("X: a\r\n", 1000) + "Connection: close\r\n\r\n", "200", true, nil, nil},
	{"long request line", "GET /" + strings.Repeat("a", 30_000) + " HTTP/1.1\r\nHost: leat\r\n\r\n", "431", false, nil, nil},
	{"length with a plus", rawPost + "Content-Length: +2\r\n\r\n{}", "400", false, nil, nil},
	{"length in hexadecimal", rawPost + "Content-Length: 0x2\r\n\r\n{}", "400", false, nil, nil},
	{"list of lengths", rawPost + "Content-Length: 2, 2\r\n\r\n{}", "400", false, nil, nil},
	{"empty length", rawPost + "Content-Length:\r\n\r\n{}", "400", false, nil, nil},
	{"length beyond 64 bits", rawPost + "Content-Length: 99999999999999999999\r\n\r\n{}", "400", false, nil, nil},
	{"length beyond the limit", rawPost + "Content-Length: 9999999999\r\n\r\n{}", "413", true, []string{"body_bytes"}, nil},
	{"no length and no chunks", rawPost + "Connection: close\r\n\r\n", "400", true, nil, nil},
	{"chunk extension", rawPost + "Transfer-Encoding: chunked\r\n\r\n2;a=b\r\n{}\r\n0\r\n\r\n", "200", true, nil, nil},
	{"chunk length with zeros before it", rawPost + "Transfer-Encoding: chunked\r\n\r\n0002\r\n{}\r\n0\r\n\r\n", "200", true, nil, nil},
	{"chunk length beyond 64 bits", rawPost + "Transfer-Encoding: chunked\r\n\r\nfffffffffffffffff\r\n{}\r\n0\r\n\r\n", "400", true, []string{"incomplete_body"}, nil},
	{"negative chunk length", rawPost + "Transfer-Encoding: chunked\r\n\r\n-2\r\n{}\r\n0\r\n\r\n", "400", true, []string{"incomplete_body"}, nil},
	{"bare line feeds between chunks", rawPost + "Transfer-Encoding: chunked\r\n\r\n2\n{}\n0\n\n", "400", true, []string{"incomplete_body"}, nil},
	{"chunks without their end", rawPost + "Transfer-Encoding: chunked\r\n\r\n2\r\n{}\r\n", "400", true, []string{"incomplete_body"}, nil},
	{"trailer after chunks", rawPost + "Transfer-Encoding: chunked\r\n\r\n2\r\n{}\r\n0\r\nX: y\r\n\r\n", "200", true, nil, nil},
	{"chunked twice", rawPost + "Transfer-Encoding: chunked, chunked\r\n\r\n0\r\n\r\n", "501", false, nil, nil},
	{"two transfer codings", rawPost + "Transfer-Encoding: chunked\r\nTransfer-Encoding: chunked\r\n\r\n0\r\n\r\n", "501", false, nil, nil},
	{"identity as transfer coding", rawPost + "Transfer-Encoding: identity\r\nContent-Length: 2\r\n\r\n{}", "501", false, nil, nil},
	{"transfer coding with a tab before it", rawPost + "Transfer-Encoding:\tchunked\r\n\r\n2\r\n{}\r\n0\r\n\r\n", "200", true, nil, nil},
	{"chunks in HTTP/1.0", "POST /v1/depths HTTP/1.0\r\nContent-Type: application/json\r\nTransfer-Encoding: chunked\r\n\r\n2\r\n{}\r\n0\r\n\r\n", "400", true, nil, nil},
	{"unknown expectation", rawPost + "Content-Length: 2\r\nExpect: 200-ok\r\n\r\n{}", "417", false, nil, nil},
	{"GET with a body", "GET /livez HTTP/1.1\r\nHost: leat\r\nContent-Length: 2\r\nConnection: close\r\n\r\n{}", "200", true, nil, nil},
	{"HEAD of nothing", "HEAD /nothing HTTP/1.1\r\nHost: leat\r\nConnection: close\r\n\r\n", "404", true, nil, []string{"instance"}},
	{"OPTIONS of an operation", "OPTIONS /v1/depths HTTP/1.1\r\nHost: leat\r\nConnection: close\r\n\r\n", "204", true, []string{"Allow: OPTIONS, POST\r\n"}, []string{"\r\nContent-Length", "\r\nContent-Type"}},
	{"OPTIONS of a document in absolute form", "OPTIONS http://leat/version HTTP/1.1\r\nHost: leat\r\nConnection: close\r\n\r\n", "204", true, []string{"Allow: GET, HEAD, OPTIONS\r\n"}, nil},
	{"OPTIONS of nothing", "OPTIONS /nothing HTTP/1.1\r\nHost: leat\r\nConnection: close\r\n\r\n", "404", true, nil, nil},
	{"upgrade to a web socket", "GET /livez HTTP/1.1\r\nHost: leat\r\nConnection: Upgrade, close\r\nUpgrade: websocket\r\nSec-WebSocket-Version: 13\r\nSec-WebSocket-Key: AAAAAAAAAAAAAAAAAAAAAA==\r\n\r\n", "200", true, nil, []string{"101 Switching"}},
	{"range of a document", "GET /version HTTP/1.1\r\nHost: leat\r\nRange: bytes=0-1\r\nConnection: close\r\n\r\n", "200", true, []string{"engine_version"}, nil},
	{"any entity tag", "GET /version HTTP/1.1\r\nHost: leat\r\nIf-None-Match: *\r\nConnection: close\r\n\r\n", "304", true, []string{"Etag"}, []string{"engine_version"}},
	{"two media types", rawPost + "Content-Type: application/json\r\nContent-Length: 2\r\nConnection: close\r\n\r\n{}", "415", true, nil, nil},
	{"compressed body", rawPost + "Content-Encoding: gzip\r\nContent-Length: 2\r\nConnection: close\r\n\r\n{}", "415", true, []string{"Accept-Encoding: identity"}, nil},
	{"NUL in the body", rawPost + "Content-Length: 2\r\nConnection: close\r\n\r\n{\x00", "400", true, nil, nil},
	{"empty list of accepted types", rawPost + "Content-Length: 2\r\nAccept: image/webp\r\nConnection: close\r\n\r\n{}", "406", true, nil, nil},
	{"keep-alive in HTTP/1.0", "GET /livez HTTP/1.0\r\nConnection: keep-alive\r\n\r\n", "200", true, []string{"Connection: keep-alive"}, nil},
	{"start of a TLS handshake", "\x16\x03\x01\x00\x05\x01\x00\x00\x01\x00\r\n\r\n", "400", false, nil, nil},
	{"cross-site headers tell nothing of ours", "GET /version HTTP/1.1\r\nHost: leat\r\nOrigin: https://else.example\r\nConnection: close\r\n\r\n", "200", true, nil, []string{"Access-Control"}},
	{"forwarded address is not believed", "GET /version HTTP/1.1\r\nHost: leat\r\nX-Forwarded-For: 10.9.8.7\r\nForwarded: for=10.9.8.7\r\nX-HTTP-Method-Override: DELETE\r\nConnection: close\r\n\r\n", "200", true, nil, []string{"10.9.8.7"}},
}

const rawPost = "POST /v1/depths HTTP/1.1\r\nHost: leat\r\nContent-Type: application/json\r\n"

// TestRawTable: whatever is sent has one fixed answer, and what our own handlers answer bears their headers.
func TestRawTable(t *testing.T) {
	r := start(t, nil)
	for _, row := range rawRows {
		t.Run(row.name, func(t *testing.T) {
			c := r.dial()
			io.WriteString(c, row.text)
			c.CloseWrite()
			read, err := io.ReadAll(c)
			got := string(read)
			// What net/http does not read of a request that it refuses may break the connection behind its answer.
			if err != nil && (row.own || !errors.Is(err, syscall.ECONNRESET)) {
				t.Fatalf("%v after %.300q", err, got)
			}
			head, _, _ := strings.Cut(got, "\r\n\r\n")
			line, _, _ := strings.Cut(got, "\r\n")
			fields := strings.Fields(line)
			if len(fields) < 2 || !strings.HasPrefix(line, "HTTP/1.") || fields[1] != row.status {
				t.Fatalf("answer %.300q, want %s", got, row.status)
			}
			if n := strings.Count(got, "HTTP/1."); n != 1 {
				t.Errorf("%d answers: %.300q", n, got)
			}
			own := strings.Contains(head, "\r\nRequest-Id: ")
			if own != row.own {
				t.Errorf("answered by our handlers: %v, want %v: %q", own, row.own, head)
			}
			if own {
				for _, header := range []string{"X-Content-Type-Options: nosniff", "Referrer-Policy: no-referrer", "Content-Security-Policy: "} {
					if !strings.Contains(head, "\r\n"+header) {
						t.Errorf("no %s in %q", header, head)
					}
				}
				if row.status >= "400" && (!strings.Contains(head, "application/problem+json") || !strings.Contains(head, "Cache-Control: no-store")) {
					t.Errorf("no problem, or one that may be kept: %q", head)
				}
			} else if !strings.Contains(head, "\r\nConnection: close") {
				t.Errorf("the connection stays open after bytes that could not be read: %q", head)
			}
			for _, part := range row.says {
				if !strings.Contains(got, part) {
					t.Errorf("answer %.600q does not say %q", got, part)
				}
			}
			for _, part := range row.not {
				if strings.Contains(got, part) {
					t.Errorf("answer %.600q says %q", got, part)
				}
			}
		})
	}
	if len(rawRows) < 60 {
		t.Errorf("%d rows", len(rawRows))
	}
}
