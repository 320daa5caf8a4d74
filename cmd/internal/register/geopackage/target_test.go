package geopackage_test

import (
	"encoding/hex"
	"errors"
	"fmt"
	"os"
	"os/exec"
	"slices"
	"strings"
	"testing"
	"time"

	"leat/cmd/internal/geopackage"
	"leat/cmd/internal/geopackage/geopackagetest"
	gpkg "leat/cmd/internal/register/geopackage"
	"leat/cmd/internal/register/row"
	"leat/cmd/internal/register/store"
)

var firstStart = store.Start{New: "run-1", EngineVersion: "1", Mapping: "m", At: noon}

func openTarget(t testing.TB, path string) store.Target {
	t.Helper()
	target, err := gpkg.OpenTarget(t.Context(), &store.TargetSpec{Format: "geopackage", Path: path, Table: "results"})
	if err != nil {
		t.Fatal(err)
	}
	t.Cleanup(func() { target.Close() })
	return target
}

func begin(t testing.TB, target store.Target, l *store.Layout, start store.Start) store.State {
	t.Helper()
	if err := target.Check(t.Context(), l); err != nil {
		t.Fatal(err)
	}
	state, err := target.Begin(t.Context(), l, start)
	if err != nil {
		t.Fatal(err)
	}
	return state
}

// pages reads the register in pages of so many rows, with the geometry.
func (x *fixture) pages(t testing.TB, limit int, each func(*row.Page)) {
	t.Helper()
	s, err := gpkg.OpenSource(t.Context(), x.source())
	if err != nil {
		t.Fatal(err)
	}
	defer s.Close()
	r, err := s.Read(t.Context(), &store.Query{Columns: []string{"code", "shape", "width"}})
	if err != nil {
		t.Fatal(err)
	}
	defer r.Close()
	var page row.Page
	for r.Next(t.Context(), &page, limit) == nil {
		each(&page)
	}
}

func fingerprint(key row.Value) string {
	return strings.Repeat(hex.EncodeToString(key.Bytes()[len(key.Bytes())-2:]), 16)
}

// batchOf makes results of a page: every tenth channel has no width, which is a problem.
func batchOf(page *row.Page, after row.Value, run string) *store.Batch {
	b := &store.Batch{Stretch: store.Stretch{Ordered: true, After: after}}
	for i := range page.Rows() {
		cells := page.Row(i)
		key := cells[0].Clone()
		b.Stretch.Keys = append(b.Stretch.Keys, key)
		b.Stretch.Until, b.Mark = key, key
		b.Counts.Read++
		if cells[2].Float() == 0 {
			b.Counts.Bad++
			b.Counts.Problems++
			b.Gone = append(b.Gone, key)
			b.Problems = append(b.Problems, store.Problem{Asset: key, Column: "width", Pointer: "/section/bottom_width", Code: "out_of_range", Text: "The width is 0."})
			continue
		}
		b.Counts.Computed++
		verdict := []string{"meets", "falls_short", "undetermined"}[i%3]
		b.Results = append(b.Results, []row.Value{key, cells[1].Clone(), row.OfFloat(cells[2].Float() / 3), row.OfString(verdict), row.OfBool(i%2 == 0), row.OfString(run),
			row.OfString(fingerprint(key)), row.OfInt(int64(i) + 7), row.OfString("1"), row.OfTime(noon.Add(time.Second))})
	}
	return b
}

func (x *fixture) spatial(t testing.TB) *row.Spatial {
	t.Helper()
	s, err := gpkg.OpenSource(t.Context(), x.source())
	if err != nil {
		t.Fatal(err)
	}
	defer s.Close()
	return s.Columns()[1].Spatial
}

