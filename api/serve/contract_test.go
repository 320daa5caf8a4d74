package serve_test

import (
	"bytes"
	"encoding/json"
	"fmt"
	"io"
	"io/fs"
	"math"
	"net/http"
	"path"
	"slices"
	"strings"
	"testing"
	"time"

	"github.com/goccy/go-yaml"

	"leat/api/operation"
	"leat/api/serve"
	"leat/openapi"
)

const (
	jsonMedia   = "application/json"
	ndjsonMedia = "application/x-ndjson"
)

// A service is a server with the operations of the contract, over a real socket, whose every answer is held to the contract.
type service struct {
	*serve.Server
	t    testing.TB
	base string
	http *http.Client
}

func startService(t testing.TB) *service {
	t.Helper()
	operations := operation.All()
	known, err := serve.KnownAnswer(operations)
	if err != nil {
		t.Fatal(err)
	}
	config := serve.Default()
	config.Listen = "127.0.0.1:0"
	config.SpoolDir = t.TempDir()
	server, err := serve.New(config, operations, serve.Surroundings{
		Log: serve.NewLog(io.Discard), Build: serve.ReadBuild(), Ready: known, Contract: openapi.YAML,
	})
	if err != nil {
		t.Fatal(err)
	}
	address, err := server.Start()
	if err != nil {
		t.Fatal(err)
	}
	transport := &http.Transport{DisableCompression: true}
	t.Cleanup(func() {
		transport.CloseIdleConnections()
		if err := server.Stop(); err != nil {
			t.Errorf("stop: %v", err)
		}
	})
	return &service{server, t, "http://" + address.String(), &http.Client{
		Transport:     &serve.ContractTransport{T: t, Next: transport},
		Timeout:       time.Minute,
		CheckRedirect: func(*http.Request, []*http.Request) error { return http.ErrUseLastResponse },
	}}
}

// send sends one request and reads its answer to the end. Headers are pairs.
func (s *service) send(method, target string, body []byte, headers ...string) (status int, header http.Header, answer []byte) {
	s.t.Helper()
	request, err := http.NewRequest(method, s.base+target, bytes.NewReader(body))
	if err != nil {
		s.t.Fatal(err)
	}
	for i := 0; i < len(headers); i += 2 {
		request.Header.Set(headers[i], headers[i+1])
	}
	response, err := s.http.Do(request)
	if err != nil {
		s.t.Fatal(err)
	}
	defer response.Body.Close()
	answer, err = io.ReadAll(response.Body)
	if err != nil {
		s.t.Fatal(err)
	}
	return response.StatusCode, response.Header, answer
}

func (s *service) post(target, media string, body []byte) (status int, answer []byte) {
	s.t.Helper()
	status, _, answer = s.send("POST", target, body, "Content-Type", media)
	return status, answer
}

// TestContractRoutes: each route is in the document, and the document has no other.
func TestContractRoutes(t *testing.T) {
	contract, err := serve.LoadContract()
	if err != nil {
		t.Fatal(err)
	}
	var said []string
	for route, item := range contract.Document.Paths.Map() {
		for method := range item.Operations() {
			said = append(said, method+" "+route)
		}
	}
	there := startService(t).RouteTable()
	slices.Sort(said)
	slices.Sort(there)
	if !slices.Equal(said, there) {
		t.Errorf("the contract has %v\nthe service has %v", said, there)
	}
}

// exampleFiles lists the examples whose name has a beginning and an end.
func exampleFiles(t *testing.T, begin, end string) []string {
	t.Helper()
	all, err := fs.ReadDir(openapi.Examples, "examples")
	if err != nil {
		t.Fatal(err)
	}
	var out []string
	for _, e := range all {
		if strings.HasPrefix(e.Name(), begin) && strings.HasSuffix(e.Name(), end) {
			out = append(out, e.Name())
		}
	}
	return out
}

func example(t *testing.T, name string) []byte {
	t.Helper()
	b, err := openapi.Examples.ReadFile(path.Join("examples", name))
	if err != nil {
		t.Fatal(err)
	}
	return b
}

func parse(t *testing.T, text []byte) any {
	t.Helper()
	var v any
	if err := json.Unmarshal(text, &v); err != nil {
		t.Fatalf("%s: %v", text, err)
	}
	return v
}

// exampleTolerance is for digits at the end of a number: the examples show what one version answered.
const exampleTolerance = 1e-12

// residualTolerance is what the residuals of the examples' balances may be, m and m3.
const residualTolerance = 1e-9

