package wire

import (
	"encoding/json"
	"strings"
	"testing"
)

// TestProblems holds the table of problems: each constructor with its type and status, each type and title once.
func TestProblems(t *testing.T) {
	fault := Fault{Pointer: "/a", Code: "c", Detail: "D."}
	titles, known := map[string]bool{}, map[string]string{}
	for _, row := range ProblemTypes() {
		known[row.Name] = row.Title
	}
	for _, c := range []struct {
		problem *Problem
		name    string
		status  int
	}{
		{MalformedJSON(fault), "malformed_json", 400},
		{BadParameter(fault), "bad_parameter", 400},
		{Unauthorized("D."), "unauthorized", 401},
		{NotFound("D."), "not_found", 404},
		{MethodNotAllowed("D."), "method_not_allowed", 405},
		{NotAcceptable("D."), "not_acceptable", 406},
		{RequestTimeout("D."), "request_timeout", 408},
		{TooLarge(fault), "too_large", 413},
		{UnsupportedMediaType("D."), "unsupported_media_type", 415},
		{MalformedCSV(fault), "malformed_csv", 400},
		{InvalidRequest(fault), "invalid_request", 422},
		{NoSolution("/a", "c", "D."), "no_solution", 422},
		{TooManyRequests("D."), "too_many_requests", 429},
		{Internal("D."), "internal_error", 500},
		{NonFiniteResult("D."), "non_finite_result", 500},
		{Saturated("D."), "saturated", 503},
		{Draining("D."), "draining", 503},
		{NotReady("D."), "not_ready", 503},
		{TimeLimit("D."), "time_limit", 504},
	} {
		p := c.problem
		if known[c.name] != p.Title {
			t.Errorf("%s is not in the table of types: %v", c.name, known)
		}
		delete(known, c.name)
		if p.Type != "/docs/problems/"+c.name || p.Status != c.status || !strings.HasSuffix(p.Detail, "D.") {
			t.Errorf("%s: %+v", c.name, p)
		}
		if titles[p.Title] || p.Title == "" {
			t.Errorf("%s: the title %q stands twice", c.name, p.Title)
		}
		titles[p.Title] = true
		memberNames(t, p.AppendJSON(nil))
	}
	if len(known) > 0 {
		t.Errorf("types that no constructor makes: %v", known)
	}
}

func TestProblemJSON(t *testing.T) {
	p := InvalidRequest(
		Fault{Pointer: "/section/kind", Code: "unknown_value", Detail: "Not \"so\"\n."},
		Fault{Parameter: "units", Code: "c", Detail: "d"},
		Fault{Column: "bed_slope", Code: "c", Detail: "d"},
		Fault{Code: "not_an_object", Detail: "\xff"},
	)
	p.Instance = "urn:uuid:1"
	got := string(p.AppendJSON(nil))
	want := `{"type":"/docs/problems/invalid_request","title":"The request breaks a rule","status":422,` +
		`"detail":"/section/kind: Not \"so\"\n. There are 3 other faults.","instance":"urn:uuid:1","errors":[` +
		`{"pointer":"/section/kind","code":"unknown_value","detail":"Not \"so\"\n."},` +
		`{"parameter":"units","code":"c","detail":"d"},{"column":"bed_slope","code":"c","detail":"d"},{"pointer":"","code":"not_an_object","detail":"` + "\ufffd" + `"}]}`
	if got != want {
		t.Errorf("got  %s\nwant %s", got, want)
	}
	p.Instance, p.Errors = "", nil
	if names := strings.Join(memberNames(t, p.AppendJSON(nil)), " "); names != "type title status detail" {
		t.Error(names)
	}
	many := make([]Fault, 150)
	p = InvalidRequest(many...)
	if len(p.Errors) != MaxFaults || !json.Valid(p.AppendJSON(nil)) {
		t.Errorf("%d faults listed", len(p.Errors))
	}
}
