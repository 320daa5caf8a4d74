package serve

import (
	"bytes"
	"crypto/sha256"
	"encoding/hex"
	"encoding/json"
	"errors"
	"fmt"
	"io"
	"mime"
	"net/http"
	"net/url"
	"path"
	"regexp"
	"slices"
	"strconv"
	"strings"
	"sync"
	"testing"
	"time"

	"github.com/getkin/kin-openapi/openapi3"
	"github.com/goccy/go-yaml"
	"github.com/santhosh-tekuri/jsonschema/v6"

	"leat/openapi"
)

// A Contract judges by the OpenAPI document what the service says and what it is sent. kin-openapi reads the document; its schemas, which
// are JSON Schema 2020-12 in OpenAPI 3.1, are compiled once by santhosh-tekuri/jsonschema (which kin-openapi uses too, but afresh for
// every value and not for all keywords). What belongs to a route, a status and a media type is compared here, so that the
// judge shares no code with what it judges.
type Contract struct {
	Document *openapi3.T
	mutex    sync.Mutex
	compiler *jsonschema.Compiler
	compiled map[string]*jsonschema.Schema
}

// LoadContract loads the document once.
var LoadContract = sync.OnceValues(func() (*Contract, error) {
	document, err := openapi3.NewLoader().LoadFromData(openapi.YAML)
	if err != nil {
		return nil, err
	}
	var plain any
	if err := yaml.Unmarshal(openapi.YAML, &plain); err != nil {
		return nil, err
	}
	text, err := json.Marshal(plain)
	if err != nil {
		return nil, err
	}
	resource, err := jsonschema.UnmarshalJSON(bytes.NewReader(text))
	if err != nil {
		return nil, err
	}
	compiler := jsonschema.NewCompiler()
	compiler.DefaultDraft(jsonschema.Draft2020)
	compiler.AssertFormat()
	if err := compiler.AddResource("contract:", resource); err != nil {
		return nil, err
	}
	return &Contract{Document: document, compiler: compiler, compiled: map[string]*jsonschema.Schema{}}, nil
})

// judge says what keeps a JSON value from the schema at a place of the document, a JSON Pointer in parts.
func (c *Contract) judge(value any, place ...string) error {
	c.mutex.Lock()
	defer c.mutex.Unlock()
	pointer := "contract:#"
	for _, part := range place {
		pointer += "/" + url.PathEscape(strings.NewReplacer("~", "~0", "/", "~1").Replace(part))
	}
	schema := c.compiled[pointer]
	if schema == nil {
		var err error
		if schema, err = c.compiler.Compile(pointer); err != nil {
			return err
		}
		c.compiled[pointer] = schema
	}
	return schema.Validate(value)
}

// anyName is a part of a path that stands for any.
var anyName = regexp.MustCompile(`:(\w+)`)

// RouteTable lists the routes of a server as METHOD path, in the contract's way to write them.
func (s *Server) RouteTable() []string {
	var out []string
	for _, r := range s.routes {
		out = append(out, r.method+" "+anyName.ReplaceAllString(r.path, "{$1}"))
	}
	return out
}

// ReadWithin shortens the time for a request to arrive; it must be called before Start.
func (s *Server) ReadWithin(limit time.Duration) { s.http.ReadTimeout = limit }

// Schema says what keeps a JSON value from a schema of the document, by the schema's name.
func (c *Contract) Schema(name string, value any) error {
	return c.judge(value, "components", "schemas", name)
}

// route returns the path of the document that a path of a request is one of: itself, or one with a part in braces.
func (c *Contract) route(path string) string {
	for template := range c.Document.Paths.Map() {
		head, _, braced := strings.Cut(template, "{")
		rest, within := strings.CutPrefix(path, head)
		if braced && within && rest != "" && !strings.Contains(rest, "/") {
			return template
		}
	}
	return path
}

