package serve

import (
	"crypto/sha256"
	"encoding/hex"
	"os"
	"path/filepath"
	"strings"
	"testing"

	"leat/openapi"
)

// line is a line of a keys file.
func line(caller, key string) string {
	hash := sha256.Sum256([]byte(key))
	return caller + " " + hex.EncodeToString(hash[:]) + "\n"
}

func writeFile(t *testing.T, path, text string) string {
	t.Helper()
	if err := os.WriteFile(path, []byte(text), 0o600); err != nil {
		t.Fatal(err)
	}
	return path
}

func TestKeysFile(t *testing.T) {
	ring, err := parseKeys([]byte("# the survey office\n\n" + line("survey", "one") + "  " + strings.ToUpper(line("survey", "two")) + line("night.job-2", "three")))
	if err != nil {
		t.Fatal(err)
	}
	for key, want := range map[string]string{"one": "survey", "two": "SURVEY", "three": "night.job-2", "four": "", "": ""} {
		if got, known := ring.caller(key); got != want || known != (want != "") {
			t.Errorf("%q: %q, %v", key, got, known)
		}
	}
	for text, says := range map[string]string{
		"":                                      "no key",
		"# nothing\n":                           "no key",
		"survey\n":                              "line 1 is not a name and a hash",
		"\n" + line("a b", "x"):                 "line 2 is not a name and a hash",
		"survey abc\n":                          "line 1 has no SHA-256",
		"survey " + strings.Repeat("g", 64):     "line 1 has no SHA-256",
		line("a", "x") + line("b", "x"):         "line 2 has the hash of a line above",
		line("a/b", "x"):                        "line 1 has a name",
		line(strings.Repeat("a", 65), "x"):      "line 1 has a name",
		strings.Repeat("survey\n", 100):         "line 10 is",
		"leat_PLAINKEYWITHOUTANYHASHING\n":      "line 1",
		"survey leat_PLAINKEYWITHOUTANYHASHING": "line 1 has no SHA-256",
	} {
		_, err := parseKeys([]byte(text))
		if err == nil || !strings.Contains(err.Error(), says) {
			t.Errorf("%q: %v, want %q", text, err, says)
		}
		if err != nil && strings.Contains(err.Error(), "PLAINKEY") {
			t.Errorf("the error repeats what may be a key: %v", err)
		}
	}
}

// The contract shows the text as it is; no request of its examples can provoke it, since keys are a setting.
func TestContractShowsWhatAMissingKeyIsTold(t *testing.T) {
	if !strings.Contains(string(openapi.YAML), noKey().Detail) {
		t.Errorf("the contract does not show %q", noKey().Detail)
	}
}

func TestNewKeysAreKnownByTheirLine(t *testing.T) {
	key, text, err := NewKey("survey")
	if err != nil || strings.Contains(text, key) {
		t.Fatalf("%q, %v", text, err)
	}
	other, _, _ := NewKey("survey")
	ring, err := parseKeys([]byte(text))
	if err != nil {
		t.Fatal(err)
	}
	if got, known := ring.caller(key); got != "survey" || !known || other == key {
		t.Errorf("%q, %v", got, known)
	}
	if _, _, err := NewKey("two words"); err == nil {
		t.Error("a name that no line can hold was accepted")
	}
}

