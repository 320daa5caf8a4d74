package register_test

import (
	"bytes"
	"os"
	"path/filepath"
	"regexp"
	"strings"
	"testing"

	"leat/cmd/internal/demo/district"
	"leat/cmd/internal/geopackage/geopackagetest"
	"leat/cmd/internal/register"
)

// demo writes the demo and a mapping file of deploy/register into a folder, and returns the mapping's path.
func demo(t *testing.T, mapping string) string {
	t.Helper()
	folder := t.TempDir()
	if outcome, out, err := command(t, "demo", folder); outcome != register.Done || strings.Count(out, "1200 assets") != 2 {
		t.Fatalf("%v\n%s\n%s", outcome, out, err)
	}
	content, err := os.ReadFile(filepath.Join("..", "..", "..", "deploy", "register", mapping))
	if err != nil {
		t.Fatal(err)
	}
	path := filepath.Join(folder, mapping)
	if err := os.WriteFile(path, content, 0o600); err != nil {
		t.Fatal(err)
	}
	return path
}

func command(t *testing.T, arguments ...string) (outcome register.Outcome, out, err string) {
	t.Helper()
	var stdout, stderr bytes.Buffer
	outcome = register.Run(t.Context(), arguments, &stdout, &stderr)
	return outcome, stdout.String(), stderr.String()
}

// texts returns the rows of a statement, columns joined by a bar.
var texts = geopackagetest.Texts

// The demo ends in a layer; every row that is wrong on purpose is told with its column, and no other.
func TestOstermereAsAGeoPackage(t *testing.T) {
	mapping := demo(t, "ostermere_geopackage.yaml")
	file := filepath.Join(filepath.Dir(mapping), "ostermere.gpkg")
	before := texts(t, file, "SELECT *, hex(geom) FROM channels ORDER BY fid")

	if outcome, out, err := command(t, "check", "--quiet", mapping); outcome != register.Problems || !strings.Contains(out, "TRAPEZE") {
		t.Errorf("check: %v\n%s\n%s", outcome, out, err)
	}
	if got := texts(t, file, "SELECT count(*) FROM sqlite_master WHERE name LIKE 'leat%'"); got[0] != "0" {
		t.Errorf("check has left %s tables", got[0])
	}
	outcome, out, errText := command(t, "run", "--quiet", "--rows", "100", mapping)
	if outcome != register.Problems {
		t.Fatalf("run: %v\n%s\n%s", outcome, out, errText)
	}
	geopackagetest.Judge(t, file)
	if after := texts(t, file, "SELECT *, hex(geom) FROM channels ORDER BY fid"); strings.Join(before, "\n") != strings.Join(after, "\n") {
		t.Error("the register's own layer has changed")
	}
	if got := texts(t, file, "SELECT count(*) FROM leat_results r JOIN channels c ON c.asset_code = r.asset WHERE c.geom IS NOT r.geom OR c.status <> 'in_use'"); got[0] != "0" {
		t.Errorf("%s results have another geometry, or should not be there", got[0])
	}

	channels := district.Channels()
	wrong := map[string]district.Mistake{}
	for _, m := range district.Mistakes {
		wrong[channels[m.Row-1].Code] = m
	}
	told := map[string]bool{}
	for _, line := range texts(t, file, "SELECT asset, coalesce(\"column\", ''), text FROM leat_results_problems") {
		cells := strings.SplitN(line, "|", 3)
		m, meant := wrong[cells[0]]
		if !meant {
			t.Errorf("a row that is right has the problem %s", line)
			continue
		}
		if strings.Contains(cells[1], m.Column) {
			told[cells[0]] = true
		}
	}
	for code, m := range wrong {
		if !told[code] {
			t.Errorf("%s: no problem names %s (%s)", code, m.Column, m.Told)
		}
		if got := texts(t, file, "SELECT count(*) FROM leat_results WHERE asset = '"+code+"'"); got[0] != "0" {
			t.Errorf("%s has a result all the same", code)
		}
	}
	if verdicts := texts(t, file, "SELECT verdict, count(*) FROM leat_results GROUP BY 1 ORDER BY 1"); len(verdicts) != 3 {
		t.Errorf("the verdicts are %q; a register in which all is well, or all undetermined, shows nothing", verdicts)
	}
	if style := texts(t, file, "SELECT styleName, instr(styleQML, 'falls_short') > 0 FROM layer_styles WHERE f_table_name = 'leat_results'"); len(style) != 1 || style[0] != "verdict|1" {
		t.Errorf("the layer's style: %q", style)
	}
	inUse := 0
	for i := range channels {
		if channels[i].Status == "in_use" {
			inUse++
		}
	}
	results := texts(t, file, "SELECT * FROM leat_results ORDER BY asset")
	if len(results) != inUse-len(wrong) {
		t.Errorf("%d results, want %d", len(results), inUse-len(wrong))
	}

	// Once more: nothing has changed, so nothing is written.
	if outcome, out, err := command(t, "run", "--quiet", mapping); outcome != register.Problems || !strings.Contains(out, " 0 computed") {
		t.Errorf("second run: %v\n%s\n%s", outcome, out, err)
	}
	if again := texts(t, file, "SELECT * FROM leat_results ORDER BY asset"); strings.Join(results, "\n") != strings.Join(again, "\n") {
		t.Error("a second run has changed results")
	}
	geopackagetest.Judge(t, file)
}

// What the README says of the demo is so.
func TestTheReadmeTellsOfTheDemo(t *testing.T) {
	readme, err := os.ReadFile("../../../README.md")
	if err != nil {
		t.Fatal(err)
	}
	shown := regexp.MustCompile("```sh\ngo run ./cmd/leat register demo (\\S+)\ngo run ./cmd/leat register run (\\S+)\n```").FindSubmatch(readme)
	if shown == nil || filepath.Dir(string(shown[2])) != string(shown[1]) {
		t.Fatal("the README has no block that makes and runs the demo")
	}
	numbers := regexp.MustCompile(`of the ([\d,]+) assets in use (\d+) are wrong on purpose`).FindSubmatch(readme)
	if numbers == nil {
		t.Fatal("the README does not say how many assets there are")
	}
	rows, bad := strings.ReplaceAll(string(numbers[1]), ",", ""), string(numbers[2])
	outcome, out, errText := command(t, "run", "--quiet", demo(t, filepath.Base(string(shown[2]))))
	if outcome != register.Problems || !strings.Contains(out, ": "+rows+" rows") || !strings.Contains(out, bad+" bad") {
		t.Errorf("%v\n%s\n%s", outcome, out, errText)
	}
}

func TestTheDemoOverwritesNothing(t *testing.T) {
	mapping := demo(t, "ostermere_geopackage.yaml")
	if outcome, _, err := command(t, "demo", filepath.Dir(mapping)); outcome != register.Failed || !strings.Contains(err, "exists already") {
		t.Errorf("%v %s", outcome, err)
	}
	for _, arguments := range [][]string{{"demo"}, {"demo", "--here"}, {"demo", "/nowhere/at/all"}} {
		if outcome, _, _ := command(t, arguments...); outcome != register.Misused {
			t.Errorf("%q: %v", arguments, outcome)
		}
	}
}