// Answer says what in an answer the contract does not have: to a method and target (path and query) with a status, header and body.
// A bulk body must be whole, its end line right.
func (c *Contract) Answer(method, target string, status int, header http.Header, body []byte) error {
	address, err := url.ParseRequestURI(target)
	if err != nil {
		return err
	}
	if header.Get("Request-Id") == "" {
		return errors.New("no Request-Id")
	}
	route := c.route(address.Path)
	item := c.Document.Paths.Value(route)
	if item == nil {
		if status != http.StatusNotFound {
			return fmt.Errorf("the contract has no path %s, and the status is %d", address.Path, status)
		}
		return c.problem(status, header, body)
	}
	head := method == http.MethodHead
	if head {
		method = http.MethodGet
	}
	operation := item.GetOperation(knownMethod(method))
	if operation == nil {
		if status != http.StatusMethodNotAllowed {
			return fmt.Errorf("the contract has no %s %s, and the status is %d", method, address.Path, status)
		}
		if header.Get("Allow") == "" {
			return errors.New("405 without Allow")
		}
		if head {
			return nil
		}
		return c.problem(status, header, body)
	}
	response := operation.Responses.Status(status)
	if response == nil {
		return fmt.Errorf("%s %s: the contract has no status %d: %s", method, address.Path, status, body)
	}
	for name, h := range response.Value.Headers {
		if h.Value.Required && header.Get(name) == "" {
			return fmt.Errorf("%s %s: %d without %s", method, address.Path, status, name)
		}
	}
	if status == http.StatusServiceUnavailable && header.Get("Retry-After") == "" {
		return errors.New("503 without Retry-After")
	}
	if head || status == http.StatusNotModified {
		if len(body) > 0 {
			return fmt.Errorf("%s %s: %d with a body", method, address.Path, status)
		}
		return nil
	}
	if status >= 400 {
		if response.Value.Content.Get("application/problem+json") == nil {
			return fmt.Errorf("%s %s: the contract has no problem for %d", method, address.Path, status)
		}
		return c.problem(status, header, body)
	}
	kind, parameters, err := mime.ParseMediaType(header.Get("Content-Type"))
	if err != nil {
		return fmt.Errorf("Content-Type %q: %w", header.Get("Content-Type"), err)
	}
	if charset := parameters["charset"]; charset != "" && !strings.EqualFold(charset, "utf-8") {
		return fmt.Errorf("charset %s", charset)
	}
	if response.Value.Content[kind] == nil {
		return fmt.Errorf("%s %s: the contract has no %s for %d", method, address.Path, kind, status)
	}
	place := []string{"paths", route, strings.ToLower(method), "responses", strconv.Itoa(status), "content", kind, "schema"}
	var value any
	switch kind {
	case "application/json", "application/geo+json":
		if value, err = decode(body); err == nil && kind == "application/json" {
			value = unprefixed(value, address.Query().Get("prefix"))
		}
	case "application/yaml":
		err = yaml.Unmarshal(body, &value)
	case "application/x-ndjson":
		if address.Query().Get("flat") == "true" {
			return c.rows(place, path.Base(route), address.Query().Get("prefix"), body)
		}
		return c.stream(place, body)
	default:
		value = string(body)
	}
	if err != nil {
		return err
	}
	if err := c.judge(value, place...); err != nil {
		return fmt.Errorf("%s %s, %d: %w", method, address.Path, status, err)
	}
	return nil
}

// problem judges a problem document and that it names the status it came with.
func (c *Contract) problem(status int, header http.Header, body []byte) error {
	if kind := header.Get("Content-Type"); kind != "application/problem+json" {
		return fmt.Errorf("status %d with Content-Type %q", status, kind)
	}
	value, err := decode(body)
	if err != nil {
		return err
	}
	if err := c.Schema("Problem", value); err != nil {
		return err
	}
	object := value.(map[string]any)
	if object["status"] != float64(status) {
		return fmt.Errorf("status %d with a problem of status %v", status, object["status"])
	}
	if instance, _ := object["instance"].(string); !strings.HasSuffix(instance, header.Get("Request-Id")) {
		return fmt.Errorf("instance %q of the request %q", instance, header.Get("Request-Id"))
	}
	return faults(object)
}

// faults holds the rule that no schema says: a fault is at one place.
func faults(problem map[string]any) error {
	list, _ := problem["errors"].([]any)
	for i, e := range list {
		fault := e.(map[string]any)
		_, pointer := fault["pointer"]
		_, parameter := fault["parameter"]
		_, column := fault["column"]
		if places := []bool{pointer, parameter, column}; len(slices.DeleteFunc(places, func(has bool) bool { return !has })) != 1 {
			return fmt.Errorf("errors/%d has pointer %t, parameter %t, column %t: want one of them", i, pointer, parameter, column)
		}
	}
	return nil
}