// write does a whole run.
func (x *fixture) write(t testing.TB, path string, start store.Start) {
	t.Helper()
	target := openTarget(t, path)
	state := begin(t, target, layout(x.spatial(t)), start)
	after := row.Value{}
	x.pages(t, 10, func(page *row.Page) {
		b := batchOf(page, after, state.Run)
		if err := target.Commit(t.Context(), b); err != nil {
			t.Fatal(err)
		}
		after = b.Mark
	})
	if err := target.Finish(t.Context(), &store.Summary{Run: state.Run, Finished: noon.Add(time.Minute)}); err != nil {
		t.Fatal(err)
	}
	if err := target.Close(); err != nil {
		t.Fatal(err)
	}
}

// texts returns the rows of a statement, columns joined by a bar.
var texts = geopackagetest.Texts

// Results go into the register's own file, and the file stays one that the standard allows; the register's own layer is as it was.
func TestResultsInPlace(t *testing.T) {
	x := build(t, 43, false)
	before := texts(t, x.path, "SELECT *, hex(shape) FROM channels ORDER BY fid")
	x.write(t, x.path, firstStart)
	geopackagetest.Judge(t, x.path)
	if after := texts(t, x.path, "SELECT *, hex(shape) FROM channels ORDER BY fid"); !slices.Equal(before, after) {
		t.Error("the register's own layer has changed")
	}
	if got := texts(t, x.path, "SELECT count(*), count(DISTINCT asset), sum(c.shape = r.shape), sum(run = 'run-1'), max(computed_at) FROM results r JOIN channels c ON c.code = r.asset"); got[0] != "38|38|38|38|2026-06-01T12:00:01.000000Z" {
		t.Errorf("%q", got)
	}
	if got := texts(t, x.path, "SELECT run, asset, line, \"column\", pointer, code, text FROM results_problems ORDER BY asset"); len(got) != 5 || got[1] != "run-1|C-000010||width|/section/bottom_width|out_of_range|The width is 0." {
		t.Errorf("%q", got)
	}
	if got := texts(t, x.path, "SELECT run, \"read\", computed, bad, problems, mark, finished FROM results_runs"); !slices.Equal(got, []string{"run-1|43|38|5|5|C-000042|2026-06-01T12:01:00.000000Z"}) {
		t.Errorf("%q", got)
	}
	if got := texts(t, x.path, "SELECT title, description FROM gpkg_data_columns WHERE table_name = 'results' AND column_name = 'normal_depth'"); !slices.Equal(got, []string{"Normal depth [m]|Lowest normal depth (UCUM m)"}) {
		t.Errorf("%q", got)
	}
	if got := texts(t, x.path, "SELECT f_geometry_column, useAsDefault, instr(styleSLD, 'falls_short') > 0, instr(styleQML, 'falls_short') > 0 FROM layer_styles WHERE f_table_name = 'results'"); !slices.Equal(got, []string{"shape|1|1|1"}) {
		t.Errorf("%q", got)
	}
	if got := texts(t, x.path, "PRAGMA journal_mode"); got[0] != "delete" {
		t.Errorf("the file is left in journal mode %s", got[0])
	}
	if _, err := os.Stat(x.path + "-wal"); err == nil {
		t.Error("a -wal file is left beside the file")
	}

	// Again, with a channel that has got its width, one that has lost it, and one that is gone.
	x.run(t, "UPDATE channels SET width = 0.7 WHERE code = 'C-000010'", "UPDATE channels SET width = 0 WHERE code = 'C-000011'")
	second := firstStart
	second.New = "run-2"
	x.write(t, x.path, second)
	geopackagetest.Judge(t, x.path)
	if got := texts(t, x.path, "SELECT count(*), count(DISTINCT asset), sum(asset = 'C-000010'), sum(asset = 'C-000011'), sum(run = 'run-2') FROM results"); got[0] != "38|38|1|0|38" {
		t.Errorf("%q", got)
	}
	if got := texts(t, x.path, "SELECT count(*), sum(asset = 'C-000011'), sum(asset = 'C-000010') FROM results_problems"); got[0] != "5|1|0" {
		t.Errorf("%q", got)
	}
}

