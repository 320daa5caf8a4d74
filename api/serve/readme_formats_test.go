package serve

import (
	"bytes"
	"os"
	"os/exec"
	"path/filepath"
	"regexp"
	"strings"
	"testing"
)

// The README's table and its layer are answered as it says.
func TestReadmeShowsATableAndALayer(t *testing.T) {
	readme, err := os.ReadFile("../../README.md")
	if err != nil {
		t.Fatal(err)
	}
	shown := regexp.MustCompile("(?s)## A table or a layer.*?```sh\n(.*?)```.*?```python\n(.*?)```\n\n```text\n(.*?)```").FindSubmatch(readme)
	if shown == nil {
		t.Fatal("no table and layer in the README")
	}
	r := startReal(t, nil)
	folder := t.TempDir()
	run := func(program string, text []byte) string {
		t.Helper()
		if _, err := exec.LookPath(program); err != nil {
			if os.Getenv("LEAT_ALL_PARTS") != "" {
				t.Fatalf("%s is missing", program)
			}
			t.Skipf("%s is missing, which the README uses", program)
		}
		c := exec.Command(program)
		c.Dir = folder
		c.Stdin = bytes.NewReader(bytes.ReplaceAll(text, []byte("127.0.0.1:8080"), []byte(r.address)))
		out, err := c.CombinedOutput()
		if err != nil {
			t.Fatalf("%v: %s", err, out)
		}
		return string(out)
	}
	if got := run("python3", shown[2]); got != string(shown[3]) {
		t.Errorf("the layer gives\n%sand the README says\n%s", got, shown[3])
	}
	if _, err := exec.LookPath("curl"); err != nil && os.Getenv("LEAT_ALL_PARTS") == "" {
		t.Skip("curl is missing, which the README uses")
	}
	run("sh", shown[1])
	table, err := os.ReadFile(filepath.Join(folder, "depths.csv"))
	if err != nil {
		t.Fatal(err)
	}
	lines := strings.Split(string(table), "\r\n")
	for i, parts := range [][]string{
		{"asset,road,leat_section_kind,", ",leat_normal_depth,", ",leat_slope_class,", ",leat_freeboard,", ",leat_problem,"},
		{`OST-RD-0147,"Mill Lane, north",trapezoidal,`, ",mild,"},
		{"OST-SW-0040,Quay,circular,", ",0.28745873755521295,", ",steep,"},
		{`OST-SW-0041,Quay,circular,,,"0,9",`, "not a comma: 0.9"},
	} {
		for _, part := range parts {
			if !strings.Contains(lines[i], part) {
				t.Errorf("no %s in %s", part, lines[i])
			}
		}
	}
}
