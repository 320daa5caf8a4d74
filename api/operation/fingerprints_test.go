package operation

import (
	"bytes"
	"cmp"
	"crypto/sha256"
	"encoding/hex"
	"encoding/json"
	"flag"
	"fmt"
	"io"
	"os"
	"path/filepath"
	"slices"
	"strings"
	"testing"

	"github.com/go-json-experiment/json/jsontext"

	"leat/compute"
)

var (
	update     = flag.Bool("update", false, "write testdata/fingerprints.json anew")
	unreleased = flag.Bool("unreleased", false, "with -update: numbers may change without a new engine version, since none with this one was released")
)

var root = filepath.Join("..", "..")

// A goldenList is what answers were when the list was written. It is there to notice when a number of an answer changes.
type goldenList struct {
	EngineVersion string   `json:"engine_version"`
	Answers       []golden `json:"answers"`
}

// golden is one answer.
type golden struct {
	Name        string `json:"name"` // of the request
	Fingerprint string `json:"fingerprint"`
	Numbers     string `json:"numbers"` // hash of the places and literals of all numbers and nulls of the answer
	Answer      string `json:"answer"`  // hash of the whole answer, without id and fingerprint
}

// everyLine is which lines of the register are on the list.
const everyLine = 10

// goldenRequests returns the requests on the list, as operation, name and text: the contract's examples, lines of the register, and the runs.
func goldenRequests(t *testing.T) (out [][3]string) {
	t.Helper()
	read := func(file string) string {
		text, err := os.ReadFile(filepath.Join(root, file))
		if err != nil {
			t.Fatal(err)
		}
		return string(text)
	}
	files, err := filepath.Glob(filepath.Join(root, "openapi", "examples", "*.request.json"))
	if err != nil {
		t.Fatal(err)
	}
	for _, file := range files {
		name := strings.TrimSuffix(filepath.Base(file), ".request.json")
		op, _, _ := strings.Cut(name, ".")
		if slices.ContainsFunc(All(), func(o *Operation) bool { return o.Name == op }) {
			out = append(out, [3]string{op, "example " + name, read(filepath.Join("openapi", "examples", filepath.Base(file)))})
		}
	}
	for i, line := range strings.Split(strings.TrimSpace(read("testdata/ostermere.ndjson")), "\n") {
		if i%everyLine == 0 {
			out = append(out, [3]string{"depths", fmt.Sprintf("register, line %d", i+1), line})
		}
	}
	for i, line := range strings.Split(strings.TrimSpace(read("testdata/ostermere_appraisals.ndjson")), "\n") {
		if i%everyLine == 0 {
			out = append(out, [3]string{"appraisal", fmt.Sprintf("appraisals, line %d", i+1), line})
		}
	}
	for i, line := range strings.Split(strings.TrimSpace(read("testdata/ostermere_profiles.ndjson")), "\n") {
		out = append(out, [3]string{"profile", fmt.Sprintf("run, line %d", i+1), line})
	}
	return out
}

func named(t *testing.T, name string) *Operation {
	t.Helper()
	for _, o := range All() {
		if o.Name == name {
			return o
		}
	}
	t.Fatalf("there is no operation %q", name)
	return nil
}

// answerGolden answers a request; ok is false where the answer is a problem.
func answerGolden(t *testing.T, op, name, text string) (g golden, ok bool) {
	t.Helper()
	solved, problem := named(t, op).Solve([]byte(text), Options{Fingerprint: true})
	if problem != nil {
		return golden{Name: name}, false
	}
	solved.Answer.SetFingerprint("")
	answer := solved.AppendJSON(nil, false)
	return golden{name, solved.Fingerprint, numbersHash(t, answer), hash(answer)}, true
}

func hash(text []byte) string {
	sum := sha256.Sum256(text)
	return hex.EncodeToString(sum[:])
}

// numbersHash is the hash of all numbers of an answer and of the nulls in place of one, each with its place.
func numbersHash(t *testing.T, answer []byte) string {
	t.Helper()
	var list bytes.Buffer
	decoder := jsontext.NewDecoder(bytes.NewReader(answer))
	for {
		token, err := decoder.ReadToken()
		if err == io.EOF {
			return hash(list.Bytes())
		}
		if err != nil {
			t.Fatal(err)
		}
		if k := token.Kind(); k == '0' || k == 'n' {
			fmt.Fprintf(&list, "%s %s\n", decoder.StackPointer(), token)
		}
	}
}

