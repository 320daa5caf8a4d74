package serve

import (
	"bufio"
	"bytes"
	"crypto/sha256"
	"encoding/csv"
	"encoding/hex"
	"fmt"
	"io"
	"net/http"
	"os"
	"os/exec"
	"strconv"
	"strings"
	"testing"
	"time"

	"github.com/go-json-experiment/json"
	"github.com/go-json-experiment/json/jsontext"

	"leat/api/operation"
	"leat/api/wire"
)

const (
	csvHeader     = "text/csv"
	geoJSONHeader = "application/geo+json"
	pipesHead     = "id,section_kind,section_diameter,roughness_manning,bed_slope,discharge\n"
)

// pipes are n rows of CSV after their header line.
func pipes(n int) string {
	var b strings.Builder
	b.WriteString(pipesHead)
	for i := range n {
		fmt.Fprintf(&b, "pipe %d,circular,%d.%d,0.013,0.01,0.4\n", i+1, 1+i%3, i%10)
	}
	return b.String()
}

func startReal(t *testing.T, change func(*Config, *Surroundings)) *running {
	t.Helper()
	return startOperations(t, operation.All(), change)
}

// checkAccount holds the headers or trailers of an answer to its bytes.
func checkAccount(t *testing.T, h http.Header, body []byte, lines, problems int) {
	t.Helper()
	sum := sha256.Sum256(body)
	if h.Get("Leat-Lines") != strconv.Itoa(lines) || h.Get("Leat-Problems") != strconv.Itoa(problems) || h.Get("Leat-Sha256") != hex.EncodeToString(sum[:]) {
		t.Errorf("account %v of %d lines, %d problems, hash %x", h, lines, problems, sum)
	}
}

// A short answer says beforehand how long it is and what it holds; a long one afterwards, in trailers, over HTTP/1.1 and HTTP/2.
func TestAnswersHaveTheirAccount(t *testing.T) {
	r := startReal(t, func(c *Config, _ *Surroundings) { c.MemoryBytes = 64 << 10 })
	for name, client := range map[string]*http.Client{"HTTP/1.1": r.client(), "HTTP/2": r.h2cClient()} {
		for _, accept := range []string{"", "application/json"} {
			for _, n := range []int{0, 3, 3000} {
				request := newRequest(t, "POST", r.url("/v1/bulk/depths?flat=true"))
				request.Body = io.NopCloser(strings.NewReader(pipes(n) + "bad,circular,-1,0.013,0.01,0.4\n"))
				request.Header.Set("Content-Type", csvHeader)
				if accept != "" {
					request.Header.Set("Accept", accept)
				}
				response, err := client.Do(request)
				if err != nil {
					t.Fatal(err)
				}
				body, err := io.ReadAll(response.Body)
				response.Body.Close()
				if err != nil || response.StatusCode != 200 {
					t.Fatalf("%s, %d rows: %d %v %s", name, n, response.StatusCode, err, body)
				}
				if short := n < 100; short {
					if response.ContentLength != int64(len(body)) {
						t.Errorf("%s, %d rows: Content-Length %d of %d", name, n, response.ContentLength, len(body))
					}
					checkAccount(t, response.Header, body, n+1, 1)
				} else {
					if response.ContentLength >= 0 || response.Header.Get("Leat-Lines") != "" {
						t.Errorf("%s, %d rows: %v", name, n, response.Header)
					}
					checkAccount(t, response.Trailer, body, n+1, 1)
				}
			}
		}
	}
	got := r.send("POST", "/v1/bulk/depths", "[]", "Content-Type", jsonHeader, "Request-Id", "empty-list")
	if strings.TrimSpace(string(got.body)) != "[\n]" || got.header.Get("Leat-Lines") != "0" {
		t.Errorf("%s %v", got.body, got.header)
	}
	if entry := r.log.access(t, "empty-list"); entry["lines"] != 0.0 || entry["bytes_out"] != float64(len(got.body)) {
		t.Errorf("log line %v", entry)
	}
}