// differences lists where two JSON values differ, numbers beyond the tolerance.
func differences(at string, want, got any) []string {
	switch want := want.(type) {
	case map[string]any:
		got, ok := got.(map[string]any)
		if !ok {
			return []string{at + ": want an object"}
		}
		var out []string
		for k, w := range want {
			g, has := got[k]
			if !has {
				out = append(out, at+"/"+k+" is missing")
				continue
			}
			out = append(out, differences(at+"/"+k, w, g)...)
		}
		for k := range got {
			if _, has := want[k]; !has {
				out = append(out, at+"/"+k+" is not in the example")
			}
		}
		return out
	case []any:
		got, ok := got.([]any)
		if !ok || len(got) != len(want) {
			return []string{fmt.Sprintf("%s: want a list of %d", at, len(want))}
		}
		var out []string
		for i := range want {
			out = append(out, differences(fmt.Sprintf("%s/%d", at, i), want[i], got[i])...)
		}
		return out
	case float64:
		got, ok := got.(float64)
		if strings.Contains(at, "/balance/") && ok && math.Abs(got) <= residualTolerance {
			return nil // a residual is what rounding leaves
		}
		if !ok || !(math.Abs(got-want) <= exampleTolerance*math.Abs(want)) {
			return []string{fmt.Sprintf("%s: got %v, want %v", at, got, want)}
		}
		return nil
	}
	if got != want {
		return []string{fmt.Sprintf("%s: got %v, want %v", at, got, want)}
	}
	return nil
}

// TestContractExamples executes every example of the document: the request that it shows gets the answer that it shows.
func TestContractExamples(t *testing.T) {
	s := startService(t)
	t.Run("unary", func(t *testing.T) {
		done := 0
		for _, name := range exampleFiles(t, "", ".request.json") {
			if strings.HasPrefix(name, "problem.") {
				continue
			}
			done++
			op, _, _ := strings.Cut(name, ".")
			status, answer := s.post("/v1/"+op, jsonMedia, example(t, name))
			if status != 200 {
				t.Errorf("%s: %d %s", name, status, answer)
				continue
			}
			want := parse(t, example(t, strings.Replace(name, ".request.", ".answer.", 1)))
			for _, d := range differences("", want, parse(t, answer)) {
				t.Errorf("%s: %s", name, d)
			}
		}
		if done < 12 {
			t.Errorf("only %d examples executed", done)
		}
	})
	t.Run("bulk", func(t *testing.T) {
		names := exampleFiles(t, "bulk.", ".request.ndjson")
		if len(names) != len(operation.All()) {
			t.Fatalf("examples %v, want one for each operation", names)
		}
		for _, name := range names {
			op := strings.Split(name, ".")[1]
			status, answer := s.post("/v1/bulk/"+op, ndjsonMedia, example(t, name))
			if status != 200 {
				t.Errorf("%s: %d %s", name, status, answer)
				continue
			}
			want := bytes.Split(example(t, strings.Replace(name, ".request.", ".answer.", 1)), []byte("\n"))
			got := bytes.Split(answer, []byte("\n"))
			if len(got) != len(want) {
				t.Errorf("%s: %d lines, want %d", name, len(got)-1, len(want)-1)
				continue
			}
			for i := range len(want) - 1 {
				w, g := parse(t, want[i]).(map[string]any), parse(t, got[i]).(map[string]any)
				if w["end"] != nil {
					// The hash changes with the last digits; that it is right is judged with every stream.
					delete(w, "sha256")
					delete(g, "sha256")
				}
				for _, d := range differences("", w, g) {
					t.Errorf("%s, line %d: %s", name, i+1, d)
				}
			}
		}
	})
	t.Run("problems", func(t *testing.T) {
		names := exampleFiles(t, "problem.", ".request.json")
		if len(names) < 8 {
			t.Errorf("only %d examples", len(names))
		}
		for _, name := range names {
			var r struct {
				Method, Path, Body string
				Headers            map[string]string
				Status             int
			}
			if err := json.Unmarshal(example(t, name), &r); err != nil {
				t.Fatal(err)
			}
			var headers []string
			for k, v := range r.Headers {
				headers = append(headers, k, v)
			}
			status, _, answer := s.send(r.Method, r.Path, []byte(r.Body), headers...)
			if status != r.Status {
				t.Errorf("%s: %d %s, want %d", name, status, answer, r.Status)
				continue
			}
			want := parse(t, example(t, strings.Replace(name, ".request.", ".answer.", 1)))
			for _, d := range differences("", want, parse(t, answer)) {
				t.Errorf("%s: %s", name, d)
			}
		}
	})
}

