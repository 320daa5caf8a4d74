package openapi_test

import (
	"encoding/json"
	"fmt"
	"io/fs"
	"maps"
	"path"
	"slices"
	"strings"
	"testing"

	"github.com/getkin/kin-openapi/openapi3"
	"github.com/goccy/go-yaml"
	"github.com/google/go-cmp/cmp"

	"leat/openapi"
)

// node is one place of the document and its JSON Pointer.
type node struct {
	pointer string
	schema  map[string]any
	behind  bool // of what stands behind the described positions of a tuple: nothing
}

func document(t *testing.T) map[string]any {
	t.Helper()
	var doc map[string]any
	if err := yaml.Unmarshal(openapi.YAML, &doc); err != nil {
		t.Fatal(err)
	}
	return doc
}

// at follows keys down from a value.
func at(t *testing.T, v any, keys ...string) any {
	t.Helper()
	for _, k := range keys {
		m, ok := v.(map[string]any)
		if !ok || m[k] == nil {
			t.Fatalf("the document has nothing at %s of %v", k, keys)
		}
		v = m[k]
	}
	return v
}

// resolve follows a reference inside the document, if v is one.
func resolve(t *testing.T, doc map[string]any, v any) map[string]any {
	t.Helper()
	m, ok := v.(map[string]any)
	if !ok {
		t.Fatalf("%v is no object", v)
	}
	if ref, ok := m["$ref"].(string); ok {
		return at(t, doc, strings.Split(strings.TrimPrefix(ref, "#/"), "/")...).(map[string]any)
	}
	return m
}

// schemas lists every schema of the document with everything below it, references not followed.
func schemas(t *testing.T, doc map[string]any) []node {
	t.Helper()
	var out []node
	var visit func(pointer string, v any)
	visit = func(pointer string, v any) {
		m, ok := v.(map[string]any)
		if !ok {
			return
		}
		out = append(out, node{pointer: pointer, schema: m})
		for _, k := range []string{"items", "contentSchema", "additionalProperties", "not"} {
			if m[k] != nil {
				first := len(out)
				visit(pointer+"/"+k, m[k])
				if k == "items" && m["prefixItems"] != nil && first < len(out) {
					out[first].behind = true
				}
			}
		}
		for _, k := range []string{"oneOf", "anyOf", "allOf", "prefixItems"} {
			if list, ok := m[k].([]any); ok {
				for i, s := range list {
					visit(fmt.Sprintf("%s/%s/%d", pointer, k, i), s)
				}
			}
		}
		if properties, ok := m["properties"].(map[string]any); ok {
			for _, k := range slices.Sorted(maps.Keys(properties)) {
				visit(pointer+"/properties/"+k, properties[k])
			}
		}
	}
	var search func(pointer string, v any)
	search = func(pointer string, v any) {
		switch v := v.(type) {
		case map[string]any:
			for _, k := range slices.Sorted(maps.Keys(v)) {
				switch {
				case k == "schema":
					visit(pointer+"/schema", v[k])
				case k == "schemas" && pointer == "/components":
					all := v[k].(map[string]any)
					for _, name := range slices.Sorted(maps.Keys(all)) {
						visit("/components/schemas/"+name, all[name])
					}
				case k == "example" || k == "examples":
				default:
					search(pointer+"/"+k, v[k])
				}
			}
		case []any:
			for i, e := range v {
				search(fmt.Sprintf("%s/%d", pointer, i), e)
			}
		}
	}
	search("", doc)
	if len(out) < 300 {
		t.Fatalf("only %d schemas found: the search is broken", len(out))
	}
	return out
}

func types(schema map[string]any) []string {
	switch v := schema["type"].(type) {
	case string:
		return []string{v}
	case []any:
		var out []string
		for _, e := range v {
			out = append(out, e.(string))
		}
		return out
	}
	return nil
}

// TestDocumentIsValid has kin-openapi judge the document as OpenAPI 3.1, its examples included.
func TestDocumentIsValid(t *testing.T) {
	doc, err := openapi3.NewLoader().LoadFromData(openapi.YAML)
	if err != nil {
		t.Fatal(err)
	}
	if !doc.IsOpenAPI31OrLater() {
		t.Errorf("the document is OpenAPI %s, want 3.1", doc.OpenAPI)
	}
	if err := doc.Validate(t.Context(), openapi3.EnableExamplesValidation(), openapi3.EnableSchemaPatternValidation()); err != nil {
		t.Error(err)
	}
}

