package register_test

import (
	"bytes"
	"context"
	"fmt"
	"os"
	"path/filepath"
	"strings"
	"testing"

	"leat/cmd/internal/register"
)

// drainsInGeoPackage returns the results and problems of a GeoPackage as rows of a CSV file would be.
func drainsInGeoPackage(t *testing.T, path string) (results []map[string]string, problems []string) {
	t.Helper()
	names := []string{"leat_asset", "leat_normal_depth", "leat_critical_depth", "leat_capacity_ratio", "leat_run", "leat_fingerprint", "leat_engine_version", "leat_computed_at"}
	// Numbers with 17 digits, which float64 needs at most.
	number := func(column string) string {
		return "CASE WHEN " + column + " IS NULL THEN '' ELSE printf('%!.17g', " + column + ") END"
	}
	statement := "SELECT leat_asset, " + number("leat_normal_depth") + ", " + number("leat_critical_depth") + ", " + number("leat_capacity_ratio") +
		", leat_run, leat_fingerprint, leat_engine_version, leat_computed_at FROM results ORDER BY CAST(substr(leat_asset, 2) AS INTEGER)"
	for _, line := range texts(t, path, statement) {
		row := map[string]string{}
		for i, cell := range strings.Split(line, "|") {
			row[names[i]] = cell
		}
		results = append(results, row)
	}
	return results, texts(t, path, `SELECT asset, "column", line FROM results_problems ORDER BY CAST(substr(asset, 2) AS INTEGER)`)
}

// A register that comes as a file, in the order of its lines, into a database: results are the unary answers bit for bit, rows that have not changed are left
// alone, and a run that is broken off goes on at its line.
func TestTenThousandRowsOfCSVIntoAGeoPackage(t *testing.T) {
	text, requests, bad := drainsCSV(10_000)
	mapping := strings.Replace(drainsMapping, "format: csv, path: results.csv", "format: geopackage, path: results.gpkg, table: results", 1)
	path := folder(t, map[string]string{"m.yaml": mapping, "drains.csv": text})
	file, arguments := filepath.Join(path, "results.gpkg"), []string{"run", "--rows", "500", "--quiet", filepath.Join(path, "m.yaml")}

	// Broken off soon after it began.
	ctx, stop := context.WithCancel(t.Context())
	defer stop()
	var stdout bytes.Buffer
	stopper := &stopper{stop: stop}
	if outcome := register.Run(ctx, []string{"run", "--rows", "500", filepath.Join(path, "m.yaml")}, &stdout, stopper); outcome != register.Failed || !strings.Contains(stopper.text.String(), "start it again") {
		t.Fatalf("%v %s", outcome, &stopper.text)
	}
	outcome, out, stderr := command(t, arguments...)
	if outcome != register.Problems || !strings.Contains(stderr, "going on with run") {
		t.Fatalf("%v\n%s\n%s", outcome, out, stderr)
	}
	results, problems := drainsInGeoPackage(t, file)
	judgeDrains(t, results, requests)
	if len(problems) != len(bad) {
		t.Errorf("%d problems, want %d", len(problems), len(bad))
	}
	for _, line := range problems {
		cells := strings.Split(line, "|")
		if bad[cells[0]] != cells[1] || cells[2] != fmt.Sprint(lineOf(cells[0])) {
			t.Errorf("%s, bad in %s", line, bad[cells[0]])
		}
	}

	if outcome, out, stderr := command(t, arguments...); outcome != register.Problems || !strings.Contains(out, "0 computed, 9900 unchanged, 100 bad, 0 results removed") {
		t.Errorf("nothing has changed: %v\n%s\n%s", outcome, out, stderr)
	}
	// One row changes, two are spoilt.
	lines := strings.Split(text, "\n")
	lines[2] = strings.Replace(lines[2], ",1:2,", ",1:3,", 1)
	lines[4] = strings.Replace(lines[4], ",1:2,", ",flat,", 1)
	lines[6] = strings.Replace(lines[6], "concrete", "wood", 1)
	if err := os.WriteFile(filepath.Join(path, "drains.csv"), []byte(strings.Join(lines, "\n")), 0o600); err != nil {
		t.Fatal(err)
	}
	if outcome, out, stderr = command(t, arguments...); outcome != register.Problems || !strings.Contains(out, "1 computed, 9897 unchanged, 102 bad, 2 results removed") {
		t.Errorf("%v\n%s\n%s", outcome, out, stderr)
	}
	if results, problems = drainsInGeoPackage(t, file); len(results) != 9898 || len(problems) != 102 {
		t.Errorf("%d results, %d problems", len(results), len(problems))
	}
}

// lineOf is the line on which a drain stands.
func lineOf(asset string) int {
	var i int
	fmt.Sscanf(asset, "D%d", &i)
	return i + 2
}

// A stopper stops a run when the run has told its id.
type stopper struct {
	text bytes.Buffer
	stop func()
}

func (s *stopper) Write(p []byte) (int, error) {
	s.stop()
	return s.text.Write(p)
}