// TestNumbersChangeWithTheEngineVersion holds that an answer's numbers are those on the list as long as compute.EngineVersion is: a register
// trusts that an answer which it keeps under a fingerprint is what it would get again.
func TestNumbersChangeWithTheEngineVersion(t *testing.T) {
	file := filepath.Join(root, "testdata", "fingerprints.json")
	var list goldenList
	text, err := os.ReadFile(file)
	if err != nil && !*update {
		t.Fatal(err)
	}
	if err == nil {
		if err := json.Unmarshal(text, &list); err != nil {
			t.Fatal(err)
		}
	}
	known := map[string]golden{}
	for _, g := range list.Answers {
		known[g.Name] = g
	}
	if !*update {
		if list.EngineVersion != compute.EngineVersion {
			t.Fatalf("testdata/fingerprints.json is of engine version %q, and compute.EngineVersion is %q: go test ./api/operation -update", list.EngineVersion, compute.EngineVersion)
		}
		if len(known) < 90 {
			t.Errorf("only %d answers on the list", len(known))
		}
	}
	written := goldenList{EngineVersion: compute.EngineVersion}
	refused := false
	for _, r := range goldenRequests(t) {
		got, ok := answerGolden(t, r[0], r[1], r[2])
		want, listed := known[r[1]]
		delete(known, r[1])
		if ok {
			written.Answers = append(written.Answers, got)
		}
		sameVersion := list.EngineVersion == compute.EngineVersion
		switch {
		case ok == listed && got == want, !ok && !listed:
		case *update && (!sameVersion || !listed || *unreleased || ok && got.Numbers == want.Numbers && got.Fingerprint == want.Fingerprint):
		case !listed:
			t.Errorf("%s is not on the list of testdata/fingerprints.json: go test ./api/operation -update", r[1])
		case !ok, got.Numbers != want.Numbers && got.Fingerprint == want.Fingerprint:
			refused = true
			t.Errorf("%s: a number of the answer has changed, but compute.EngineVersion is still %q. A register that keeps answers would not notice."+
				" If the change is meant, change compute.EngineVersion in the same commit, say in its message how much which numbers have changed, and write the list anew:"+
				" go test ./api/operation -update (with -unreleased while no release has this version)", r[1], compute.EngineVersion)
		case got.Fingerprint != want.Fingerprint:
			refused = true
			t.Errorf("%s: the fingerprint is %s, not %s: the request has changed, or its canonical form, for which no fingerprint that a register keeps would be found again."+
				" If the request was changed: go test ./api/operation -update -unreleased", r[1], got.Fingerprint, want.Fingerprint)
		default:
			t.Errorf("%s: the answer has changed in its words, not in its numbers; if that is meant: go test ./api/operation -update", r[1])
		}
	}
	for name := range known {
		if !*update {
			t.Errorf("%s is on the list of testdata/fingerprints.json, but there is no such request: go test ./api/operation -update", name)
		}
	}
	if !*update || refused {
		return
	}
	out, err := json.MarshalIndent(written, "", " ")
	if err != nil {
		t.Fatal(err)
	}
	if err := os.WriteFile(file, append(out, '\n'), 0o644); err != nil {
		t.Fatal(err)
	}
}

// TestFingerprintsDoNotDependOnTheCall holds that the fingerprint is one, however a request is told: in another spelling, with or
// without its id, with units of the call, brief or not, by Fingerprint or by Solve.
func TestFingerprintsDoNotDependOnTheCall(t *testing.T) {
	seen := map[string]string{}
	for _, r := range goldenRequests(t) {
		op := named(t, r[0])
		solved, problem := op.Solve([]byte(r[2]), Options{Fingerprint: true, Brief: true, Inside: true})
		if problem != nil {
			continue
		}
		want := solved.Fingerprint
		if other, found := seen[want]; found {
			t.Errorf("%s has the fingerprint of %s", r[1], other)
		}
		seen[want] = r[1]
		if answer := solved.AppendJSON(nil, true); !bytes.Contains(answer, []byte(`"units":"`+solved.Units.String()+`","fingerprint":"`+want+`",`)) {
			t.Errorf("%s: the answer does not tell it: %.200s", r[1], answer)
		}
		var request map[string]any
		if err := json.Unmarshal([]byte(r[2]), &request); err != nil {
			t.Fatal(err)
		}
		options := Options{Units: solved.Units, Fingerprint: true}
		delete(request, "id")
		delete(request, "units")
		request["gravity"] = cmp.Or[any](request["gravity"], nil)
		respelt, err := json.MarshalIndent(request, " ", "\t")
		if err != nil {
			t.Fatal(err)
		}
		if again, problem := op.Solve(respelt, options); problem != nil || again.Fingerprint != want {
			t.Errorf("%s: %q, want %q, of\n%s", r[1], again.Fingerprint, want, respelt)
		}
		if alone, problem := op.Fingerprint(respelt, options); problem != nil || alone != want {
			t.Errorf("%s: by Fingerprint %q, want %q", r[1], alone, want)
		}
		if without, problem := op.Solve(respelt, Options{Units: solved.Units}); problem != nil || without.Fingerprint != "" ||
			bytes.Contains(without.AppendJSON(nil, false), []byte("fingerprint")) {
			t.Errorf("%s: a fingerprint that was not asked for", r[1])
		}
	}
	if _, problem := Depths.Fingerprint([]byte(`{"a":1,"a":2}`), Options{}); problem == nil || problem.Status != 400 {
		t.Errorf("a body that is not I-JSON has a fingerprint: %v", problem)
	}
}