// unprefixed returns rows with the names that the contract has: those that bear a prefix, without it.
func unprefixed(value any, prefix string) any {
	if prefix == "" {
		return value
	}
	switch value := value.(type) {
	case []any:
		for i := range value {
			value[i] = unprefixed(value[i], prefix)
		}
	case map[string]any:
		out := map[string]any{}
		for name, member := range value {
			if rest, found := strings.CutPrefix(name, prefix); found {
				out[rest] = member
			}
		}
		return out
	}
	return value
}

// rows judges a bulk answer of flat rows: every line by the schema of the operation's, the end line's counts and hash.
func (c *Contract) rows(place []string, operation, prefix string, body []byte) error {
	end := slices.Concat(place, []string{"contentSchema", "oneOf", "1"})
	lines := bytes.SplitAfter(bytes.TrimSuffix(body, []byte("\n")), []byte("\n"))
	last := lines[len(lines)-1]
	problems := 0
	for _, text := range lines[:len(lines)-1] {
		value, err := decode(text)
		if err != nil {
			return fmt.Errorf("%s: %w", text, err)
		}
		value = unprefixed(value, prefix)
		if err := c.Schema(strings.ToUpper(operation[:1])+operation[1:]+"Row", value); err != nil {
			return fmt.Errorf("%s: %w", text, err)
		}
		if value.(map[string]any)["problem"] != nil {
			problems++
		}
	}
	value, err := decode(last)
	if err != nil {
		return fmt.Errorf("%s: %w", last, err)
	}
	if err := c.judge(value, end...); err != nil {
		return fmt.Errorf("%s: %w", last, err)
	}
	sum := sha256.Sum256(body[:len(body)-len(last)-1])
	if object := value.(map[string]any); object["lines"] != float64(len(lines)-1) || object["problems"] != float64(problems) || object["sha256"] != hex.EncodeToString(sum[:]) {
		return fmt.Errorf("end line %s after %d rows, %d problems", last, len(lines)-1, problems)
	}
	return nil
}

// stream judges a bulk answer: every line by its schema, the numbers of the lines rising, the end line's counts and hash.
func (c *Contract) stream(place []string, body []byte) error {
	answer := slices.Concat(place, []string{"contentSchema", "oneOf", "0"})
	end := slices.Concat(place, []string{"contentSchema", "oneOf", "1"})
	if !bytes.HasSuffix(body, []byte("\n")) {
		return errors.New("the last line has no end")
	}
	lines := bytes.SplitAfter(body, []byte("\n"))
	lines = lines[:len(lines)-1] // what is behind the last line's end: nothing
	last := lines[len(lines)-1]
	answers, problems, before := 0, 0, 0.0
	for _, text := range lines[:len(lines)-1] {
		value, err := decode(text)
		if err != nil {
			return fmt.Errorf("%s: %w", text, err)
		}
		if err := c.judge(value, answer...); err != nil {
			return fmt.Errorf("%s: %w", text, err)
		}
		object := value.(map[string]any)
		problem, refused := object["problem"].(map[string]any)
		if _, solved := object["result"]; solved == refused {
			return fmt.Errorf("%s: want one of result and problem", text)
		}
		if refused {
			problems++
			if _, has := problem["instance"]; has {
				return fmt.Errorf("%s: a problem in bulk has an instance", text)
			}
			if err := faults(problem); err != nil {
				return err
			}
		}
		if line := object["line"].(float64); line > before {
			before = line
		} else {
			return fmt.Errorf("%s: line %v after %v", text, line, before)
		}
		answers++
	}
	value, err := decode(last)
	if err != nil {
		return fmt.Errorf("%s: %w", last, err)
	}
	if err := c.judge(value, end...); err != nil {
		return fmt.Errorf("%s: %w", last, err)
	}
	sum := sha256.Sum256(body[:len(body)-len(last)])
	object := value.(map[string]any)
	if object["lines"] != float64(answers) || object["problems"] != float64(problems) || object["sha256"] != hex.EncodeToString(sum[:]) {
		return fmt.Errorf("end line %s after %d lines, %d problems, hash %x", last, answers, problems, sum)
	}
	_, reason := object["reason"]
	_, resume := object["resume_at"]
	if stopped := object["end"] == false; stopped != reason || stopped != resume {
		return fmt.Errorf("end line %s: reason and resume_at belong to a stop", last)
	}
	return nil
}