// A target of its own takes over the source's reference system; without a geometry it is a plain table.
func TestResultsInANewFile(t *testing.T) {
	x := build(t, 12, true)
	path := t.TempDir() + "/results.gpkg"
	x.write(t, path, firstStart)
	geopackagetest.Judge(t, path)
	if got := texts(t, path, "SELECT srs_name, organization FROM gpkg_spatial_ref_sys WHERE srs_id = 990001"); !slices.Equal(got, []string{"District grid|NONE"}) {
		t.Errorf("%q", got)
	}
	l := layout(x.spatial(t))
	l.Columns = slices.Delete(l.Columns, 1, 2)
	plain := t.TempDir() + "/plain.gpkg"
	target := openTarget(t, plain)
	begin(t, target, l, firstStart)
	if err := target.Finish(t.Context(), &store.Summary{Run: "run-1", Finished: noon}); err != nil {
		t.Fatal(err)
	}
	if err := target.Close(); err != nil {
		t.Fatal(err)
	}
	geopackagetest.Judge(t, plain)
	if got := texts(t, plain, "SELECT table_name, data_type FROM gpkg_contents ORDER BY 1"); !slices.Equal(got, []string{"leat_register_tables|attributes", "results|attributes", "results_problems|attributes", "results_runs|attributes"}) {
		t.Errorf("%q", got)
	}
}

func TestStoredResultsAreFound(t *testing.T) {
	x := build(t, 43, false)
	x.write(t, x.path, firstStart)
	target := openTarget(t, x.path)
	second := firstStart
	second.New = "run-2"
	if state := begin(t, target, layout(x.spatial(t)), second); state.Fresh || state.Resumed || state.Run != "run-2" {
		t.Errorf("%+v", state)
	}
	for _, stretch := range []store.Stretch{
		{Ordered: true, After: row.OfString("C-000010"), Until: row.OfString("C-000013")},
		{Keys: []row.Value{row.OfString("C-000012"), {}, row.OfString("C-000010"), row.OfString("nobody"), row.OfString("C-000011"), row.OfString("C-000013")}},
	} {
		var keys []string
		err := target.Stored(t.Context(), &stretch, func(key row.Value, s store.Stored) {
			keys = append(keys, key.String())
			if hex.EncodeToString(s.Fingerprint[:]) != fingerprint(key) || s.Copied < 7 {
				t.Errorf("%s: %+v", key, s)
			}
		})
		slices.Sort(keys)
		if err != nil || !slices.Equal(keys, []string{"C-000011", "C-000012", "C-000013"}) {
			t.Errorf("%q, %v", keys, err)
		}
	}
}