// TestForbiddenKeywords refuses what readers of OpenAPI 3.0, or the generators of clients, stumble over.
func TestForbiddenKeywords(t *testing.T) {
	for _, n := range schemas(t, document(t)) {
		for _, k := range []string{"nullable", "allOf", "anyOf", "not", "if", "const", "example", "unevaluatedProperties", "patternProperties"} {
			if _, has := n.schema[k]; has {
				t.Errorf("%s has %s", n.pointer, k)
			}
		}
		if _, has := n.schema["default"]; has && !strings.Contains(n.pointer, "/parameters/") {
			// Generators take a member with a default for one that is always there, in requests too.
			t.Errorf("%s has default", n.pointer)
		}
		if n.schema["items"] == false {
			t.Errorf("%s has items: false", n.pointer)
		}
		for _, k := range []string{"minimum", "maximum", "exclusiveMinimum", "exclusiveMaximum"} {
			switch v := n.schema[k].(type) {
			case nil, int, int64, uint64, float64:
			default:
				// Readers of YAML differ over numbers with an exponent: 1e-06 is text to some.
				t.Errorf("%s: %s is %T %v, want a number without exponent", n.pointer, k, v, v)
			}
		}
	}
}

// TestNumbersHaveFormatAndUnit: a generator takes a number without format for a float of 32 bits.
func TestNumbersHaveFormatAndUnit(t *testing.T) {
	us := map[string]string{} // by the unit in SI
	numbers := 0
	for _, n := range schemas(t, document(t)) {
		kinds := types(n.schema)
		number, whole := slices.Contains(kinds, "number"), slices.Contains(kinds, "integer")
		unit, hasUnit := n.schema["x-ogc-unit"].(string)
		if !number && !whole {
			if hasUnit {
				t.Errorf("%s has a unit and is no number", n.pointer)
			}
			continue
		}
		numbers++
		if number && n.schema["format"] != "double" {
			t.Errorf("%s has no format: double", n.pointer)
		}
		if n.behind && !hasUnit {
			continue
		}
		if !hasUnit {
			t.Errorf("%s has no x-ogc-unit", n.pointer)
			continue
		}
		other, differs := n.schema["x-ogc-unit-us"].(string)
		if !differs {
			other = unit
		}
		if known, seen := us[unit]; seen && known != other {
			t.Errorf("%s: %s is %s in US units here and %s elsewhere", n.pointer, unit, other, known)
		}
		us[unit] = other
	}
	if numbers < 100 {
		t.Fatalf("only %d numbers found", numbers)
	}
	// UCUM (ucum.org, version 2.1): base and derived units, [ft_i], [sft_i], [cft_i], [lbf_av], By; {…} is an annotation, which is
	// how a code can bear a fractional power, since UCUM has none.
	want := map[string]string{
		"1": "1", "m": "[ft_i]", "m2": "[sft_i]", "m3": "[cft_i]", "m3/s": "[cft_i]/s", "m/s": "[ft_i]/s", "m/s2": "[ft_i]/s2",
		"m2/s": "[sft_i]/s", "N/m2": "[lbf_av]/[sft_i]", "W/m2": "[ft_i].[lbf_av]/(s.[sft_i])", "{m^(1/2)/s}": "{ft^(1/2)/s}",
		"{s/m^(1/3)}": "{s/m^(1/3)}", "{m^(1/3)/s}": "{m^(1/3)/s}", "s": "s", "Hz": "Hz", "By": "By", "deg": "deg",
		"{told_beside_it}": "{told_beside_it}", // of a number whose unit another member tells
		"{of_its_member}":  "{of_its_member}",  // of a flat value
	}
	if diff := cmp.Diff(want, us); diff != "" {
		t.Errorf("units (-want +got):\n%s", diff)
	}
}

// TestEverythingIsDescribed wants a meaning of every schema and an example of every one that is a value; what refers to
// another schema is shown there.
func TestEverythingIsDescribed(t *testing.T) {
	for _, n := range schemas(t, document(t)) {
		if _, ref := n.schema["$ref"]; ref {
			continue
		}
		if text, _ := n.schema["description"].(string); len(text) < 5 {
			if list, ok := n.schema["oneOf"].([]any); !ok || n.schema["description"] != nil || !allReferences(list) {
				t.Errorf("%s has no description", n.pointer)
			}
		}
		kinds := types(n.schema)
		shown := n.schema["examples"] != nil
		switch {
		case n.behind, n.schema["contentSchema"] != nil, n.schema["oneOf"] != nil:
			continue
		case slices.Contains(kinds, "object"):
			continue // its members are shown, and whole ones in the operations
		case slices.Contains(kinds, "array"):
			if items, ok := n.schema["items"].(map[string]any); ok && items["$ref"] != nil {
				continue
			}
		}
		if !shown {
			t.Errorf("%s has no example", n.pointer)
		}
	}
}

func allReferences(list []any) bool {
	for _, e := range list {
		if m, ok := e.(map[string]any); !ok || m["$ref"] == nil {
			return false
		}
	}
	return true
}

