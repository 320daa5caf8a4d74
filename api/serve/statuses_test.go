package serve_test

import (
	"bufio"
	"crypto/sha256"
	"encoding/hex"
	"encoding/json"
	"fmt"
	"io"
	"net"
	"net/http"
	"os"
	"path/filepath"
	"strconv"
	"strings"
	"testing"
	"time"

	"leat/api/serve"
)

// TestEveryProblemStatus provokes every status of the contract's problems with bytes on a socket. Each answer is judged by the contract, and each
// pointer in it leads to a place in the request, or to where a missing member belongs.
func TestEveryProblemStatus(t *testing.T) {
	keys := filepath.Join(t.TempDir(), "keys")
	hash := sha256.Sum256([]byte("first"))
	if err := os.WriteFile(keys, []byte("survey "+hex.EncodeToString(hash[:])+"\n"), 0o600); err != nil {
		t.Fatal(err)
	}
	s, server, waiting, release := startTroubled(t, 700*time.Millisecond, func(c *serve.Config) {
		c.TimeLimit = time.Second
		c.BodyBytes = 4 << 10
		c.HeldBytes = 3 << 10 // room for one body
		c.KeysFile = keys
	})
	defer server.Stop()
	contract, err := serve.LoadContract()
	if err != nil {
		t.Fatal(err)
	}
	address := strings.TrimPrefix(s.base, "http://")
	// say writes a request and returns the problem that comes back.
	say := func(method, target, headers, body string, length int) (int, []string) {
		t.Helper()
		connection, err := net.Dial("tcp", address)
		if err != nil {
			t.Fatal(err)
		}
		defer connection.Close()
		connection.SetDeadline(time.Now().Add(time.Minute))
		fmt.Fprintf(connection, "%s %s HTTP/1.1\r\nHost: leat\r\n%sContent-Length: %d\r\n\r\n%s", method, target, headers, length, body)
		response, err := http.ReadResponse(bufio.NewReader(connection), &http.Request{Method: method})
		if err != nil {
			t.Fatalf("%s %s: %v", method, target, err)
		}
		defer response.Body.Close()
		answer, err := io.ReadAll(response.Body)
		if err != nil {
			t.Fatal(err)
		}
		if err := contract.Answer(method, target, response.StatusCode, response.Header, answer); err != nil {
			t.Errorf("%s %s: %v", method, target, err)
		}
		var problem struct {
			Status   int
			Instance string
			Errors   []struct{ Pointer *string }
		}
		if err := json.Unmarshal(answer, &problem); err != nil || problem.Status != response.StatusCode || problem.Instance != "urn:request:"+response.Header.Get("Request-Id") {
			t.Errorf("%s %s: %v in %s", method, target, err, answer)
		}
		if response.StatusCode == 429 || response.StatusCode == 503 {
			if seconds, err := strconv.Atoi(response.Header.Get("Retry-After")); err != nil || seconds < 1 {
				t.Errorf("%d with Retry-After %q", response.StatusCode, response.Header.Get("Retry-After"))
			}
		}
		var pointers []string
		for _, e := range problem.Errors {
			if e.Pointer != nil {
				pointers = append(pointers, *e.Pointer)
			}
		}
		return response.StatusCode, pointers
	}
	const (
		key  = "Authorization: Bearer first\r\n"
		sent = key + "Content-Type: application/json\r\n"
	)
	seen := map[int]bool{}
	for _, row := range []struct {
		method, target, headers, body string
		more                          int // bytes announced beyond the body
		status                        int
		pointer                       string
	}{
		{"POST", "/v1/section", sent, `{"depth":1,"depth":2}`, 0, 400, "/depth"},
		{"POST", "/v1/section?detial=brief", sent, `{}`, 0, 400, ""},
		{"POST", "/v1/section", "Content-Type: application/json\r\n", `{}`, 0, 401, ""},
		{"GET", "/nothing", key, "", 0, 404, ""},
		{"PUT", "/v1/section", sent, `{}`, 0, 405, ""},
		{"POST", "/v1/section", sent + "Accept: image/webp\r\n", `{}`, 0, 406, ""},
		{"POST", "/v1/section", sent, `{`, 100, 408, ""},
		{"POST", "/v1/section", sent, `{"id":"` + strings.Repeat("x", 5000) + `"}`, 0, 413, ""},
		{"POST", "/v1/rating", sent, `{"kind":"critical","section":{"kind":"rectangular","bottom_width":1},"roughness":{"manning":0.02},"bed_slope":0.01,"from_depth":1,"to_depth":2,"count":20000}`, 0, 413, "/count"},
		{"POST", "/v1/section", key + "Content-Type: text/plain\r\n", `{}`, 0, 415, ""},
		{"POST", "/v1/section", sent, `{"section":{"kind":"circular","diamter":1},"depth":0.1}`, 0, 422, "/section/diamter"},
		{"POST", "/v1/section", sent, `{"section":{"kind":"circular","diameter":-1},"depths":[0.1,"x"]}`, 0, 422, "/depths/1"},
		{"POST", "/v1/depths", sent, `{"depth":1,"x":"no_solution"}`, 0, 422, "/depth"},
		{"POST", "/v1/depths", sent, `{"x":"panic"}`, 0, 500, ""},
		{"POST", "/v1/depths", sent, `{"x":"non_finite"}`, 0, 500, ""},
		{"POST", "/v1/depths", sent, `{"x":"late"}`, 0, 504, ""},
	} {
		status, pointers := say(row.method, row.target, row.headers, row.body, len(row.body)+row.more)
		seen[status] = true
		if status != row.status {
			t.Errorf("%s %s %.80s: %d, want %d", row.method, row.target, row.body, status, row.status)
		}
		found := row.pointer == ""
		for _, pointer := range pointers {
			found = found || pointer == row.pointer
			if !resolves(t, row.body, pointer) {
				t.Errorf("%.80s: the pointer %q leads nowhere", row.body, pointer)
			}
		}
		if !found {
			t.Errorf("%.80s: pointers %q, want %q among them", row.body, pointers, row.pointer)
		}
	}
	// While one body is held there is no room for another.
	done := make(chan bool)
	go func() {
		defer close(done)
		connection, err := net.Dial("tcp", address)
		if err != nil {
			t.Error(err)
			return
		}
		defer connection.Close()
		fmt.Fprintf(connection, "POST /v1/depths HTTP/1.1\r\nHost: leat\r\n%sContent-Length: 12\r\nConnection: close\r\n\r\n%s", sent, `{"x":"wait"}`)
		io.Copy(io.Discard, connection)
	}()
	<-waiting
	if status, _ := say("POST", "/v1/section", sent, "{}", 2); status != 503 {
		t.Errorf("with no room: %d, want 503", status)
	} else {
		seen[status] = true
	}
	close(release)
	<-done
	// One request a hundred seconds, and that one is spent.
	strict, strictServer, _, _ := startTroubled(t, time.Minute, func(c *serve.Config) { c.Rate, c.Burst = 0.01, 1 })
	defer strictServer.Stop()
	address = strings.TrimPrefix(strict.base, "http://")
	for range 2 {
		status, _ := say("POST", "/v1/section", sent, "[]", 2)
		seen[status] = true
	}
	for _, status := range []int{400, 401, 404, 405, 406, 408, 413, 415, 422, 429, 500, 503, 504} {
		if !seen[status] {
			t.Errorf("%d was not provoked", status)
		}
	}
}

// resolves reports whether an RFC 6901 pointer leads to a place in a JSON text, or its last part to one that a member of an object could have. A
// text whose members stand twice is read by its last ones.
func resolves(t *testing.T, text, pointer string) bool {
	t.Helper()
	var value any
	if err := json.Unmarshal([]byte(text), &value); err != nil {
		return pointer == "" // a text that is no JSON has no places
	}
	if pointer == "" {
		return true
	}
	parts := strings.Split(pointer, "/")
	for i, part := range parts[1:] {
		part = strings.NewReplacer("~1", "/", "~0", "~").Replace(part)
		switch within := value.(type) {
		case map[string]any:
			next, found := within[part]
			if !found {
				return i == len(parts)-2
			}
			value = next
		case []any:
			n, err := strconv.Atoi(part)
			if err != nil || n < 0 || n >= len(within) {
				return false
			}
			value = within[n]
		default:
			return false
		}
	}
	return parts[0] == ""
}
