package serve

import (
	"bytes"
	"io"
	"net/http/httptest"
	"strings"
	"testing"

	"github.com/go-json-experiment/json"
	"github.com/go-json-experiment/json/jsontext"

	"leat/api/operation"
	"leat/api/site"
	"leat/api/wire"
)

func TestDocuments(t *testing.T) {
	r := start(t, nil)
	for path, media := range map[string]string{
		"/": "text/html; charset=utf-8", "/v1/limits": "application/json", "/v1/units": "application/json",
		"/docs/problems": "text/html; charset=utf-8", "/docs/problems/saturated": "text/html; charset=utf-8",
		"/version": "application/json", "/openapi.yaml": "application/yaml", "/openapi.json": "application/json",
	} {
		got := r.send("GET", path, "")
		if got.status != 200 || got.header.Get("Content-Type") != media || len(got.body) == 0 {
			t.Fatalf("%s: %d %v", path, got.status, got.header)
		}
		if media == "application/json" && !jsontext.Value(got.body).IsValid() {
			t.Errorf("%s is no JSON: %s", path, got.body)
		}
		tag := got.header.Get("Etag")
		if tag == "" || got.header.Get("Cache-Control") == "" {
			t.Errorf("%s: header %v", path, got.header)
		}
		if head := r.send("HEAD", path, ""); head.status != 200 || len(head.body) != 0 || head.header.Get("Content-Length") != got.header.Get("Content-Length") {
			t.Errorf("HEAD %s: %d %v", path, head.status, head.header)
		}
		for _, known := range []string{tag, "W/" + tag, `"other", ` + tag, "*"} {
			if again := r.send("GET", path, "", "If-None-Match", known); again.status != 304 || len(again.body) != 0 || again.header.Get("Etag") != tag {
				t.Errorf("%s If-None-Match %s: %d", path, known, again.status)
			}
		}
		if again := r.send("GET", path, "", "If-None-Match", `"other"`); again.status != 200 {
			t.Errorf("%s with another tag: %d", path, again.status)
		}
		if again := r.send("GET", path+"?campaign=1", ""); again.status != 200 {
			t.Errorf("%s with a query: %d", path, again.status)
		}
	}
}

func TestPageByAccept(t *testing.T) {
	r := start(t, nil)
	for accept, media := range map[string]string{
		"": "text/html; charset=utf-8", "*/*": "text/html; charset=utf-8",
		"application/json": "application/json", "application/json, text/html;q=0.9": "application/json",
		"text/html,application/xhtml+xml,application/xml;q=0.9,*/*;q=0.8": "text/html; charset=utf-8",
	} {
		got := r.send("GET", "/", "", "Accept", accept)
		if got.header.Get("Content-Type") != media || got.header.Get("Vary") != "Accept, Accept-Encoding" {
			t.Errorf("Accept %q: %v", accept, got.header)
		}
	}
}

// The type of every problem is the address of its page; other names there are problems themselves.
func TestProblemTypesLeadToTheirPages(t *testing.T) {
	r := start(t, nil)
	for _, kind := range wire.ProblemTypes() {
		got := r.send("GET", kind.Reference(), "")
		if got.status != 200 || got.header.Get("Content-Type") != "text/html; charset=utf-8" || !strings.Contains(string(got.body), kind.Title) ||
			got.header.Get("Content-Security-Policy") != site.ContentSecurityPolicy() {
			t.Errorf("%s: %d %v", kind.Reference(), got.status, got.header)
		}
	}
	for _, path := range []string{"/docs/problems/dry_ditch", "/docs/problems/", "/docs/problems/saturated/", "/docs/problems/saturated/x", "/docs/problems/%2e%2e", "/docs/problems/Saturated"} {
		got := r.send("GET", path, "")
		if got.status != 404 || got.header.Get("Content-Type") != "application/problem+json" {
			t.Errorf("%s: %d %v", path, got.status, got.header)
		}
	}
	for _, path := range []string{"/docs/problems", "/docs/problems/saturated"} {
		if got := r.send("POST", path, ""); got.status != 405 || got.header.Get("Allow") != "GET, HEAD, OPTIONS" {
			t.Errorf("POST %s: %d %v", path, got.status, got.header)
		}
		if got := r.send("GET", path, "", "Accept", "application/json"); got.status != 406 {
			t.Errorf("%s as JSON: %d", path, got.status)
		}
	}
	if got := r.send("GET", "/metrics", ""); !strings.Contains(string(got.body), `route="/docs/problems/:name"`) || strings.Contains(string(got.body), "dry_ditch") {
		t.Error("the metrics do not have the page's route, or have a caller's value")
	}
}