// TestTuples: the length of a tuple is fixed by its bounds.
func TestTuples(t *testing.T) {
	tuples := 0
	for _, n := range schemas(t, document(t)) {
		prefix, ok := n.schema["prefixItems"].([]any)
		if !ok {
			continue
		}
		tuples++
		if want := fmt.Sprint(len(prefix)); fmt.Sprint(n.schema["minItems"]) != want || fmt.Sprint(n.schema["maxItems"]) != want {
			t.Errorf("%s: %d positions described, minItems %v, maxItems %v", n.pointer, len(prefix), n.schema["minItems"], n.schema["maxItems"])
		}
	}
	if tuples < 3 {
		t.Errorf("%d tuples, want those of points, rows and manning_by_depth", tuples)
	}
}

// reach lists the schemas that are reachable from v, references followed, each once.
func reach(t *testing.T, doc map[string]any, v any) []node {
	t.Helper()
	var out []node
	seen := map[string]bool{}
	var visit func(pointer string, v any)
	visit = func(pointer string, v any) {
		switch v := v.(type) {
		case map[string]any:
			if ref, ok := v["$ref"].(string); ok {
				if !seen[ref] {
					seen[ref] = true
					visit(ref, resolve(t, doc, v))
				}
				return
			}
			out = append(out, node{pointer: pointer, schema: v})
			for k, e := range v {
				switch k {
				case "properties":
					for name, p := range e.(map[string]any) {
						visit(pointer+"/"+name, p)
					}
				case "items", "contentSchema", "additionalProperties":
					visit(pointer+"/"+k, e)
				case "oneOf", "prefixItems":
					visit(pointer+"/"+k, e)
				}
			}
		case []any:
			for i, e := range v {
				visit(fmt.Sprintf("%s/%d", pointer, i), e)
			}
		}
	}
	visit("", v)
	return out
}

// TestRequestsAreClosedAnswersOpen: what is not described is refused in a request, and may come in an answer.
func TestRequestsAreClosedAnswersOpen(t *testing.T) {
	doc := document(t)
	requests, answers := 0, 0
	for route, item := range doc["paths"].(map[string]any) {
		for method, operation := range item.(map[string]any) {
			o := operation.(map[string]any)
			if body, ok := o["requestBody"]; ok {
				for media, content := range at(t, body, "content").(map[string]any) {
					for _, n := range reach(t, doc, at(t, content, "schema")) {
						if slices.Contains(types(n.schema), "object") {
							requests++
							if _, named := n.schema["additionalProperties"].(map[string]any); n.schema["additionalProperties"] != false && !named {
								t.Errorf("%s %s, request %s: %s is open", method, route, media, n.pointer)
							}
						}
					}
				}
			}
			for status, response := range o["responses"].(map[string]any) {
				if status == "304" {
					continue
				}
				for media, content := range at(t, resolve(t, doc, response), "content").(map[string]any) {
					for _, n := range reach(t, doc, at(t, content, "schema")) {
						if slices.Contains(types(n.schema), "object") {
							answers++
							if n.schema["additionalProperties"] == false {
								t.Errorf("%s %s, answer %s %s: %s is closed", method, route, status, media, n.pointer)
							}
						}
					}
				}
			}
		}
	}
	if requests < 60 || answers < 60 {
		t.Errorf("%d objects in requests and %d in answers found: the search is broken", requests, answers)
	}
}

// TestResponses: every refusal is a problem, every answer bears its id.
func TestResponses(t *testing.T) {
	doc := document(t)
	ids := map[string]string{}
	for route, item := range doc["paths"].(map[string]any) {
		for method, operation := range item.(map[string]any) {
			o := operation.(map[string]any)
			name := method + " " + route
			for _, k := range []string{"operationId", "summary", "description", "tags"} {
				if o[k] == nil {
					t.Errorf("%s has no %s", name, k)
				}
			}
			id := fmt.Sprint(o["operationId"])
			if other, taken := ids[id]; taken {
				t.Errorf("%s and %s are both %s", name, other, id)
			}
			ids[id] = name
			for status, response := range o["responses"].(map[string]any) {
				r := resolve(t, doc, response)
				if _, ok := at(t, r, "headers").(map[string]any)["Request-Id"]; !ok {
					t.Errorf("%s: %s has no Request-Id", name, status)
				}
				if status == "304" {
					continue // never has a body (RFC 9110, 15.4.5)
				}
				media := slices.Sorted(maps.Keys(at(t, r, "content").(map[string]any)))
				if problem := slices.Equal(media, []string{"application/problem+json"}); problem != (status >= "400") {
					t.Errorf("%s: %s has %v", name, status, media)
				}
			}
		}
	}
}