func TestWhoMayCall(t *testing.T) {
	path := writeFile(t, filepath.Join(t.TempDir(), "keys"), line("survey", "first")+line("night", "other"))
	r := start(t, func(c *Config, _ *Surroundings) { c.KeysFile = path })
	const target = "/v1/depths"
	for _, row := range []struct {
		name, method, target string
		headers              []string
		status               int
		challenge, caller    string
	}{
		{"a key", "POST", target, []string{"Authorization", "Bearer first"}, 200, "", "survey"},
		{"the scheme in other letters", "POST", target, []string{"Authorization", "bEARER other"}, 200, "", "night"},
		{"bulk", "POST", "/v1/bulk/depths", []string{"Authorization", "Bearer other"}, 400, "", "night"},
		{"none", "POST", target, nil, 401, `Bearer realm="leat"`, "127.0.0.1"},
		{"none for bulk", "POST", "/v1/bulk/depths", nil, 401, `Bearer realm="leat"`, "127.0.0.1"},
		{"an unknown one", "POST", target, []string{"Authorization", "Bearer third"}, 401, `Bearer realm="leat", error="invalid_token"`, "127.0.0.1"},
		{"its hash", "POST", target, []string{"Authorization", "Bearer " + strings.Fields(line("x", "first"))[1]}, 401, `Bearer realm="leat", error="invalid_token"`, "127.0.0.1"},
		{"another scheme", "POST", target, []string{"Authorization", "Basic Zmlyc3Q6"}, 401, `Bearer realm="leat"`, "127.0.0.1"},
		{"two headers", "POST", target, []string{"Authorization", "Bearer first", "Authorization", "Bearer first"}, 401, `Bearer realm="leat"`, "127.0.0.1"},
		{"in the address", "POST", target + "?key=first", nil, 401, `Bearer realm="leat"`, "127.0.0.1"},
		{"an unknown path", "GET", "/nothing", nil, 401, `Bearer realm="leat"`, "127.0.0.1"},
		{"a document", "GET", "/version", nil, 401, `Bearer realm="leat"`, "127.0.0.1"},
		{"metrics", "GET", "/metrics", nil, 401, `Bearer realm="leat"`, ""},
		{"metrics with a key", "GET", "/metrics", []string{"Authorization", "Bearer first"}, 200, "", ""},
		{"liveness", "GET", "/livez", nil, 200, "", ""},
		{"readiness", "GET", "/readyz", nil, 200, "", ""},
		{"readiness by HEAD", "HEAD", "/readyz", nil, 200, "", ""},
		{"OPTIONS", "OPTIONS", target, nil, 204, "", ""},
	} {
		t.Run(row.name, func(t *testing.T) {
			got := r.send(row.method, row.target, "{}", append(row.headers, "Content-Type", jsonHeader)...)
			if got.status != row.status || got.header.Get("Www-Authenticate") != row.challenge {
				t.Errorf("%d %s, challenge %q", got.status, got.body, got.header.Get("Www-Authenticate"))
			}
			if got.status == 401 && row.method != "HEAD" {
				got.problem(t, 401)
			}
			if row.caller != "" {
				if line := r.log.access(t, got.header.Get("Request-Id")); line["caller"] != row.caller {
					t.Errorf("logged caller %v", line["caller"])
				}
			}
		})
	}
	r.log.mutex.Lock()
	defer r.log.mutex.Unlock()
	if strings.Contains(r.log.String(), "Bearer") || strings.Contains(r.log.String(), "third") {
		t.Error("a key is in the log")
	}
}

// A changed file holds from then on, a broken or vanished one changes nothing and is told once.
func TestKeysAreTakenOverWhileTheServiceRuns(t *testing.T) {
	path := writeFile(t, filepath.Join(t.TempDir(), "keys"), line("survey", "first"))
	r := start(t, func(c *Config, _ *Surroundings) { c.KeysFile = path })
	expect := func(key string, status int) {
		t.Helper()
		if got := r.send("GET", "/version", "", "Authorization", "Bearer "+key); got.status != status {
			t.Errorf("key %s: %d, want %d", key, got.status, status)
		}
	}
	expect("first", 200)
	writeFile(t, path, line("survey", "first")+line("survey", "second"))
	r.Renew()
	expect("first", 200)
	expect("second", 200)
	writeFile(t, path, line("survey", "second")+"nonsense\n")
	r.Renew()
	r.Renew()
	expect("first", 200)
	if err := os.Remove(path); err != nil {
		t.Fatal(err)
	}
	r.Renew()
	r.Renew()
	expect("second", 200)
	told := 0
	for _, line := range r.log.lines(t) {
		if strings.HasPrefix(line["message"].(string), "changed keys cannot be used") {
			told++
		}
	}
	if told != 2 {
		t.Errorf("told %d times of two faults", told)
	}
	// By itself, without a signal.
	writeFile(t, path, line("survey", "third"))
	waitFor(t, "the key to be taken over", func() bool {
		return r.send("GET", "/version", "", "Authorization", "Bearer third").status == 200
	})
	expect("first", 401)
}

func TestUnusableKeysStopTheStart(t *testing.T) {
	for _, path := range []string{"absent", writeFile(t, filepath.Join(t.TempDir(), "keys"), "nonsense\n"), t.TempDir()} {
		config := testConfig(t)
		config.KeysFile = path
		if _, err := New(config, nil, testSurroundings(new(logBuffer))); err == nil || !strings.Contains(err.Error(), "keys from") {
			t.Errorf("%s: %v", path, err)
		}
	}
}

// BenchmarkCaller shows what a key costs where there are many; the last, the first and a wrong one must cost the same.
func BenchmarkCaller(b *testing.B) {
	var text strings.Builder
	for i := range mostKeys {
		text.WriteString(line("caller", "key"+strings.Repeat("x", i)))
	}
	ring, err := parseKeys([]byte(text.String()))
	if err != nil {
		b.Fatal(err)
	}
	for name, key := range map[string]string{"first": "key", "last": "key" + strings.Repeat("x", mostKeys-1), "wrong": "kex" + strings.Repeat("x", mostKeys-1)} {
		b.Run(name, func(b *testing.B) {
			for b.Loop() {
				ring.caller(key)
			}
		})
	}
}