func TestRunsGoOnWhereTheyStopped(t *testing.T) {
	x := build(t, 43, false)
	l := layout(x.spatial(t))
	target := openTarget(t, x.path)
	begin(t, target, l, firstStart)
	after, n := row.Value{}, 0
	x.pages(t, 10, func(page *row.Page) {
		if n++; n > 2 {
			return
		}
		b := batchOf(page, after, "run-1")
		if err := target.Commit(t.Context(), b); err != nil {
			t.Fatal(err)
		}
		after = b.Mark
	})
	if err := target.Close(); err != nil {
		t.Fatal(err)
	}

	for _, c := range []struct {
		name   string
		change func(*store.Layout, *store.Start)
		want   store.State
		says   string
	}{
		{"as before", func(*store.Layout, *store.Start) {}, store.State{Run: "run-1", Resumed: true, Mark: row.OfString("C-000019"), Fresh: true, Counts: store.Counts{Read: 20, Computed: 18, Bad: 2, Problems: 2}}, ""},
		{"by name", func(_ *store.Layout, s *store.Start) { s.Run = "run-1" }, store.State{Run: "run-1", Resumed: true, Mark: row.OfString("C-000019"), Fresh: true, Counts: store.Counts{Read: 20, Computed: 18, Bad: 2, Problems: 2}}, ""},
		{"another layout", func(l *store.Layout, _ *store.Start) { l.Hash = "two" }, store.State{Run: "run-2", Fresh: true}, ""},
		{"another engine", func(_ *store.Layout, s *store.Start) { s.EngineVersion = "2" }, store.State{Run: "run-2", Fresh: true}, ""},
		{"a name of its own", func(_ *store.Layout, s *store.Start) { s.Run = "mine" }, store.State{Run: "mine", Fresh: true}, ""},
		{"the name of one with another layout", func(l *store.Layout, s *store.Start) { l.Hash, s.Run = "two", "run-1" }, store.State{}, "another name"},
	} {
		t.Run(c.name, func(t *testing.T) {
			copied := x.copy(t)
			l, start := layout(x.spatial(t)), firstStart
			start.New = "run-2"
			c.change(l, &start)
			target := openTarget(t, copied)
			state, err := target.Begin(t.Context(), l, start)
			if c.says != "" {
				if err == nil || !strings.Contains(err.Error(), c.says) {
					t.Errorf("%v, want %q", err, c.says)
				}
				return
			}
			if err != nil || fmt.Sprintf("%+v", state) != fmt.Sprintf("%+v", c.want) {
				t.Errorf("%+v, %v, want %+v", state, err, c.want)
			}
			if err := target.Close(); err != nil {
				t.Fatal(err)
			}
			if got := texts(t, copied, "PRAGMA journal_mode"); got[0] != "delete" {
				t.Errorf("the file is left in journal mode %s", got[0])
			}
		})
	}
}

func (x *fixture) copy(t testing.TB) string {
	t.Helper()
	content, err := os.ReadFile(x.path)
	if err != nil {
		t.Fatal(err)
	}
	path := t.TempDir() + "/copy.gpkg"
	if err := os.WriteFile(path, content, 0o600); err != nil {
		t.Fatal(err)
	}
	return path
}

// Nothing that is not ours is written to, and nothing is changed before that is clear.
func TestWhatIsNotOursIsRefused(t *testing.T) {
	x := build(t, 5, false)
	for _, c := range []struct {
		name   string
		before []string
		change func(*store.TargetSpec, *store.Layout)
		field  string
		says   string
	}{
		{"the register's own layer", nil, func(s *store.TargetSpec, _ *store.Layout) { s.Table = "channels" }, "table", "did not make"},
		{"in other letters", nil, func(s *store.TargetSpec, _ *store.Layout) { s.Table = "Channels" }, "table", "did not make"},
		{"a view", nil, func(s *store.TargetSpec, _ *store.Layout) { s.Table = "narrow" }, "table", "did not make"},
		{"problems over the points", nil, func(s *store.TargetSpec, _ *store.Layout) { s.Problems = "points" }, "problems", "did not make"},
		{"problems over the results", nil, func(s *store.TargetSpec, _ *store.Layout) { s.Problems = "RESULTS" }, "problems", "something else"},
		{"a reserved name", nil, func(s *store.TargetSpec, _ *store.Layout) { s.Table = "gpkg_results" }, "table", "reserved"},
		{"a name with a quote", nil, func(s *store.TargetSpec, _ *store.Layout) { s.Table = `a"b` }, "table", "letters"},
		{"a folder that is not there", nil, func(s *store.TargetSpec, _ *store.Layout) { s.Path = "/nowhere/x.gpkg" }, "path", "no folder"},
		{"two columns of one name", nil, func(_ *store.TargetSpec, l *store.Layout) { l.Columns[2].Name = "ASSET" }, "copy", "one name"},
		{"a geometry of another kind", nil, func(_ *store.TargetSpec, l *store.Layout) { l.Columns[1].Geometry = "ewkb" }, "copy", "ewkb"},
		{"another reference system under the number", []string{"UPDATE gpkg_spatial_ref_sys SET organization = 'other' WHERE srs_id = 990001"}, func(*store.TargetSpec, *store.Layout) {}, "copy", "reference system"},
	} {
		t.Run(c.name, func(t *testing.T) {
			path := x.copy(t)
			(&fixture{path: path}).run(t, c.before...)
			l := layout(x.spatial(t))
			spec := &store.TargetSpec{Format: "geopackage", Path: path, Table: "results"}
			c.change(spec, l)
			target, err := gpkg.OpenTarget(t.Context(), spec)
			if err == nil {
				defer target.Close()
				err = target.Check(t.Context(), l)
				if _, beginning := target.Begin(t.Context(), l, firstStart); beginning == nil {
					t.Error("a run begins all the same")
				}
			}
			var misfit *store.Misfit
			if !errors.As(err, &misfit) || misfit.Field != c.field || !strings.Contains(misfit.Detail, c.says) {
				t.Errorf("%v, want %q at %s", err, c.says, c.field)
			}
			if target != nil {
				target.Close()
			}
			if got := texts(t, path, "SELECT name FROM sqlite_master WHERE name LIKE 'results%' OR name LIKE 'leat%'"); len(got) > 0 {
				t.Errorf("tables were made: %q", got)
			}
		})
	}
	// Ours, but of other columns.
	x.write(t, x.path, firstStart)
	l := layout(x.spatial(t))
	l.Columns[3].Name = "judgement"
	var misfit *store.Misfit
	if err := openTarget(t, x.path).Check(t.Context(), l); !errors.As(err, &misfit) || misfit.Field != "table" || !strings.Contains(misfit.Detail, "lacks judgement") {
		t.Errorf("%v", err)
	}
}