// TestDocumentShowsTheExampleFiles holds the examples in the document equal to the files beside it, both ways.
func TestDocumentShowsTheExampleFiles(t *testing.T) {
	doc := document(t)
	shown := map[string]any{}
	show := func(name string, content any) {
		m, ok := content.(map[string]any)
		if !ok {
			return
		}
		list, ok := m["examples"].(map[string]any)
		if !ok {
			return
		}
		for key, e := range list {
			shown[fmt.Sprintf(name, key)] = e.(map[string]any)["value"]
		}
	}
	for route, item := range doc["paths"].(map[string]any) {
		post, ok := item.(map[string]any)["post"].(map[string]any)
		if !ok {
			continue
		}
		name, body, media := path.Base(route)+".%s.", "json", "application/json"
		if strings.Contains(route, "/bulk/") {
			name, body, media = "bulk."+path.Base(route)+".", "ndjson", "application/x-ndjson"
		}
		for part, content := range map[string]any{
			"request": at(t, post, "requestBody", "content", media),
			"answer":  at(t, post, "responses", "200", "content", media),
		} {
			if body == "json" {
				show(name+part+".json", content)
			} else {
				show("%.0s"+name+part+".ndjson", content)
			}
		}
	}
	for _, response := range at(t, doc, "components", "responses").(map[string]any) {
		if response.(map[string]any)["content"] == nil {
			continue
		}
		show("problem.%s.answer.json", at(t, response, "content", "application/problem+json"))
	}

	files, err := fs.Glob(openapi.Examples, "examples/*.*.*")
	if err != nil {
		t.Fatal(err)
	}
	for _, file := range files {
		name := path.Base(file)
		if strings.HasPrefix(name, "problem.") && !strings.HasSuffix(name, ".answer.json") {
			continue // what provokes a problem is shown nowhere
		}
		data, err := openapi.Examples.ReadFile(file)
		if err != nil {
			t.Fatal(err)
		}
		got, ok := shown[name]
		if !ok {
			t.Errorf("%s is not shown in the document", name)
			continue
		}
		delete(shown, name)
		if strings.HasSuffix(name, ".ndjson") {
			if got != string(data) {
				t.Errorf("%s: the document shows\n%s\nthe file holds\n%s", name, got, data)
			}
			continue
		}
		var want any
		if err := json.Unmarshal(data, &want); err != nil {
			t.Errorf("%s: %v", name, err)
			continue
		}
		// Through JSON, so that numbers of both are of one type.
		again, err := json.Marshal(got)
		if err != nil {
			t.Fatal(err)
		}
		var plain any
		if err := json.Unmarshal(again, &plain); err != nil {
			t.Fatal(err)
		}
		if diff := cmp.Diff(want, plain); diff != "" {
			t.Errorf("%s (-file +document):\n%s", name, diff)
		}
	}
	for name := range shown {
		t.Errorf("the document shows %s, which is no file", name)
	}
}

// TestTextsAreThoseOfTheService: what the schemas show of problems, faults, warnings and reasons stands in an answer that an example
// file holds, and those are the service's own.
func TestTextsAreThoseOfTheService(t *testing.T) {
	doc := document(t)
	written := map[string]bool{} // each value of the answers as JSON, by its member
	var note func(member string, v any)
	note = func(member string, v any) {
		text, err := json.Marshal(v)
		if err != nil {
			t.Fatal(err)
		}
		written[member+" "+string(text)] = true
		switch v := v.(type) {
		case map[string]any:
			for k, e := range v {
				note(k, e)
			}
		case []any:
			for _, e := range v {
				note(member, e)
			}
		}
	}
	files, err := fs.Glob(openapi.Examples, "examples/*.answer.json")
	if err != nil {
		t.Fatal(err)
	}
	for _, file := range files {
		data, err := openapi.Examples.ReadFile(file)
		if err != nil {
			t.Fatal(err)
		}
		var v any
		if err := json.Unmarshal(data, &v); err != nil {
			t.Fatal(err)
		}
		note("", v)
	}
	judged := 0
	for name, members := range map[string][]string{
		"Fault": {"pointer", "parameter", "code", "detail"}, "Warning": {"code", "detail", "pointer"},
		"Problem": {"type", "title", "status", "detail", "instance", "errors"}, "DepthsAnswer": {"normal_absent", "critical_absent"},
	} {
		for _, member := range members {
			for _, example := range at(t, doc, "components", "schemas", name, "properties", member).(map[string]any)["examples"].([]any) {
				text, err := json.Marshal(example)
				if err != nil {
					t.Fatal(err)
				}
				judged++
				if !written[member+" "+string(text)] {
					t.Errorf("%s: no answer has the %s %s", name, member, text)
				}
			}
		}
	}
	if judged < 15 {
		t.Errorf("only %d texts judged", judged)
	}
}
