package wholefile

import (
	"os"
	"path/filepath"
	"strings"
	"testing"
)

func names(t *testing.T, folder string) string {
	t.Helper()
	entries, err := os.ReadDir(folder)
	if err != nil {
		t.Fatal(err)
	}
	var out []string
	for _, e := range entries {
		out = append(out, e.Name())
	}
	return strings.Join(out, " ")
}

func TestWholeOrNotAtAll(t *testing.T) {
	folder := t.TempDir()
	path := filepath.Join(folder, "x.csv")
	f, err := Create(path)
	if err != nil {
		t.Fatal(err)
	}
	f.WriteString(strings.Repeat("first ", 100_000))
	if _, err := Create(path); err == nil || !strings.Contains(err.Error(), "another process") {
		t.Errorf("a second writer: %v", err)
	}
	if got := names(t, folder); got != ".x.csv.unfinished" {
		t.Errorf("%s", got)
	}
	if err := f.Finish(); err != nil {
		t.Fatal(err)
	}
	if content, _ := os.ReadFile(path); len(content) != 600_000 || names(t, folder) != "x.csv" {
		t.Errorf("%d bytes, %s", len(content), names(t, folder))
	}
	if err := f.Discard(); err != nil || names(t, folder) != "x.csv" {
		t.Errorf("discarded after all: %v", err)
	}

	// The next one takes over the permissions, and until it is finished the old content stays.
	os.Chmod(path, 0o640)
	if f, err = Create(path); err != nil {
		t.Fatal(err)
	}
	f.WriteString("second")
	if content, _ := os.ReadFile(path); len(content) != 600_000 {
		t.Error("overwritten too soon")
	}
	if err := f.Finish(); err != nil {
		t.Fatal(err)
	}
	info, _ := os.Stat(path)
	if content, _ := os.ReadFile(path); string(content) != "second" || info.Mode().Perm() != 0o640 {
		t.Errorf("%q, %v", content, info.Mode())
	}

	// Discarded, or left by a process that was killed: nothing of it is seen.
	os.WriteFile(filepath.Join(folder, ".x.csv.unfinished"), []byte("left by another"), 0o600)
	if f, err = Create(path); err != nil {
		t.Fatal(err)
	}
	f.WriteString("third")
	if err := f.Discard(); err != nil || names(t, folder) != "x.csv" {
		t.Errorf("%v, %s", err, names(t, folder))
	}
	if _, err := Create(filepath.Join(folder, "no", "x.csv")); err == nil {
		t.Error("a file in no folder")
	}
}