// A style that somebody has changed stays; tables that were deleted in a GIS, which may leave their index and their entries behind, come again; and a copied column may
// have the name that the results' own key would have.
func TestTablesThatOthersChanged(t *testing.T) {
	x := build(t, 12, false)
	x.write(t, x.path, firstStart)
	x.run(t, "UPDATE layer_styles SET styleQML = 'mine'", "DROP TABLE results", "DROP TABLE results_runs", "DELETE FROM gpkg_contents WHERE table_name = 'results_runs'")
	second := firstStart
	second.New = "run-2"
	x.write(t, x.path, second)
	geopackagetest.Judge(t, x.path)
	if got := texts(t, x.path, "SELECT styleQML, (SELECT count(*) FROM results) FROM layer_styles"); !slices.Equal(got, []string{"mine|10"}) {
		t.Errorf("%q", got)
	}

	l := layout(x.spatial(t))
	l.Columns[2].Name = "FID"
	target := openTarget(t, t.TempDir()+"/fid.gpkg")
	begin(t, target, l, firstStart)
}

// A program that shows the file, with a transaction open all the while, sees the state of its beginning and stops nothing.
func TestReadersAndTheRunDoNotStopEachOther(t *testing.T) {
	x := build(t, 43, false)
	target := openTarget(t, x.path)
	begin(t, target, layout(x.spatial(t)), firstStart)
	viewer, err := geopackage.Open(t.Context(), x.path, geopackage.Read)
	if err != nil {
		t.Fatal(err)
	}
	defer viewer.Close()
	if err := viewer.Run("BEGIN"); err != nil {
		t.Fatal(err)
	}
	if n, err := viewer.Integer("SELECT count(*) FROM results"); err != nil || n != 0 {
		t.Fatal(n, err)
	}
	after := row.Value{}
	x.pages(t, 10, func(page *row.Page) {
		b := batchOf(page, after, "run-1")
		if err := target.Commit(t.Context(), b); err != nil {
			t.Fatal(err)
		}
		after = b.Mark
	})
	if n, err := viewer.Integer("SELECT count(*) FROM results"); err != nil || n != 0 {
		t.Errorf("the viewer sees %d rows within its transaction, %v", n, err)
	}
	if err := viewer.Run("COMMIT"); err != nil {
		t.Fatal(err)
	}
	if n, err := viewer.Integer("SELECT count(*) FROM results"); err != nil || n != 38 {
		t.Errorf("the viewer sees %d rows afterwards, %v", n, err)
	}
	// With the viewer still there the file cannot leave WAL mode; nothing is lost by that.
	if err := target.Finish(t.Context(), &store.Summary{Run: "run-1", Finished: noon}); err != nil {
		t.Fatal(err)
	}
	if err := target.Close(); err != nil {
		t.Fatal(err)
	}
}