// While nothing of the answer is sent, a body in which no next record can be found is refused readably, also to a client that sends
// all before it reads; a table's header line that names no members is refused as a whole.
func TestUnreadableBodiesAreRefused(t *testing.T) {
	r := startReal(t, nil)
	for _, c := range []struct {
		media, body string
		status      int
		says        string
	}{
		{jsonHeader, `[{"a":1},{"a":"]`, 400, "ends inside record 2"},
		{geoJSONHeader, `{"type":"FeatureCollection","features":[{}`, 400, "ends inside record 1"},
		{csvHeader, pipesHead + "\"x,1\n", 400, "never closed"},
		{csvHeader, "\ufeffid;section_kind;discharge\n1;box;3,5\n", 400, "semicolons"},
		{csvHeader, "id,kind,diameter,my_column\n" + strings.Repeat("1,circular,2,3\n", 3_000_000), 422, "Did you mean section_kind?"},
	} {
		conn := r.dial()
		fmt.Fprintf(conn, "POST /v1/bulk/depths HTTP/1.1\r\nHost: leat\r\nContent-Type: %s\r\nContent-Length: %d\r\n\r\n", c.media, len(c.body))
		if _, err := io.WriteString(conn, c.body); err != nil {
			t.Errorf("%s: %v", c.says, err)
			continue
		}
		response, err := http.ReadResponse(bufio.NewReader(conn), nil)
		if err != nil {
			t.Errorf("%s: %v", c.says, err)
			continue
		}
		body, _ := io.ReadAll(response.Body)
		p := reply{response.StatusCode, response.Header, body}.problem(t, c.status)
		if !strings.Contains(p.Detail, c.says) || p.Instance == "" {
			t.Errorf("%+v, want %q", p, c.says)
		}
		if c.status == 422 && (len(p.Errors) != 3 || *p.Errors[0].Column != "kind" || *p.Errors[2].Column != "my_column") {
			t.Errorf("%+v", p.Errors)
		}
	}
}

// Once bytes are sent, an answer that cannot be whole is broken off: no client can take it for a whole one.
func TestUnfinishedAnswersAreBrokenOff(t *testing.T) {
	r := startReal(t, func(c *Config, _ *Surroundings) { c.MemoryBytes = 64 << 10 })
	for name, client := range map[string]*http.Client{"HTTP/1.1": r.client(), "HTTP/2": r.h2cClient()} {
		for media, tail := range map[string]string{csvHeader: "\"open,1\n", jsonHeader: `{"a"`, geoJSONHeader: `{"a"`} {
			out, in := io.Pipe()
			request := newRequest(t, "POST", r.url("/v1/bulk/depths"))
			request.Body = out
			request.Header.Set("Content-Type", media)
			request.Header.Set("Request-Id", "cut-"+strings.NewReplacer("/", "-", "+", "-").Replace(name+media))
			begun := make(chan struct{})
			go func() {
				switch media {
				case csvHeader:
					io.WriteString(in, pipes(3000))
				case jsonHeader:
					io.WriteString(in, "["+strings.Repeat(`{"id":1},`, 3000))
				case geoJSONHeader:
					io.WriteString(in, `{"type":"FeatureCollection","features":[`+strings.Repeat(`{"type":"Feature"},`, 3000))
				}
				<-begun
				io.WriteString(in, tail)
				in.Close()
			}()
			response, err := client.Do(request)
			if err != nil {
				t.Fatalf("%s %s: %v", name, media, err)
			}
			close(begun)
			body, err := io.ReadAll(response.Body)
			response.Body.Close()
			if err == nil || len(body) == 0 || response.Trailer.Get("Leat-Lines") != "" {
				t.Errorf("%s %s: %d bytes, %v, %v: want a break", name, media, len(body), err, response.Trailer)
			}
			entry := r.log.access(t, request.Header.Get("Request-Id"))
			if !strings.HasPrefix(entry["message"].(string), "answer broken off") {
				t.Errorf("log line %v", entry)
			}
		}
	}
}

// Over HTTP/1.0, where a break looks like the end, only what is short is answered in a form without an end of its own.
func TestLongAnswersNeedALaterProtocol(t *testing.T) {
	r := startReal(t, func(c *Config, _ *Surroundings) { c.MemoryBytes = 64 << 10 })
	for n, status := range map[int]int{3: 200, 3000: 406} {
		body := pipes(n)
		conn := r.dial()
		fmt.Fprintf(conn, "POST /v1/bulk/depths HTTP/1.0\r\nHost: leat\r\nContent-Type: text/csv\r\nContent-Length: %d\r\n\r\n%s", len(body), body)
		response, err := http.ReadResponse(bufio.NewReader(conn), nil)
		if err != nil {
			t.Fatal(err)
		}
		text, err := io.ReadAll(response.Body)
		if err != nil || response.StatusCode != status || status == 406 && !bytes.Contains(text, []byte("HTTP/1.1")) {
			t.Errorf("%d rows: %d %v %.300s", n, response.StatusCode, err, text)
		}
	}
}

