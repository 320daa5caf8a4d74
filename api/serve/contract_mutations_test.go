package serve_test

import (
	"bytes"
	"encoding/json"
	"fmt"
	"maps"
	"math/big"
	"slices"
	"strings"
	"testing"

	"github.com/santhosh-tekuri/jsonschema/v6"

	"leat/api/serve"
)

// A mutant is a request that differs from a valid one in one place.
type mutant struct {
	name string // what was done, where
	body string
}

// bases are valid requests of an operation: one for every kind of section and every law of roughness that the document shows.
func bases(t *testing.T, op string) map[string]map[string]any {
	t.Helper()
	contract, err := serve.LoadContract()
	if err != nil {
		t.Fatal(err)
	}
	shown := func(union string) map[string]map[string]any {
		out := map[string]map[string]any{}
		for _, ref := range contract.Document.Components.Schemas[union].Value.OneOf {
			name := ref.Ref[strings.LastIndex(ref.Ref, "/")+1:]
			out[name] = copyOf(t, ref.Value.Examples[0]).(map[string]any)
		}
		return out
	}
	if op == "profile" {
		return profileBases(t)
	}
	sections, laws := shown("Section"), shown("Roughness")
	request := func(section, law map[string]any) map[string]any {
		r := map[string]any{"section": section, "roughness": law, "bed_slope": 0.004, "id": "OST-RD-0147"}
		switch op {
		case "section":
			r["depth"] = 0.12
			r["discharge"] = 0.05
		case "depths":
			r["depth"] = 0.12
			r["discharge"] = 0.05
			r["barrels"] = 2.0
		case "rating":
			r["kind"] = "uniform"
			r["from_depth"] = 0.05
			r["to_depth"] = 0.15
			r["count"] = 3.0
		case "appraisal":
			r["flows"] = map[string]any{"ten_year": 0.05, "hundred_year": 0.08}
			r["criteria"] = map[string]any{"least_freeboard": 0.1, "greatest_velocity": 2.0}
		}
		return r
	}
	out := map[string]map[string]any{}
	for name, section := range sections {
		out[name] = request(section, laws["ManningRoughness"])
	}
	for name, law := range laws {
		section := sections["RectangularSection"]
		if name == "ZonedRoughness" {
			section = sections["SurveyedSection"]
		}
		out[name] = request(section, law)
	}
	all := request(sections["TriangularSection"], laws["ManningRoughness"])
	for k, v := range map[string]any{"units": "us", "gravity": 32.0, "barrels": 3.0, "energy_coefficient": 1.1, "momentum_coefficient": 1.05} {
		all[k] = v
	}
	out["every member"] = all
	switch op {
	case "section":
		list := maps.Clone(all)
		delete(list, "depth")
		list["depths"] = []any{0.1, 0.2}
		out["depths"] = list
	case "rating":
		list := maps.Clone(all)
		for _, k := range []string{"from_depth", "to_depth", "count"} {
			delete(list, k)
		}
		list["discharges"] = []any{0.1, 0.2}
		list["kind"] = "critical"
		out["discharges"] = list
	case "appraisal":
		whole := maps.Clone(all)
		whole["depth"] = 0.12
		whole["criteria"] = contract.Document.Components.Schemas["Criteria"].Value.Examples[0]
		criteria := map[string]any{}
		for name, p := range contract.Document.Components.Schemas["Criteria"].Value.Properties {
			criteria[name] = p.Value.Examples[0]
		}
		flows := map[string]any{}
		for name := range criteria {
			flows[name] = []any{"hundred_year"}
		}
		whole["criteria"], whole["criterion_flows"], whole["bend"] = criteria, flows, map[string]any{"radius": 25.0}
		out["every criterion"] = whole
		for name, lining := range shown("Lining") {
			lined := request(sections["TrapezoidalSection"], laws["ManningRoughness"])
			lined["criteria"] = map[string]any{"least_lining_safety": 1.0}
			lined["lining"] = lining
			switch lining["kind"] {
			case "vegetation", "riprap", "gravel":
				delete(lined, "roughness")
			}
			out[name] = lined
		}
	}
	for name, v := range out {
		out[name] = copyOf(t, v).(map[string]any)
	}
	return out
}