// A batch whose last row cannot be written leaves nothing behind.
func TestABatchIsWrittenWholeOrNotAtAll(t *testing.T) {
	x := build(t, 10, false)
	target := openTarget(t, x.path)
	begin(t, target, layout(x.spatial(t)), firstStart)
	x.pages(t, 10, func(page *row.Page) {
		b := batchOf(page, row.Value{}, "run-1")
		x.run(t, "CREATE TRIGGER full BEFORE UPDATE ON results_runs BEGIN SELECT RAISE(ABORT, 'no more'); END")
		if err := target.Commit(t.Context(), b); err == nil {
			t.Error("committed")
		}
	})
	if got := texts(t, x.path, "SELECT (SELECT count(*) FROM results), (SELECT count(*) FROM results_problems), (SELECT mark IS NULL FROM results_runs), (SELECT count(*) FROM rtree_results_shape)"); got[0] != "0|0|1|0" {
		t.Errorf("%q", got)
	}
}

// Debian's gdal-bin shares nothing with this program: it must find the layer and the same geometries in it.
func TestAnotherProgramReadsTheSameGeometry(t *testing.T) {
	info, convert := geopackagetest.Program(t, "ogrinfo", "gdal-bin"), geopackagetest.Program(t, "ogr2ogr", "gdal-bin")
	x := build(t, 43, false)
	x.write(t, x.path, firstStart)
	output, err := exec.Command(info, "-al", "-so", x.path).CombinedOutput() // opened to be written to: a program warns then of what it does not know
	if err != nil {
		t.Fatalf("ogrinfo: %v\n%s", err, output)
	}
	for _, want := range []string{"Layer name: results", "3D Measured Line String", "Feature Count: 38", "verdict: String", "normal_depth: Real", "surcharged: Integer(Boolean)", "computed_at: DateTime"} {
		if !strings.Contains(string(output), want) {
			t.Errorf("ogrinfo does not say %q:\n%s", want, output)
		}
	}
	for _, line := range strings.Split(string(output), "\n") {
		// Debian 12's is older than version 1.4 of the standard, and says so.
		if older := strings.Contains(line, "v1.4.0"); !older && (strings.Contains(line, "ERROR") || strings.Contains(line, "Warning") || strings.Contains(line, "FAILURE")) {
			t.Errorf("ogrinfo complains: %s", line)
		}
	}
	wkt := func(sql string) string {
		c := exec.Command(convert, "-f", "CSV", "/vsistdout/", x.path, "-lco", "GEOMETRY=AS_WKT", "-sql", sql)
		output, err := c.CombinedOutput()
		if err != nil {
			t.Fatalf("ogr2ogr: %v\n%s", err, output)
		}
		return string(output)
	}
	own := wkt("SELECT shape, code AS asset FROM channels WHERE width > 0 ORDER BY code")
	ours := wkt("SELECT shape, asset FROM results ORDER BY asset")
	if own != ours || strings.Count(ours, "LINESTRING ZM") != 38 {
		t.Errorf("the layer of results has other geometries than the register:\n%.400s\n%.400s", ours, own)
	}
	// It uses the spatial index, and writes through its triggers.
	index := wkt("SELECT count(*) AS n FROM rtree_results_shape")
	if !strings.Contains(index, "38") {
		t.Errorf("the index has %s entries", index)
	}
	if output, err := exec.Command(info, x.path, "-sql", "UPDATE results SET shape = (SELECT shape FROM channels LIMIT 1) WHERE asset = 'C-000001'").CombinedOutput(); err != nil || strings.Contains(string(output), "ERROR") {
		t.Errorf("writing through the index's triggers: %v\n%s", err, output)
	}
}
