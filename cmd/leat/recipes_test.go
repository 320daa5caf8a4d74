package main

import (
	"bufio"
	"bytes"
	"encoding/json"
	"flag"
	"fmt"
	neturl "net/url"
	"os"
	"os/exec"
	"path/filepath"
	"slices"
	"strconv"
	"strings"
	"testing"

	"zombiezen.com/go/sqlite"

	"leat/api/operation"
	"leat/cmd/internal/demo/district"
	"leat/cmd/internal/geopackage"
	"leat/cmd/internal/geopackage/geopackagetest"
	"leat/cmd/internal/register/postgres/postgrestest"
)

var updateRecipes = flag.Bool("update", false, "write the golden results of deploy/recipes")

const recipes = "../../deploy/recipes"

// A recipe is short, or it is none.
func TestRecipesAreShort(t *testing.T) {
	files, err := filepath.Glob(recipes + "/*.*")
	if err != nil || len(files) < 9 {
		t.Fatalf("%d recipes, %v", len(files), err)
	}
	for _, file := range files {
		content, err := os.ReadFile(file)
		if err != nil {
			t.Fatal(err)
		}
		if lines := bytes.Count(content, []byte{'\n'}); lines >= 40 {
			t.Errorf("%s has %d lines, and a recipe has fewer than 40", filepath.Base(file), lines)
		}
	}
}

// golden holds a recipe's result to the one that is kept.
func golden(t *testing.T, name string, got []byte) {
	t.Helper()
	path := filepath.Join(recipes, "golden", name)
	if *updateRecipes {
		if err := os.WriteFile(path, got, 0o644); err != nil {
			t.Fatal(err)
		}
	}
	want, err := os.ReadFile(path)
	if err != nil {
		t.Fatal(err)
	}
	if !bytes.Equal(got, want) {
		t.Errorf("the recipe gives\n%.2000s\nand %s has\n%.2000s\nif that is meant: go test ./cmd/leat -run Recipe -update", got, name, want)
	}
}

// service starts the service and returns its address with a folder to work in.
func service(t *testing.T) (url, folder string) {
	t.Helper()
	_, address, _ := begin(t)
	return "http://" + address, t.TempDir()
}

// do runs a recipe in a folder with an environment of its own.
func do(t *testing.T, folder string, environment []string, name string, arguments ...string) string {
	t.Helper()
	c := exec.CommandContext(t.Context(), name, arguments...)
	c.Dir = folder
	c.Env = append([]string{"PATH=" + os.Getenv("PATH"), "LC_ALL=C.UTF-8", "HOME=" + folder, "no_proxy=*"}, environment...)
	out, err := c.CombinedOutput()
	if err != nil {
		t.Fatalf("%s %q: %v\n%s", name, arguments, err, out)
	}
	return string(out)
}

func recipe(t *testing.T, name string) string {
	t.Helper()
	path, err := filepath.Abs(filepath.Join(recipes, name))
	if err != nil {
		t.Fatal(err)
	}
	return path
}

// requests are the first assets of the demo, one of them wrong.
func requests(t *testing.T, folder string) (path string, lines [][]byte) {
	t.Helper()
	content, err := os.ReadFile("../../testdata/ostermere.ndjson")
	if err != nil {
		t.Fatal(err)
	}
	lines = bytes.SplitAfterN(content, []byte{'\n'}, 26)[:25]
	path = filepath.Join(folder, "requests.ndjson")
	if err := os.WriteFile(path, bytes.Join(lines, nil), 0o600); err != nil {
		t.Fatal(err)
	}
	return path, lines
}

func depths() *operation.Operation {
	all := operation.All()
	return all[slices.IndexFunc(all, func(o *operation.Operation) bool { return o.Name == "depths" })]
}