func copyOf(t *testing.T, v any) any {
	t.Helper()
	b, err := json.Marshal(v)
	if err != nil {
		t.Fatal(err)
	}
	return parse(t, b)
}

// A member of another kind or law, which the tests try in every object.
type foreign struct {
	name  string
	value any
}

// foreigners are all members of all kinds, or of all laws.
func foreigners(t *testing.T, union string) []foreign {
	t.Helper()
	contract, err := serve.LoadContract()
	if err != nil {
		t.Fatal(err)
	}
	all := map[string]any{}
	for _, ref := range contract.Document.Components.Schemas[union].Value.OneOf {
		for name, p := range ref.Value.Properties {
			if name != "kind" && len(p.Value.Examples) > 0 {
				all[name] = p.Value.Examples[0]
			}
		}
	}
	var out []foreign
	for _, name := range slices.Sorted(maps.Keys(all)) {
		out = append(out, foreign{name, all[name]})
	}
	return out
}

// mutants makes every change of one place that the tests know of, in all members of a base or in the one named.
func mutants(t *testing.T, base map[string]any, only string) []mutant {
	t.Helper()
	var out []mutant
	add := func(name string) {
		b, err := json.Marshal(base)
		if err != nil {
			t.Fatal(err)
		}
		out = append(out, mutant{name, string(b)})
	}
	// with puts a value in a place for the time of one mutant.
	with := func(name string, set func(any), old any, values ...any) {
		for _, v := range values {
			set(v)
			text, _ := json.Marshal(v)
			if len(text) > 40 {
				text = append(text[:40:40], "…"...)
			}
			add(fmt.Sprintf("%s = %s", name, text))
		}
		set(old)
	}
	kinds, laws, linings := foreigners(t, "Section"), foreigners(t, "Roughness"), foreigners(t, "Lining")
	var visit func(at string, v any, set func(any))
	visit = func(at string, v any, set func(any)) {
		with(at, set, v, "0.5", true, []any{}, []any{1.0}, map[string]any{}, nil)
		switch v := v.(type) {
		case float64:
			with(at, set, v, -v, 0.0, 0.5, 1.0, 1.5, -1.0, 101.0, 1e50, 1e-50)
			with(at, set, v, json.RawMessage("2.0"), json.RawMessage("2e0"), json.RawMessage("-0"), json.RawMessage("1e400"), json.RawMessage("1e-400"))
		case string:
			with(at, set, v, "", "no_such_value", strings.ToUpper(v), v+" ", strings.Repeat("x", 257), 12.0)
		case map[string]any:
			names := slices.Sorted(maps.Keys(v))
			for _, k := range names {
				old := v[k]
				delete(v, k)
				add("without " + at + "/" + k)
				v[k] = old
				visit(at+"/"+k, old, func(n any) { v[k] = n })
			}
			for _, k := range []string{"unknown_member", "", "Section", "DISCHARGE", "fingerprint"} {
				if _, has := v[k]; !has {
					v[k] = 1.0
					add("with " + at + "/" + k)
					delete(v, k)
				}
			}
			var others []foreign
			switch at[strings.LastIndex(at, "/"):] {
			case "/section":
				others = kinds
				for _, f := range foreignKinds {
					if old := v["kind"]; old != f {
						v["kind"] = f
						add("as kind " + f)
						v["kind"] = old
					}
				}
			case "/roughness":
				others = laws
			case "/lining":
				others = linings
			}
			for _, f := range others {
				if _, has := v[f.name]; !has {
					v[f.name] = f.value
					add("with " + at + "/" + f.name)
					v[f.name] = nil
					add("with null " + at + "/" + f.name)
					delete(v, f.name)
				}
			}
		case []any:
			for i := range min(len(v), 2) {
				visit(fmt.Sprintf("%s/%d", at, i), v[i], func(n any) { v[i] = n })
			}
			if len(v) > 0 {
				last := v[len(v)-1]
				with(at, set, v, v[:len(v)-1], slices.Concat(v, []any{last}), v[:1], slices.Concat([]any{last}, v), slices.Concat(v, []any{nil}))
			}
		}
	}
	for _, k := range slices.Sorted(maps.Keys(base)) {
		if only != "" && k != only {
			continue
		}
		old := base[k]
		delete(base, k)
		add("without /" + k)
		base[k] = old
		visit("/"+k, old, func(n any) { base[k] = n })
	}
	if only != "" {
		return out
	}
	for _, k := range []string{"unknown_member", "depth", "depths", "discharge", "discharges", "from_depth", "count", "kind", "barrels", "fingerprint", "Units"} {
		if _, has := base[k]; !has {
			base[k] = 1.0
			add("with /" + k)
			delete(base, k)
		}
	}
	return out
}