// The links of the page and of its JSON form all lead somewhere.
func TestLinksLeadSomewhere(t *testing.T) {
	r := start(t, nil)
	var links struct {
		Links []struct{ Href, Method string }
	}
	if err := json.Unmarshal(site.Links(), &links, json.MatchCaseInsensitiveNames(true)); err != nil {
		t.Fatal(err)
	}
	if len(links.Links) < 10 {
		t.Fatalf("%d links", len(links.Links))
	}
	for _, link := range links.Links {
		method, wrong := link.Method, 405
		if method == "" {
			method, wrong = "GET", 404
		}
		got := r.send(method, link.Href, "")
		if got.status == 404 || got.status == wrong {
			t.Errorf("%s %s: %d", method, link.Href, got.status)
		}
	}
	for _, piece := range bytes.Split(site.Page(), []byte(`href="`))[1:] {
		href, _, _ := bytes.Cut(piece, []byte(`"`))
		if got := r.send("GET", string(href), ""); got.status != 200 {
			t.Errorf("%s: %d", href, got.status)
		}
	}
}

func TestPageNeedsNothingFromOutside(t *testing.T) {
	page := string(site.Page())
	for _, forbidden := range []string{"<script", "src=", "@import", "url(", "https://", "style=", "<link"} {
		if strings.Contains(page, forbidden) {
			t.Errorf("the page holds %q", forbidden)
		}
	}
	for _, needed := range []string{"curl", "/v1/depths", "local codes", "licensed engineer", "barrel", "/v1/limits", "/v1/units", "/openapi.yaml"} {
		if !strings.Contains(page, needed) {
			t.Errorf("the page does not say %q", needed)
		}
	}
	r := start(t, nil)
	if got := r.send("GET", "/", "").header.Get("Content-Security-Policy"); got != site.ContentSecurityPolicy() || !strings.Contains(got, "style-src 'sha256-") {
		t.Errorf("policy %q", got)
	}
}

// The request that the page shows is one that works.
func TestPageShowsARequestThatWorks(t *testing.T) {
	_, rest, found := strings.Cut(string(site.Page()), "/v1/depths -d '")
	body, _, ended := strings.Cut(rest, "'")
	if !found || !ended {
		t.Fatal("no request on the page")
	}
	answer, _, problem := operation.Depths.Answer(nil, []byte(body), operation.Options{})
	if problem != nil || !strings.Contains(string(answer), `"normal_depth":0.8`) {
		t.Errorf("%s: %s, %v", body, answer, problem)
	}
}

func TestLimitsAreThoseOfTheConfig(t *testing.T) {
	r := start(t, func(c *Config, _ *Surroundings) { c.BodyBytes, c.LineBytes, c.ArrayItems, c.Points = 4096, 2048, 7, 9 })
	var got map[string]float64
	if err := json.Unmarshal(r.send("GET", "/v1/limits", "").body, &got); err != nil {
		t.Fatal(err)
	}
	for name, want := range map[string]float64{"body_bytes": 4096, "line_bytes": 2048, "array_items": 7, "points": 9, "time_limit_seconds": 10} {
		if got[name] != want {
			t.Errorf("%s = %v, want %v", name, got[name], want)
		}
	}
}

// The limits of profiles are shown where profiles are served.
func TestLimitsOfLongOperations(t *testing.T) {
	long := *fakeOperation("profile")
	long.Long = true
	for _, operations := range [][]*operation.Operation{{fakeOperation("depths")}, {&long}} {
		config := testConfig(t)
		config.ProfileBytes, config.BodyBytes = 4000, 2000
		server, err := New(config, operations, testSurroundings(io.Discard))
		if err != nil {
			t.Fatal(err)
		}
		recorder := httptest.NewRecorder()
		server.http.Handler.ServeHTTP(recorder, httptest.NewRequest("GET", "/v1/limits", nil))
		if shown := strings.Contains(recorder.Body.String(), `"profile_body_bytes": 4000`); shown != operations[0].Long {
			t.Errorf("%s: %s", operations[0].Name, recorder.Body)
		}
		request := httptest.NewRequest("POST", "/v1/"+operations[0].Name, strings.NewReader("{}"+strings.Repeat(" ", 3000)))
		request.Header.Set("Content-Type", jsonHeader)
		recorder = httptest.NewRecorder()
		server.http.Handler.ServeHTTP(recorder, request)
		if (recorder.Code == 200) != operations[0].Long {
			t.Errorf("%s: %d %s", operations[0].Name, recorder.Code, recorder.Body)
		}
	}
}

func TestYAMLToJSONKeepsOrderAndKinds(t *testing.T) {
	got, err := yamlToJSON([]byte("b: 1\na: [x, 1.5, true, null, '200', 1e-100]\n200:\n  z: >\n    folded\n    text\n  y: 0.5\n"))
	if err != nil {
		t.Fatal(err)
	}
	value := jsontext.Value(got)
	if err := value.Compact(); err != nil {
		t.Fatal(err)
	}
	const want = `{"b":1,"a":["x",1.5,true,null,"200",1e-100],"200":{"z":"folded text\n","y":0.5}}`
	if string(value) != want {
		t.Errorf("got  %s\nwant %s", value, want)
	}
}
