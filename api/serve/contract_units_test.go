package serve_test

import (
	"fmt"
	"testing"

	"github.com/getkin/kin-openapi/openapi3"

	"leat/api/serve"
)

// unitPair is x-ogc-unit in SI and in US units.
type unitPair struct{ si, us string }

// unitKey names a member, or a position of its tuples.
func unitKey(name string, column any) string {
	if column == nil {
		return name
	}
	return fmt.Sprintf("%s[%v]", name, column)
}

// contractUnits collects the units of all numbers in requests and answers of the operations, by the member's name.
func contractUnits(t *testing.T) map[string]unitPair {
	t.Helper()
	contract, err := serve.LoadContract()
	if err != nil {
		t.Fatal(err)
	}
	out := map[string]unitPair{}
	seen := map[*openapi3.Schema]bool{}
	var visit func(name string, s *openapi3.SchemaRef)
	visit = func(name string, s *openapi3.SchemaRef) {
		if s == nil || name == "id" || name == "reach" || seen[s.Value] {
			return
		}
		seen[s.Value] = true
		if si, has := s.Value.Extensions["x-ogc-unit"].(string); has {
			us, differs := s.Value.Extensions["x-ogc-unit-us"].(string)
			if !differs {
				us = si
			}
			unit := unitPair{si, us}
			if before, has := out[name]; has && before != unit {
				t.Errorf("the contract has two units of %s: %v and %v", name, before, unit)
			}
			out[name] = unit
			return
		}
		for member, p := range s.Value.Properties {
			visit(member, p)
		}
		for i, p := range s.Value.PrefixItems {
			visit(unitKey(name, i), p)
		}
		if s.Value.PrefixItems == nil {
			visit(name, s.Value.Items)
		}
		if named := s.Value.AdditionalProperties.Schema; named != nil {
			visit(name, named)
		}
		for _, p := range s.Value.OneOf {
			visit(name, p)
		}
	}
	for _, name := range []string{"SectionRequest", "DepthsRequest", "RatingRequest", "ProfileRequest", "AppraisalRequest", "SectionAnswer", "DepthsAnswer", "RatingAnswer", "ProfileAnswer", "AppraisalAnswer"} {
		visit("", contract.Document.Components.Schemas[name])
	}
	if len(out) < 60 {
		t.Fatalf("only %d units found", len(out))
	}
	return out
}

// TestContractUnits: /v1/units says of each member what the document says; where UCUM has no code, the document has the unit as an
// annotation.
func TestContractUnits(t *testing.T) {
	s := startService(t)
	_, _, body := s.send("GET", "/v1/units", nil)
	members, ok := parse(t, body).(map[string]any)["members"].([]any)
	if !ok {
		t.Fatalf("no members in %s", body)
	}
	code := func(names any) string {
		n := names.(map[string]any)
		if ucum, ok := n["ucum"].(string); ok {
			return ucum
		}
		return fmt.Sprintf("{%v}", n["unit"])
	}
	got := map[string]unitPair{}
	for _, m := range members {
		member := m.(map[string]any)
		key := unitKey(member["name"].(string), member["column"])
		pair := unitPair{code(member["si"]), code(member["us"])}
		if before, has := got[key]; has && before != pair {
			t.Errorf("/v1/units has two units of %s: %v and %v", key, before, pair)
		}
		got[key] = pair
	}
	want := contractUnits(t)
	for name, unit := range want {
		if got[name] != unit {
			t.Errorf("%s: /v1/units has %v, the contract %v", name, got[name], unit)
		}
	}
	for name := range got {
		if _, has := want[name]; !has {
			t.Errorf("/v1/units has %s, the contract does not", name)
		}
	}
}