var foreignKinds = []string{"rectangular", "trapezoidal", "triangular", "parabolic", "u_shaped", "circular", "box", "elliptical", "egg", "horseshoe", "gutter", "two_stage", "surveyed", "tabulated", "oval"}

// stripped removes members that are null, as the contract says before its schemas apply.
func stripped(v any) any {
	switch v := v.(type) {
	case map[string]any:
		out := map[string]any{}
		for k, e := range v {
			if e != nil {
				out[k] = stripped(e)
			}
		}
		return out
	case []any:
		out := make([]any, len(v))
		for i, e := range v {
			out[i] = stripped(e)
		}
		return out
	}
	return v
}

// Codes that say no more than a schema can: a request that the schemas allow is never refused for one of them.
var schemaCodes = map[string]bool{
	"not_an_object": true, "wrong_type": true, "unknown_member": true, "foreign_member": true, "unknown_value": true,
	"not_whole": true, "too_long": true, "wrong_length": true, "too_few_items": true,
}

// Members that rules of one of several forms ask for, which are prose: only these may be missing where the schema is content.
var proseMembers = []string{
	"side_slope", "left_side_slope", "right_side_slope", "bench_width", "left_bench_width", "right_bench_width", "gutter_width", "gutter_slope",
	"until", "depth", "depths", "from_depth", "to_depth", "count", "discharges",
	"reaches", "bed_level", "roughness",
}

// TestContractMutations: a request that the contract forbids is never answered, one that it allows is answered or refused for a
// reason that is in its prose; and bulk says of each what unary says, byte for byte.
func TestContractMutations(t *testing.T) {
	s := startService(t)
	contract, err := serve.LoadContract()
	if err != nil {
		t.Fatal(err)
	}
	for _, op := range []string{"section", "depths", "rating", "profile", "appraisal"} {
		t.Run(op, func(t *testing.T) {
			schema := strings.ToUpper(op[:1]) + op[1:] + "Request"
			counts := map[string]int{}
			seen := map[string]bool{}
			var bodies, answers [][]byte
			all := bases(t, op)
			for _, base := range slices.Sorted(maps.Keys(all)) {
				whole, err := json.Marshal(all[base])
				if err != nil {
					t.Fatal(err)
				}
				if status, answer := s.post("/v1/"+op, jsonMedia, whole); status != 200 {
					t.Errorf("%s is not accepted: %s\n%d %s", base, whole, status, answer)
					continue
				}
				if err := contract.Schema(schema, stripped(parse(t, whole))); err != nil {
					t.Errorf("%s is not the contract's: %v", base, err)
					continue
				}
				only := "" // what is the same in all bases is changed in those that are about no kind and no law
				switch {
				case strings.HasSuffix(base, "Section"):
					only = "section"
				case strings.HasSuffix(base, "Roughness"):
					only = "roughness"
				case strings.HasSuffix(base, "Lining"):
					only = "lining"
				}
				for _, m := range mutants(t, all[base], only) {
					if seen[m.body] || testing.Short() && len(seen)%16 != 0 {
						seen[m.body] = true
						continue
					}
					seen[m.body] = true
					status, answer := s.post("/v1/"+op, jsonMedia, []byte(m.body))
					bodies, answers = append(bodies, []byte(m.body)), append(answers, answer)
					value, err := jsonschema.UnmarshalJSON(strings.NewReader(m.body)) // numbers stay literals
					if err != nil || hugeNumber(value) {
						// Beyond what JSON numbers may be here: no schema says that.
						counts["not I-JSON"]++
						if status != 400 {
							t.Errorf("%s, %s: %d, want 400\n%s\n%s", base, m.name, status, m.body, answer)
						}
						continue
					}
					invalid := contract.Schema(schema, stripped(value))
					switch {
					case invalid != nil && (status == 422 || status == 413):
						counts["forbidden and refused"]++
					case invalid != nil:
						t.Errorf("%s, %s: %d although the contract forbids it\n%s\n%s", base, m.name, status, m.body, answer)
					case status == 200:
						counts["allowed and answered"]++
					case status == 422 || status == 413:
						counts["allowed and refused by prose"]++
						for _, why := range unsaid(t, answer) {
							t.Errorf("%s, %s: the contract's schema allows it, and it is refused: %s\n%s", base, m.name, why, m.body)
						}
					default:
						t.Errorf("%s, %s: %d\n%s\n%s", base, m.name, status, m.body, answer)
					}
				}
			}
			t.Log(counts)
			if !testing.Short() {
				for _, least := range []string{"forbidden and refused", "allowed and answered", "allowed and refused by prose", "not I-JSON"} {
					if counts[least] < 50 {
						t.Errorf("only %d mutants are %s: the generator is broken", counts[least], least)
					}
				}
			}
			sameInBulk(t, s, op, bodies, answers)
		})
	}
}