// TestContractDocuments asks for every GET route in every form that the document has; each answer is judged on its way.
func TestContractDocuments(t *testing.T) {
	s := startService(t)
	contract, err := serve.LoadContract()
	if err != nil {
		t.Fatal(err)
	}
	got := 0
	for route, item := range contract.Document.Paths.Map() {
		if item.Get == nil {
			continue
		}
		for _, p := range item.Get.Parameters {
			if p.Value.In == "path" {
				route = strings.Replace(route, "{"+p.Value.Name+"}", p.Value.Example.(string), 1)
			}
		}
		for media := range item.Get.Responses.Status(200).Value.Content {
			status, header, body := s.send("GET", route, nil, "Accept", media)
			if status != 200 || len(body) == 0 || !strings.HasPrefix(header.Get("Content-Type"), media) {
				t.Errorf("GET %s as %s: %d %s, %d bytes", route, media, status, header.Get("Content-Type"), len(body))
			}
			got++
			if status, _, _ := s.send("HEAD", route, nil, "Accept", media); status != 200 {
				t.Errorf("HEAD %s: %d", route, status)
			}
			if item.Get.Responses.Status(304) == nil {
				continue
			}
			if tag := header.Get("ETag"); tag == "" {
				t.Errorf("GET %s as %s has no ETag", route, media)
			} else if status, _, _ := s.send("GET", route, nil, "Accept", media, "If-None-Match", tag); status != 304 {
				t.Errorf("GET %s with its ETag: %d, want 304", route, status)
			}
		}
		if item.Get.Responses.Status(406) != nil {
			if status, _, _ := s.send("GET", route, nil, "Accept", "image/png"); status != 406 {
				t.Errorf("GET %s as a picture: %d, want 406", route, status)
			}
		}
		if status, _, _ := s.send("POST", route, nil); status != 405 {
			t.Errorf("POST %s: %d, want 405", route, status)
		}
		if status, _, _ := s.send("GET", route+"/nothing", nil); status != 404 {
			t.Errorf("GET %s/nothing: %d, want 404", route, status)
		}
	}
	if got < 10 {
		t.Errorf("only %d documents asked for", got)
	}
}

// TestContractServesItself: /openapi.yaml is the document byte by byte, /openapi.json the same in JSON.
func TestContractServesItself(t *testing.T) {
	s := startService(t)
	if _, _, body := s.send("GET", "/openapi.yaml", nil); !bytes.Equal(body, openapi.YAML) {
		t.Error("/openapi.yaml is not the document")
	}
	var document any
	if err := yaml.Unmarshal(openapi.YAML, &document); err != nil {
		t.Fatal(err)
	}
	want, err := json.Marshal(document)
	if err != nil {
		t.Fatal(err)
	}
	_, _, got := s.send("GET", "/openapi.json", nil)
	for _, d := range differences("", parse(t, want), parse(t, got)) {
		t.Error(d)
	}
}

// TestContractRefusals provokes the refusals that no body is needed for, in unary and bulk; each is judged on its way.
func TestContractRefusals(t *testing.T) {
	s := startService(t)
	for _, op := range []string{"section", "depths", "rating", "profile", "appraisal"} {
		for _, row := range []struct {
			target, media string
		}{{"/v1/" + op, jsonMedia}, {"/v1/bulk/" + op, ndjsonMedia}} {
			for name, r := range map[string]struct {
				query   string
				headers []string
				status  int
			}{
				"unknown parameter": {"?nothing=1", []string{"Content-Type", row.media}, 400},
				"unknown value":     {"?detail=some&units=metric", []string{"Content-Type", row.media}, 400},
				"twice":             {"?units=si&units=us", []string{"Content-Type", row.media}, 400},
				"Accept":            {"", []string{"Content-Type", row.media, "Accept", "text/xml"}, 406},
				"no media type":     {"", nil, 415},
				"media type":        {"", []string{"Content-Type", "text/plain"}, 415},
				"charset":           {"", []string{"Content-Type", row.media + "; charset=latin1"}, 415},
				"coding":            {"", []string{"Content-Type", row.media, "Content-Encoding", "gzip"}, 415},
			} {
				if status, _, body := s.send("POST", row.target+r.query, []byte("{}"), r.headers...); status != r.status {
					t.Errorf("%s, %s: %d %s, want %d", row.target, name, status, body, r.status)
				}
			}
			if status, _, _ := s.send("GET", row.target, nil); status != 405 {
				t.Errorf("GET %s: %d, want 405", row.target, status)
			}
		}
		limit := serve.Default().BodyBytes
		if op == "profile" {
			limit = serve.Default().ProfileBytes
		}
		large := bytes.Repeat([]byte(" "), int(limit)+1)
		if status, body := s.post("/v1/"+op, jsonMedia, large); status != 413 {
			t.Errorf("a body of %d bytes: %d %s, want 413", len(large), status, body)
		}
	}
}

// TestContractLimits: the examples of the limits are the defaults.
func TestContractLimits(t *testing.T) {
	s := startService(t)
	contract, err := serve.LoadContract()
	if err != nil {
		t.Fatal(err)
	}
	_, _, body := s.send("GET", "/v1/limits", nil)
	limits := parse(t, body).(map[string]any)
	properties := contract.Document.Components.Schemas["Limits"].Value.Properties
	for name, p := range properties {
		if got, want := limits[name], p.Value.Examples[0]; got != want {
			t.Errorf("%s is %v, the contract's example %v", name, got, want)
		}
	}
	if len(limits) != len(properties) {
		t.Errorf("%d limits, the contract has %d", len(limits), len(properties))
	}
}