// A drain or a silent client ends a stream of whose answer nothing is sent by a problem that says so.
func TestHeldAnswersEndInAProblem(t *testing.T) {
	for _, reason := range []string{"draining", "request_timeout"} {
		r := startReal(t, func(c *Config, _ *Surroundings) {
			if reason == "request_timeout" {
				c.IdleLimit = time.Second
			}
		})
		out, in := io.Pipe()
		request := newRequest(t, "POST", r.url("/v1/bulk/depths"))
		request.Body = out
		request.Header.Set("Content-Type", csvHeader)
		go func() {
			io.WriteString(in, pipes(20))
			if reason == "draining" {
				time.Sleep(200 * time.Millisecond)
				go r.Stop()
			}
		}()
		response, err := r.client().Do(request)
		if err != nil {
			t.Fatalf("%s: %v", reason, err)
		}
		body, _ := io.ReadAll(response.Body)
		response.Body.Close()
		in.Close()
		status := map[string]int{"draining": 503, "request_timeout": 408}[reason]
		if p := (reply{response.StatusCode, response.Header, body}).problem(t, status); !strings.HasSuffix(p.Type, "/"+reason) {
			t.Errorf("%s: %s", reason, body)
		}
	}
}

// Ten thousand rows of which one in a hundred is bad: each answer, in each form, over a real socket, is that of the unary operation, and each bad
// row has its problem with its column.
func TestTenThousandRowsAreTheUnaryAnswers(t *testing.T) {
	const n = 10_000 / share
	text, err := os.ReadFile("../../testdata/ostermere.ndjson")
	if err != nil {
		t.Fatal(err)
	}
	var good []string // requests whose ids are texts, since those of CSV are
	for line := range strings.Lines(string(text)) {
		line = strings.TrimSpace(line)
		if _, _, problem := operation.Depths.Answer(nil, []byte(line), operation.Options{}); problem == nil && strings.HasPrefix(line, `{"id":"`) {
			good = append(good, line)
		}
	}
	table := wire.FlatTableOf(operation.Depths.Form)
	var header []string
	for _, c := range table.Columns() {
		header = append(header, c.Name)
	}
	var rows []string
	var want [][]string
	bad := 0
	for i := range n {
		row := good[i%len(good)]
		if i%100 == 42 {
			row = strings.Replace(row, `"bed_slope":`, `"bed_slope":8`, 1)
		}
		solved, problem := operation.Depths.Solve([]byte(row), operation.Options{Brief: true})
		answer := wire.FlatAnswer{ID: solved.ID, Line: int64(i + 1), Units: solved.Units, Answer: solved.Answer}
		if problem != nil {
			bad++
			answer.Answer, answer.Problem = nil, problem
		}
		cells := make([]string, len(header))
		for c := range header {
			cells[c] = string(table.AppendText(nil, &answer, c))
		}
		rows, want = append(rows, row), append(want, cells)
	}
	features := make([]string, n)
	for i, row := range rows {
		id, rest, _ := strings.Cut(row[1:], ",")
		features[i] = `{"type":"Feature",` + id + `,"geometry":null,"properties":{` + rest + `}`
	}
	r := startReal(t, nil)
	same := func(name string, i int, column, got, want string) {
		t.Helper()
		if column == "problem" {
			if (got == "") != (want == "") || want != "" && !strings.Contains(got, "bed_slope: ") {
				t.Fatalf("%s row %d: problem %q, want %q", name, i+1, got, want)
			}
		} else if got != want {
			t.Fatalf("%s row %d: %s is %s, want %s", name, i+1, column, got, want)
		}
	}
	checkTable := func(name string, got reply) {
		t.Helper()
		records, err := csv.NewReader(bytes.NewReader(got.body)).ReadAll()
		if err != nil || len(records) != n+1 || strings.Join(records[0], ",") != strings.Join(header, ",") {
			t.Fatalf("%s: %d records, %v", name, len(records), err)
		}
		for i, record := range records[1:] {
			for c, cell := range record {
				same(name, i, header[c], cell, want[i][c])
			}
		}
	}
	checkTable("NDJSON to CSV", r.send("POST", "/v1/bulk/depths", strings.Join(rows, "\n"), "Content-Type", ndjsonHeader, "Accept", csvHeader))
	got := r.send("POST", "/v1/bulk/depths", "["+strings.Join(rows, ",")+"]", "Content-Type", jsonHeader, "Accept", csvHeader)
	checkTable("array to CSV", got)
	if bad != n/100 {
		t.Fatalf("%d rows are bad", bad)
	}
	// A collection of features, 8 MB of answers: more than is held, so that it comes with trailers.
	got = r.send("POST", "/v1/bulk/depths", `{"type":"FeatureCollection","features":[`+strings.Join(features, ",")+`]}`, "Content-Type", geoJSONHeader)
	var collection struct {
		Features []struct {
			ID         string
			Properties map[string]jsontext.Value
		}
	}
	if err := json.Unmarshal(got.body, &collection, json.MatchCaseInsensitiveNames(true)); err != nil || len(collection.Features) != n {
		t.Fatalf("%d features, %v", len(collection.Features), err)
	}
	for i, f := range collection.Features {
		for c, column := range header {
			literal := string(f.Properties[column])
			switch {
			case column == "id":
				literal = f.ID
			case literal == "null":
				literal = ""
			case column == "units" && want[i][c] == "":
				continue // the request's own, where there is no answer
			case literal != "" && literal[0] == '"':
				text, _ := jsontext.AppendUnquote(nil, literal)
				literal = string(text)
			}
			same("features", i, column, literal, want[i][c])
		}
	}
}

