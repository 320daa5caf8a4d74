package serve

import (
	"os"
	"path/filepath"
	"strings"
	"testing"

	"leat/api/operation"
	"leat/api/record"
)

// TestRecordsComeUnderTheirOwnPolicy holds the headers of a record, and that a refused one keeps the policy of all answers.
func TestRecordsComeUnderTheirOwnPolicy(t *testing.T) {
	r := startOperations(t, operation.All(), nil)
	for _, op := range operation.All() {
		names, err := filepath.Glob(filepath.Join("..", "..", "openapi", "examples", op.Name+".*.request.json"))
		if err != nil || len(names) == 0 {
			t.Fatal(op.Name, err)
		}
		example, err := os.ReadFile(names[0])
		if err != nil {
			t.Fatal(err)
		}
		got := r.send("POST", "/v1/"+op.Name, string(example), "Content-Type", jsonHeader, "Accept", "text/html")
		if got.status != 200 || got.header.Get("Content-Type") != "text/html; charset=utf-8" || got.header.Get("Content-Security-Policy") != record.Policy() ||
			!strings.HasPrefix(string(got.body), "<!DOCTYPE html>") {
			t.Errorf("%s: %d %v %.80s", op.Name, got.status, got.header, got.body)
		}
		got = r.send("POST", "/v1/"+op.Name, `{}`, "Content-Type", jsonHeader, "Accept", "text/html")
		if got.status != 422 || got.header.Get("Content-Security-Policy") == record.Policy() {
			t.Errorf("%s without members: %d %v", op.Name, got.status, got.header)
		}
	}
}