// The recipes of curl and of Python keep the same lines, which are those of single requests.
func TestRecipesForFiles(t *testing.T) {
	url, folder := service(t)
	in, lines := requests(t, folder)
	var want bytes.Buffer
	for i, line := range lines {
		answer, id, problem := depths().Answer(nil, bytes.TrimSpace(line), operation.Options{Brief: true})
		if problem != nil {
			answer = problem.AppendJSON(nil)
			fmt.Fprintf(&want, `{"id":%s,"line":%d,"problem":%s}`+"\n", id, i+1, answer)
			continue
		}
		fmt.Fprintf(&want, `{"id":%s,"line":%d,"result":%s}`+"\n", id, i+1, answer)
	}
	for _, c := range []struct{ name, program, script, debian string }{
		{"curl", "sh", "bulk.sh", "curl"},
		{"Python", "python3", "bulk.py", "python3"},
	} {
		t.Run(c.name, func(t *testing.T) {
			geopackagetest.Program(t, map[string]string{"sh": "curl", "python3": "python3"}[c.program], c.debian)
			out := filepath.Join(folder, c.name+".ndjson")
			said := do(t, folder, []string{"LEAT_URL=" + url}, c.program, recipe(t, c.script), in, out)
			got, err := os.ReadFile(out)
			if err != nil {
				t.Fatal(err)
			}
			if !bytes.Equal(got, want.Bytes()) {
				t.Errorf("the answers are\n%s\nwant those of single requests\n%s", got, want.Bytes())
			}
			golden(t, "answers.ndjson", got)
			if c.name == "Python" && !strings.Contains(said, "SAL-RD-0017") {
				t.Errorf("the bad line is not told: %s", said)
			}
		})
	}
}

// A service that cannot be asked, or that refuses, makes the recipes fail and leaves no answers behind.
func TestRecipesForFilesFail(t *testing.T) {
	url, folder := service(t)
	in, _ := requests(t, folder)
	for _, c := range []struct{ program, script, part string }{{"sh", "bulk.sh", "curl"}, {"python3", "bulk.py", "python3"}} {
		geopackagetest.Program(t, c.part, c.part)
		for _, operation := range []string{"depth", "depths"} {
			environment := "LEAT_URL=" + url
			if operation == "depths" {
				environment = "LEAT_URL=http://127.0.0.1:1"
			}
			out := filepath.Join(folder, "none.ndjson")
			command := exec.CommandContext(t.Context(), c.program, recipe(t, c.script), in, out, operation)
			command.Env = []string{"PATH=" + os.Getenv("PATH"), environment, "no_proxy=*"}
			if said, err := command.CombinedOutput(); err == nil {
				t.Errorf("%s with %s succeeds: %s", c.script, environment, said)
			}
			if _, err := os.Stat(out); err == nil {
				t.Errorf("%s with %s leaves answers behind", c.script, environment)
			}
		}
	}
}

// exported are assets of the register as a desktop GIS exports them.
func exported(t *testing.T, path string, most int) {
	t.Helper()
	type feature struct {
		Type       string         `json:"type"`
		ID         int            `json:"id"`
		Geometry   map[string]any `json:"geometry"`
		Properties map[string]any `json:"properties"`
	}
	var features []feature
	for i, c := range district.Channels() {
		if c.Status != "in_use" || c.Shape == "SURVEY" || c.Shape == "SWALE" || c.Shape == "GUTTER" || c.Class != "roadside_ditch" && c.Class != "sewer" && c.Class != "culvert" || len(features) == most {
			continue
		}
		if _, given := c.DownstreamLevel.(float64); !given {
			continue
		}
		var line [][]float64
		for _, v := range c.Line {
			line = append(line, []float64{v.X, v.Y, v.Z})
		}
		features = append(features, feature{"Feature", i + 1, map[string]any{"type": "LineString", "coordinates": line}, map[string]any{
			"asset_code": c.Code, "shape": c.Shape, "material": c.Material, "bottom_width": c.BottomWidth, "side_slope": c.SideSlope, "bank_height": c.BankHeight, "width_mm": c.Width,
			"height_mm": c.Height, "barrels": c.Barrels, "upstream_level": c.UpstreamLevel, "downstream_level": c.DownstreamLevel, "length": c.Length, "flow_design": c.FlowDesign,
		}})
	}
	content, err := json.Marshal(map[string]any{"type": "FeatureCollection", "name": "channels", "features": features})
	if err != nil {
		t.Fatal(err)
	}
	if err := os.WriteFile(path, content, 0o600); err != nil {
		t.Fatal(err)
	}
}