// What clients send that GIS users and scripts have at hand.
func TestClientsAtHand(t *testing.T) {
	r := startReal(t, func(c *Config, _ *Surroundings) { c.MemoryBytes = 256 << 10 })
	need := func(t *testing.T, program string) {
		if _, err := exec.LookPath(program); err != nil {
			if os.Getenv("LEAT_ALL_PARTS") != "" {
				t.Fatalf("%s is missing", program)
			}
			t.Skipf("%s is missing, which this test is about", program)
		}
	}
	lines := func(t *testing.T, out []byte, n int) {
		t.Helper()
		if got := bytes.Count(out, []byte("\r\n")); got != n+1 || !bytes.Contains(out, []byte("\r\npipe "+strconv.Itoa(n)+","+strconv.Itoa(n)+",si,0.")) {
			t.Errorf("%d lines of %d: %.300s", got, n+1, out)
		}
	}
	url := r.url("/v1/bulk/depths")
	t.Run("curl -T -", func(t *testing.T) {
		need(t, "curl")
		c := exec.Command("curl", "-sS", "--fail-with-body", "-X", "POST", "-T", "-", "-H", "Content-Type: text/csv", url)
		c.Stdin = strings.NewReader(pipes(20_000))
		out, err := c.Output()
		if err != nil {
			t.Fatalf("%v %.300s", err, out)
		}
		lines(t, out, 20_000)
	})
	t.Run("curl --data-binary", func(t *testing.T) {
		need(t, "curl")
		c := exec.Command("curl", "-sS", "--fail-with-body", "--data-binary", "@-", "-H", "Content-Type: text/csv", url)
		c.Stdin = strings.NewReader(pipes(20_000))
		out, err := c.Output()
		if err != nil {
			t.Fatalf("%v %.300s", err, out)
		}
		lines(t, out, 20_000)
	})
	t.Run("curl notices a break", func(t *testing.T) {
		need(t, "curl")
		c := exec.Command("curl", "-sS", "-X", "POST", "-T", "-", "-o", os.DevNull, "-H", "Content-Type: text/csv", url)
		c.Stdin = strings.NewReader(pipes(20_000) + "\"never closed\n")
		if out, err := c.CombinedOutput(); err == nil {
			t.Errorf("curl took an unfinished answer for a whole one: %s", out)
		}
	})
	t.Run("urllib", func(t *testing.T) {
		need(t, "python3")
		const script = `
import json, sys, urllib.request
features = [{"type": "Feature", "id": i, "geometry": {"type": "Point", "coordinates": [i, 0]}, "properties": {"name": "ä %d" % i, "depth": "own",
  "leat_section_kind": "circular", "leat_section_diameter": 0.9, "leat_roughness_manning": 0.013, "leat_bed_slope": 0.01, "leat_discharge": 0.4}} for i in range(5000)]
body = json.dumps({"type": "FeatureCollection", "features": features}).encode()
request = urllib.request.Request(sys.argv[1] + "?prefix=leat_", body, {"Content-Type": "application/geo+json"})
with urllib.request.urlopen(request) as response:
    answer = json.load(response)
for before, after in zip(features, answer["features"], strict=True):
    assert before["id"] == after["id"] and before["geometry"] == after["geometry"]
    assert {k: after["properties"][k] for k in before["properties"]} == before["properties"]
    assert after["properties"]["leat_normal_depth"] == 0.28745873755521295 and after["properties"]["leat_problem"] is None
print(len(answer["features"]))
`
		out, err := exec.Command("python3", "-c", script, url).CombinedOutput()
		if err != nil || strings.TrimSpace(string(out)) != "5000" {
			t.Errorf("%v: %s", err, out)
		}
	})
}