// knownMethod keeps kin-openapi from a panic over methods that it does not know.
func knownMethod(method string) string {
	switch method {
	case http.MethodGet, http.MethodPost, http.MethodPut, http.MethodPatch, http.MethodDelete, http.MethodOptions, http.MethodTrace:
		return method
	}
	return http.MethodTrace // which no route has
}

// decode reads one JSON value with nothing behind it.
func decode(body []byte) (any, error) {
	var value any
	d := json.NewDecoder(bytes.NewReader(body))
	if err := d.Decode(&value); err != nil {
		return nil, err
	}
	if _, err := d.Token(); err != io.EOF {
		return nil, errors.New("more than one JSON value")
	}
	return value, nil
}

// A ContractTransport is an http.RoundTripper that holds every whole answer to the contract and fails the test where they differ.
// An answer is judged when its reader reaches its end; one that is cut or closed before is not.
type ContractTransport struct {
	T    testing.TB
	Next http.RoundTripper
}

// RoundTrip sends the request on and has the answer judged as it is read.
func (c *ContractTransport) RoundTrip(request *http.Request) (*http.Response, error) {
	c.T.Helper()
	contract, err := LoadContract()
	if err != nil {
		return nil, err
	}
	response, err := c.Next.RoundTrip(request)
	if err != nil {
		return nil, err
	}
	method, target := request.Method, request.URL.RequestURI()
	response.Body = &judgedBody{ReadCloser: response.Body, judge: func(body []byte) {
		if err := contract.Answer(method, target, response.StatusCode, response.Header, body); err != nil {
			c.T.Errorf("%s %s: the answer is not the contract's: %v", method, target, err)
		}
	}}
	return response, nil
}

type judgedBody struct {
	io.ReadCloser
	bytes.Buffer
	judge func([]byte)
	once  sync.Once
}

func (b *judgedBody) Read(p []byte) (int, error) {
	n, err := b.ReadCloser.Read(p)
	b.Buffer.Write(p[:n])
	if err == io.EOF {
		b.once.Do(func() { b.judge(b.Buffer.Bytes()) })
	}
	return n, err
}

func (b *judgedBody) WriteTo(w io.Writer) (int64, error) {
	return io.Copy(w, struct{ io.Reader }{b})
}