func TestRecipeForALayer(t *testing.T) {
	geopackagetest.Program(t, "python3", "python3")
	url, folder := service(t)
	in, out := filepath.Join(folder, "channels.geojson"), filepath.Join(folder, "with_depths.geojson")
	exported(t, in, 16)
	do(t, folder, []string{"LEAT_URL=" + url}, "python3", recipe(t, "gis_layer.py"), in, out)
	got, err := os.ReadFile(out)
	if err != nil {
		t.Fatal(err)
	}
	golden(t, "layer.geojson", got)
	var layer struct {
		Name     string
		Features []struct {
			ID         int
			Geometry   json.RawMessage
			Properties map[string]any
		}
	}
	if err := json.Unmarshal(got, &layer); err != nil {
		t.Fatal(err)
	}
	told, answered := 0, 0
	for _, f := range layer.Features {
		if len(f.Geometry) < 50 || f.Properties["asset_code"] == nil {
			t.Errorf("feature %d has lost its geometry or its properties", f.ID)
		}
		switch {
		case f.Properties["leat_problem"] != nil:
			told++
		case f.Properties["leat_normal_depth"] != nil:
			answered++
		}
	}
	if len(layer.Features) != 16 || layer.Name != "channels" || told == 0 || told+answered != 16 {
		t.Errorf("%d features, %d with a problem, %d answered", len(layer.Features), told, answered)
	}
}

// database makes a database with the register of Ostermere.
func database(t *testing.T, folder string) (url string) {
	t.Helper()
	geopackagetest.Program(t, "psql", "postgresql-client")
	url = postgrestest.Database(t)
	path := filepath.Join(folder, "ostermere.sql")
	file, err := os.Create(path)
	if err != nil {
		t.Fatal(err)
	}
	if err := district.WriteSQL(file); err != nil {
		t.Fatal(err)
	}
	if err := file.Close(); err != nil {
		t.Fatal(err)
	}
	psql(t, folder, url, nil, "-f", path)
	return url
}

func psql(t *testing.T, folder, url string, environment []string, arguments ...string) string {
	t.Helper()
	return do(t, folder, environment, "psql", append([]string{"-X", "-q", "-v", "ON_ERROR_STOP=1", "-d", url}, arguments...)...)
}

// The recipe of psql and that of PL/Python fill the same table, and each number is that of a single request.
func TestRecipesInSQL(t *testing.T) {
	service, folder := service(t)
	geopackagetest.Program(t, "curl", "curl")
	url := database(t, folder)
	psql(t, folder, url, []string{"LEAT_URL=" + service}, "-f", recipe(t, "psql_copy.sql"))
	const table = "select * from ostermere.depths order by asset collate \"C\""
	byCopy := psql(t, folder, url, nil, "--csv", "-c", table)
	lines := strings.SplitAfterN(byCopy, "\n", 42)
	golden(t, "depths.csv", []byte(strings.Join(lines[:41], "")))

	// Each row again, as a single request.
	rows := psql(t, folder, url, nil, "-A", "-t", "-F", "\x01", "-c",
		"select r.request::text, coalesce(d.normal_depth::text, 'null'), coalesce(d.freeboard::text, 'null'), d.problem is not null from ostermere.requests r join ostermere.depths d on d.asset = r.asset_code")
	seen, bad := 0, 0
	scanner := bufio.NewScanner(strings.NewReader(rows))
	for scanner.Scan() {
		cells := strings.Split(scanner.Text(), "\x01")
		answer, _, problem := depths().Answer(nil, []byte(cells[0]), operation.Options{Brief: true})
		seen++
		if (problem != nil) != (cells[3] == "t") {
			t.Errorf("%s: problem %v, told %s", cells[0], problem, cells[3])
		}
		if problem != nil {
			bad++
			continue
		}
		var want struct {
			Normal    *float64 `json:"normal_depth"`
			Freeboard *float64 `json:"freeboard"`
		}
		if err := json.Unmarshal(answer, &want); err != nil {
			t.Fatal(err)
		}
		for i, w := range []*float64{want.Normal, want.Freeboard} {
			var got *float64
			if err := json.Unmarshal([]byte(cells[1+i]), &got); err != nil {
				t.Fatal(err)
			}
			if (got == nil) != (w == nil) || got != nil && *got != *w {
				t.Errorf("%s: %s", cells[0], cells[1+i])
			}
		}
	}
	if seen < 1000 || bad < 10 {
		t.Errorf("%d rows, %d of them bad", seen, bad)
	}

	t.Run("PL/Python", func(t *testing.T) {
		if got := psql(t, folder, url, nil, "-A", "-t", "-c", "select count(*) from pg_available_extensions where name = 'plpython3u'"); strings.TrimSpace(got) != "1" {
			const missing = "the server has no PL/Python (Debian's package postgresql-plpython3-15)"
			if os.Getenv("LEAT_ALL_PARTS") == "1" {
				t.Fatal(missing)
			}
			t.Skip(missing)
		}
		psql(t, folder, url, nil, "-c", "drop table ostermere.depths")
		psql(t, folder, url, []string{"PGOPTIONS=-cleat.url=" + service}, "-f", recipe(t, "plpython.sql"))
		// A problem is told in one sentence with the column here, and with the pointer there.
		const numbers = "select asset, normal_depth, critical_depth, normal_velocity, fill, slope_class, capacity_ratio, freeboard, problem is null from ostermere.depths order by asset collate \"C\""
		byPython := psql(t, folder, url, nil, "--csv", "-c", numbers)
		psql(t, folder, url, []string{"LEAT_URL=" + service}, "-f", recipe(t, "psql_copy.sql"))
		if again := psql(t, folder, url, nil, "--csv", "-c", numbers); again != byPython {
			t.Errorf("PL/Python and \\copy differ:\n%.500s\n%.500s", byPython, again)
		}
	})
}