// hugeNumber reports whether a number in the value is outside the size that a request may have.
func hugeNumber(v any) bool {
	switch v := v.(type) {
	case json.Number:
		size, _, err := big.ParseFloat(string(v), 10, 64, big.ToNearestEven)
		if err != nil {
			return true
		}
		size.Abs(size)
		return size.Sign() != 0 && (size.Cmp(big.NewFloat(1e-100)) < 0 || size.Cmp(big.NewFloat(1e100)) > 0)
	case map[string]any:
		for _, e := range v {
			if hugeNumber(e) {
				return true
			}
		}
	case []any:
		return slices.ContainsFunc(v, hugeNumber)
	}
	return false
}

// unsaid lists the faults of a problem that a schema should have said.
func unsaid(t *testing.T, answer []byte) []string {
	t.Helper()
	var problem struct {
		Errors []struct{ Pointer, Code, Detail string }
	}
	if err := json.Unmarshal(answer, &problem); err != nil {
		t.Fatal(err)
	}
	var out []string
	if len(problem.Errors) == 0 {
		out = append(out, "without a fault")
	}
	for _, f := range problem.Errors {
		member := f.Pointer[strings.LastIndex(f.Pointer, "/")+1:]
		if schemaCodes[f.Code] && member != "until" || f.Code == "missing_member" && !slices.Contains(proseMembers, member) {
			out = append(out, fmt.Sprintf("%s %s: %s", f.Pointer, f.Code, f.Detail))
		}
	}
	return out
}

// sameInBulk sends all bodies as one stream and wants of each line what unary answered.
func sameInBulk(t *testing.T, s *service, op string, bodies, answers [][]byte) {
	t.Helper()
	status, stream := s.post("/v1/bulk/"+op+"?fingerprint=true", ndjsonMedia, append(bytes.Join(bodies, []byte("\n")), '\n'))
	if status != 200 {
		t.Fatalf("bulk: %d %s", status, stream)
	}
	lines := bytes.Split(stream, []byte("\n"))
	if len(lines) != len(bodies)+2 {
		t.Fatalf("%d lines answered, want %d", len(lines)-2, len(bodies))
	}
	for i, body := range bodies {
		var line struct {
			Result, Problem json.RawMessage
		}
		if err := json.Unmarshal(lines[i], &line); err != nil {
			t.Fatal(err)
		}
		if line.Result != nil {
			// The id stands beside the result in bulk and first in it in unary; all else is the same text.
			rest, ok := bytes.CutPrefix(line.Result, []byte("{"))
			if !ok || !bytes.HasSuffix(answers[i], rest) {
				t.Errorf("%s\nin bulk %s\nunary   %s", body, line.Result, answers[i])
			}
			continue
		}
		unary := parse(t, answers[i]).(map[string]any)
		delete(unary, "instance")
		for _, d := range differences("", unary, parse(t, line.Problem)) {
			t.Errorf("%s\nin bulk another problem: %s", body, d)
		}
	}
}