// A judge that lets everything pass would be no check: each of these answers differs from the contract in one place.
func TestContractJudgeRefuses(t *testing.T) {
	contract, err := LoadContract()
	if err != nil {
		t.Fatal(err)
	}
	const (
		problem = `{"type":"/docs/problems/x","title":"T","status":422,"detail":"D.","instance":"urn:request:r1"}`
		state   = `"depth":1,"area":1,"wetted_perimeter":3,"hydraulic_radius":0.3,"top_width":1,"hydraulic_depth":1,"centroid_depth":0.5`
		good    = `{"units":"si","states":[{` + state + `}],"warnings":[]}`
		line    = `{"id":7,"line":1,"result":` + good + "}\n"
	)
	end := func(lines int, before string) string {
		return before + fmt.Sprintf(`{"end":true,"lines":%d,"problems":0,"sha256":"%x"}`+"\n", lines, sha256.Sum256([]byte(before)))
	}
	header := func(media string) http.Header {
		return http.Header{"Content-Type": {media}, "Request-Id": {"r1"}, "Retry-After": {"1"}, "Allow": {"POST"}}
	}
	const ndjson = "application/x-ndjson"
	const problems = "application/problem+json"
	for _, row := range []struct {
		name, method, target string
		status               int
		media, body          string
		pass                 bool
	}{
		{"a good answer", "POST", "/v1/section", 200, "application/json", good, true},
		{"a member more", "POST", "/v1/section?units=si", 200, "application/json", good[:len(good)-1] + `,"later":1}`, true},
		{"a problem", "POST", "/v1/section", 422, problems, problem, true},
		{"no such path", "POST", "/v1/other", 404, problems, strings.Replace(problem, "422", "404", 1), true},
		{"no such method", "GET", "/v1/section", 405, problems, strings.Replace(problem, "422", "405", 1), true},
		{"a stream", "POST", "/v1/bulk/section", 200, ndjson, end(1, line), true},
		{"an empty stream", "POST", "/v1/bulk/section", 200, ndjson, end(0, ""), true},
		{"HEAD", "HEAD", "/v1/limits", 200, "application/json", "", true},

		{"a member missing", "POST", "/v1/section", 200, "application/json", strings.Replace(good, `"area":1,`, "", 1), false},
		{"a text for a number", "POST", "/v1/section", 200, "application/json", strings.Replace(good, `"area":1`, `"area":"1"`, 1), false},
		{"null for a number", "POST", "/v1/section", 200, "application/json", strings.Replace(good, `"area":1`, `"area":null`, 1), false},
		{"an unknown name", "POST", "/v1/section", 200, "application/json", strings.Replace(good, `"si"`, `"metric"`, 1), false},
		{"two values", "POST", "/v1/section", 200, "application/json", good + good, false},
		{"nothing", "POST", "/v1/section", 200, "application/json", "", false},
		{"another media type", "POST", "/v1/section", 200, "text/plain", good, false},
		{"another status", "POST", "/v1/section", 201, "application/json", good, false},
		{"success without a route", "POST", "/v1/other", 200, "application/json", good, false},
		{"success without a method", "GET", "/v1/section", 200, "application/json", good, false},
		{"a problem as JSON", "POST", "/v1/section", 422, "application/json", problem, false},
		{"a problem of another status", "POST", "/v1/section", 400, problems, problem, false},
		{"a problem without title", "POST", "/v1/section", 422, problems, strings.Replace(problem, `"title":"T",`, "", 1), false},
		{"a problem of another request", "POST", "/v1/section", 422, problems, strings.Replace(problem, "r1", "r2", 1), false},
		{"a fault without place", "POST", "/v1/section", 422, problems, problem[:len(problem)-1] + `,"errors":[{"code":"c","detail":"d"}]}`, false},
		{"a cut stream", "POST", "/v1/bulk/section", 200, ndjson, line, false},
		{"a stream cut in a line", "POST", "/v1/bulk/section", 200, ndjson, line[:40], false},
		{"a wrong count", "POST", "/v1/bulk/section", 200, ndjson, end(2, line), false},
		{"a wrong hash", "POST", "/v1/bulk/section", 200, ndjson, strings.Replace(end(1, line), `"line":1,`, `"line":2,`, 1), false},
		{"a line of both", "POST", "/v1/bulk/section", 200, ndjson, end(1, strings.Replace(line, `"line"`, `"problem":`+problem+`,"line"`, 1)), false},
		{"lines out of order", "POST", "/v1/bulk/section", 200, ndjson, end(2, line+line), false},
		{"a page", "GET", "/docs/problems/saturated", 200, "text/html", "<!doctype html>", true},
		{"a page as another type", "GET", "/docs/problems/saturated", 200, "application/json", "{}", false},
		{"a page below a page", "GET", "/docs/problems/saturated/x", 200, "text/html", "<!doctype html>", false},
		{"HEAD with a body", "HEAD", "/v1/limits", 200, "application/json", "{}", false},
	} {
		err := contract.Answer(row.method, row.target, row.status, header(row.media), []byte(row.body))
		if (err == nil) != row.pass {
			t.Errorf("%s: pass = %t (%v), want %t", row.name, err == nil, err, row.pass)
		}
	}
	if err := contract.Answer("POST", "/v1/section", 200, http.Header{"Content-Type": {"application/json"}}, []byte(good)); err == nil {
		t.Error("an answer without Request-Id passes")
	}
	if err := contract.Answer("POST", "/v1/section", 503, http.Header{"Content-Type": {problems}, "Request-Id": {"r1"}},
		[]byte(strings.Replace(problem, "422", strconv.Itoa(503), 1))); err == nil {
		t.Error("503 without Retry-After passes")
	}
}