// A run over PostgreSQL, and the view that joins its results with the assets: every asset once, with a verdict or the reason why there is none. The same
// register in a GeoPackage gets the same verdicts and numbers.
func TestRecipeForAView(t *testing.T) {
	folder := t.TempDir()
	url := database(t, folder)
	address, err := neturl.Parse(url)
	if err != nil {
		t.Fatal(err)
	}
	environment := []string{"PGHOST=" + address.Query().Get("host"), "PGUSER=" + address.Query().Get("user"), "PGDATABASE=" + strings.TrimPrefix(address.Path, "/")}
	if host := address.Hostname(); host != "" { // a server that LEAT_TEST_POSTGRES names
		password, _ := address.User.Password()
		environment = []string{"PGHOST=" + host, "PGPORT=" + address.Port(), "PGUSER=" + address.User.Username(), "PGPASSWORD=" + password, "PGDATABASE=" + strings.TrimPrefix(address.Path, "/")}
	}
	c := command(t, environment, "register", "run", "--quiet", "../../deploy/register/ostermere_postgres.yaml")
	if out, _ := c.CombinedOutput(); c.ProcessState.ExitCode() != exitProblems {
		t.Fatalf("%v\n%s", c.ProcessState, out)
	}
	psql(t, folder, url, nil, "-f", recipe(t, "results_view.sql"))
	psql(t, folder, url, nil, "-f", recipe(t, "results_view.sql")) // a view can be made anew
	got := psql(t, folder, url, nil, "--csv", "-c", `select verdict, count(*), count(distinct asset_code) as assets, count(problems) as with_problems from ostermere.appraised_channels group by 1 order by 1`)
	got += psql(t, folder, url, nil, "--csv", "-c", `select asset_code, class, verdict, governing_flow, governing_criterion, governing_value, governing_limit, governing_unit, problems from ostermere.appraised_channels order by asset_code collate "C" limit 40`)
	golden(t, "view.csv", []byte(got))

	mapping := makeRegister(t, 1)
	if out, _ := command(t, nil, "register", "run", "--quiet", mapping).CombinedOutput(); !strings.Contains(string(out), "1130 computed") {
		t.Fatalf("%s", out)
	}
	const compared = "asset, verdict, governing_flow, governing_criterion, governing_value, governing_limit, governing_unit, fingerprint"
	inPostgres := psql(t, folder, url, nil, "-A", "-t", "-c", "select "+compared+" from ostermere.leat_results order by asset collate \"C\"")
	f, err := geopackage.Open(t.Context(), filepath.Join(filepath.Dir(mapping), "ostermere.gpkg"), geopackage.Read)
	if err != nil {
		t.Fatal(err)
	}
	defer f.Close()
	lines := strings.Split(strings.TrimSpace(inPostgres), "\n")
	at := 0
	err = f.Rows("SELECT "+compared+" FROM leat_results ORDER BY asset", func(s *sqlite.Stmt) error {
		if at >= len(lines) {
			at++
			return nil
		}
		cells := strings.Split(lines[at], "|")
		at++
		for i, cell := range cells {
			same := cell == s.ColumnText(i)
			if s.ColumnType(i) == sqlite.TypeFloat {
				number, err := strconv.ParseFloat(cell, 64)
				same = err == nil && number == s.ColumnFloat(i)
			}
			if !same {
				t.Errorf("%s: PostgreSQL has %q where the GeoPackage has %q", cells[0], cell, s.ColumnText(i))
			}
		}
		return nil
	})
	if err != nil || at != len(lines) {
		t.Errorf("%d results in the GeoPackage, %d in PostgreSQL, %v", at, len(lines), err)
	}
}
