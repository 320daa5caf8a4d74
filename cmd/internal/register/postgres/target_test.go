package postgres_test

import (
	"context"
	"encoding/hex"
	"errors"
	"fmt"
	"strings"
	"testing"
	"time"

	"github.com/google/go-cmp/cmp"

	"leat/cmd/internal/register/postgres"
	"leat/cmd/internal/register/postgres/postgrestest"
	"leat/cmd/internal/register/row"
	"leat/cmd/internal/register/store"
)

var moment = time.Date(2026, 2, 3, 4, 5, 6, 7000, time.UTC)

// layout is that of a small table of results.
func layout(key row.Kind) *store.Layout {
	column := func(name string, kind row.Kind, role store.Role, unit, description string) store.ResultColumn {
		return store.ResultColumn{Column: row.Column{Name: name, Kind: kind}, Role: role, Unit: unit, Description: description}
	}
	return &store.Layout{Hash: "layout 1", Columns: []store.ResultColumn{
		column("asset", key, store.RoleAsset, "", "Key of the asset"),
		column("name of it", row.Text, store.RoleCopied, "", `What people's tables call it, "\"`),
		column("normal_depth", row.Float, store.RoleAnswer, "m", "Depth of uniform flow."),
		column("surcharged", row.Bool, store.RoleAnswer, "", ""),
		column("run", row.Text, store.RoleRun, "", ""),
		column("fingerprint", row.Text, store.RoleFingerprint, "", ""),
		column("copied_hash", row.Int, store.RoleCopiedHash, "", ""),
		column("engine_version", row.Text, store.RoleEngineVersion, "", ""),
		column("computed_at", row.Time, store.RoleComputedAt, "", ""),
	}}
}

func print(i int64) (sum [32]byte) {
	copy(sum[:], fmt.Sprintf("fingerprint %d", i))
	return sum
}

// result is a row of layout.
func result(key row.Value, depth float64, run string) []row.Value {
	n := key.Int()
	sum := print(n)
	return []row.Value{key, row.OfString("Weir\x00 lane"), row.OfFloat(depth), row.OfBool(n%2 == 0), row.OfString(run), row.OfString(hex.EncodeToString(sum[:])), row.OfInt(n * 3), row.OfString("1.0.0"), row.OfTime(moment)}
}

func openTarget(t testing.TB, spec store.TargetSpec) store.Target {
	t.Helper()
	target, err := postgres.OpenTarget(context.Background(), &spec)
	if err != nil {
		t.Fatal(err)
	}
	t.Cleanup(func() { target.Close() })
	return target
}

func start(name string) store.Start {
	return store.Start{New: name, EngineVersion: "1.0.0", Mapping: "mapping", At: moment}
}

func begin(t testing.TB, target store.Target, layout *store.Layout, start store.Start) store.State {
	t.Helper()
	state, err := target.Begin(context.Background(), layout, start)
	if err != nil {
		t.Fatal(err)
	}
	return state
}

func commit(t testing.TB, target store.Target, batch *store.Batch) {
	t.Helper()
	if err := target.Commit(context.Background(), batch); err != nil {
		t.Fatal(err)
	}
}

func whole(v int64) row.Value { return row.OfInt(v) }

func TestTargetKeepsBatches(t *testing.T) {
	address := database(t)
	target := openTarget(t, store.TargetSpec{Table: "results"})
	if err := target.Stored(context.Background(), &store.Stretch{Ordered: true}, func(row.Value, store.Stored) { t.Error("found") }); err == nil {
		t.Error("asked for results before it is known where they stand")
	}
	l := layout(row.Int)
	if err := target.Check(context.Background(), l); err != nil {
		t.Fatal(err)
	}
	if err := target.Stored(context.Background(), &store.Stretch{Ordered: true}, func(row.Value, store.Stored) { t.Error("found") }); err != nil {
		t.Error(err) // a dry run
	}
	state := begin(t, target, l, start("first"))
	if difference := cmp.Diff(store.State{Run: "first"}, state, cmp.AllowUnexported(row.Value{})); difference != "" {
		t.Error(difference)
	}
	bad := store.Problem{Asset: whole(4), Column: "width", Pointer: "/section/bottom_width", Code: "out_of_range", Text: "The width must be greater than 0."}
	commit(t, target, &store.Batch{Stretch: store.Stretch{Ordered: true, Until: whole(5)}, Mark: whole(5), Counts: store.Counts{Read: 4, Computed: 3, Bad: 1, Problems: 2},
		Results:  [][]row.Value{result(whole(1), 1.25, "first"), result(whole(2), 2.5, "first"), result(whole(5), 0.1, "first")},
		Problems: []store.Problem{bad, {Asset: whole(4), Line: 7, Code: "missing", Text: "A value is missing."}}})
	commit(t, target, &store.Batch{Stretch: store.Stretch{Ordered: true, After: whole(5)}, Mark: whole(9), Counts: store.Counts{Read: 1, Computed: 1}, Results: [][]row.Value{result(whole(9), 9, "first")}})
	expected := []string{"1|Weir\uFFFD lane|1.25|f|first|3|1.0.0|2026-02-03 04:05:06.000007+00", "2|Weir\uFFFD lane|2.5|t|first|6|1.0.0|2026-02-03 04:05:06.000007+00",
		"5|Weir\uFFFD lane|0.1|f|first|15|1.0.0|2026-02-03 04:05:06.000007+00", "9|Weir\uFFFD lane|9|f|first|27|1.0.0|2026-02-03 04:05:06.000007+00"}
	const results = `select asset, "name of it", normal_depth, surcharged, run, copied_hash, engine_version, computed_at from results order by asset`
	execute(t, address, "set timezone = 'UTC'")
	if difference := cmp.Diff(expected, query(t, address+"&timezone=UTC", results)); difference != "" {
		t.Error(difference)
	}
	const problems = `select run, asset, line, "column", pointer, code, text from results_problems order by asset, code desc`
	if difference := cmp.Diff([]string{"first|4|null|width|/section/bottom_width|out_of_range|The width must be greater than 0.", "first|4|7|null|null|missing|A value is missing."}, query(t, address, problems)); difference != "" {
		t.Error(difference)
	}
	found := map[int64]store.Stored{}
	err := target.Stored(context.Background(), &store.Stretch{Ordered: true, After: whole(1), Until: whole(5)}, func(key row.Value, stored store.Stored) { found[key.Int()] = stored })
	if difference := cmp.Diff(map[int64]store.Stored{2: {Fingerprint: print(2), Copied: 6}, 5: {Fingerprint: print(5), Copied: 15}}, found); err != nil || difference != "" {
		t.Error(err, difference)
	}
	// Now 4 is good and 2 bad, 1 is no more, 5 has changed.
	commit(t, target, &store.Batch{Stretch: store.Stretch{Ordered: true, Until: whole(5)}, Counts: store.Counts{Read: 3, Computed: 2, Bad: 1, Removed: 2, Problems: 1},
		Results: [][]row.Value{result(whole(4), 4, "first"), result(whole(5), 0.2, "first")}, Gone: []row.Value{whole(1), whole(2)},
		Problems: []store.Problem{{Asset: whole(2), Code: "missing", Text: "A value is missing."}}})
	expected[0], expected[1] = strings.NewReplacer("2|W", "4|W", "|2.5|", "|4|", "|6|", "|12|").Replace(expected[1]), strings.Replace(expected[2], "0.1", "0.2", 1)
	expected = append(expected[:2], expected[3])
	if difference := cmp.Diff(expected, query(t, address+"&timezone=UTC", results)); difference != "" {
		t.Error(difference)
	}
	if difference := cmp.Diff([]string{"first|2|null|null|null|missing|A value is missing."}, query(t, address, problems)); difference != "" {
		t.Error(difference)
	}
	if err := target.Finish(context.Background(), &store.Summary{Run: "first", Counts: store.Counts{Read: 8, Computed: 6, Bad: 2, Removed: 2, Problems: 3}, Finished: moment.Add(time.Minute)}); err != nil {
		t.Error(err)
	}
	if difference := cmp.Diff([]string{"first|t|layout 1|1.0.0|mapping|f|f|9|3|8|6|0|2|2|3"}, query(t, address,
		"select run, finished_at is not null, layout, engine_version, mapping, fresh, shared, mark, batches, read, computed, unchanged, bad, removed, problems from results_runs")); difference != "" {
		t.Error(difference)
	}
	comments := query(t, address, `select a.attname, col_description(a.attrelid, a.attnum) from pg_attribute a where a.attrelid = 'results'::regclass and a.attnum > 0 and col_description(a.attrelid, a.attnum) is not null order by a.attnum`)
	if difference := cmp.Diff([]string{"asset|Key of the asset", `name of it|What people's tables call it, "\"`, "normal_depth|Depth of uniform flow, in m"}, comments); difference != "" {
		t.Error(difference)
	}
}

func TestTargetKeysOfText(t *testing.T) {
	address := database(t)
	target := openTarget(t, store.TargetSpec{Table: "Results of the \"night\"", Problems: "what is wrong"})
	begin(t, target, layout(row.Text), start("first"))
	text := row.OfString
	for range 2 {
		commit(t, target, &store.Batch{Stretch: store.Stretch{Ordered: true, After: text("B"), Until: text("b")}, Mark: text("b"), Results: [][]row.Value{result(text("C"), 1, "first"), result(text("a"), 1, "first"), result(text("b"), 2, "first")}})
		commit(t, target, &store.Batch{Stretch: store.Stretch{Keys: []row.Value{text("B"), text("é")}}, Results: [][]row.Value{result(text("é"), 3, "first")}, Problems: []store.Problem{{Asset: text("B"), Code: "bad", Text: "Bad."}}})
	}
	const keys = `select asset from "Results of the ""night""" order by asset collate "C"`
	if difference := cmp.Diff([]string{"C", "a", "b", "é"}, query(t, address, keys)); difference != "" {
		t.Error(difference)
	}
	if difference := cmp.Diff([]string{"B"}, query(t, address, `select asset from "what is wrong"`)); difference != "" {
		t.Error(difference)
	}
	var found []string
	for _, stretch := range []store.Stretch{{Ordered: true, After: text("C"), Until: text("b")}, {Keys: []row.Value{text("é"), text("z")}}} {
		if err := target.Stored(context.Background(), &stretch, func(key row.Value, _ store.Stored) { found = append(found, key.String()) }); err != nil {
			t.Fatal(err)
		}
	}
	if difference := cmp.Diff([]string{"a", "b", "é"}, found); difference != "" {
		t.Error(difference)
	}
	// Results join with assets whose names have the usual collation.
	execute(t, address, `create table assets (name text primary key)`, `select 1 from assets join "Results of the ""night""" r on r.asset = assets.name`)
}

// What belongs to somebody else is never touched, whichever of the names it has.
func TestTargetRefusesWhatIsNotOurs(t *testing.T) {
	address := database(t, "create table results (asset bigint)", "create table other_problems (a int)", "create view third_runs as select 1 as a", "create sequence fourth",
		"create table fifth_batches (a int)", "create schema closed", "create role nobody_much login", "grant usage on schema public to nobody_much", "create table narrow (asset bigint primary key)", "comment on table narrow is 'Results of leat register'",
		"create table sixth (asset bigint)", "insert into results values (1)")
	long := strings.Repeat("ä", 31)
	for _, test := range []struct {
		spec  store.TargetSpec
		field string
	}{
		{store.TargetSpec{Table: "results"}, "table"}, {store.TargetSpec{Table: "other"}, "problems"}, {store.TargetSpec{Table: "third"}, "table"}, {store.TargetSpec{Table: "fourth"}, "table"},
		{store.TargetSpec{Table: "fifth"}, "table"}, {store.TargetSpec{Table: "seventh", Problems: "sixth"}, "problems"}, {store.TargetSpec{Table: "narrow"}, "table"}, {store.TargetSpec{Table: long}, "table"},
		{store.TargetSpec{Table: "x", Problems: "x_runs"}, "problems"}, {store.TargetSpec{Table: "x", Schema: "nowhere"}, "schema"}, {store.TargetSpec{Table: ""}, "table"},
		{store.TargetSpec{Table: "x", Schema: "closed", Database: store.DatabaseSpec{User: "nobody_much"}}, "schema"},
	} {
		target, err := postgres.OpenTarget(context.Background(), &test.spec)
		if err == nil {
			err = target.Check(context.Background(), layout(row.Int))
			if _, began := target.Begin(context.Background(), layout(row.Int), start("run")); began == nil {
				t.Errorf("%+v was begun", test.spec)
			}
			target.Close()
		}
		misfit, is := errors.AsType[*store.Misfit](err)
		if !is || misfit.Field != test.field || !strings.HasSuffix(misfit.Detail, ".") {
			t.Errorf("%+v: %v", test.spec, err)
		}
	}
	if tables := query(t, address, "select count(*) from pg_class where relnamespace = 'public'::regnamespace and relkind in ('r', 'v', 'S')"); tables[0] != "7" {
		t.Errorf("%v tables, there were 7", tables)
	}
	double := layout(row.Int)
	double.Columns[2].Name = "run"
	if _, is := errors.AsType[*store.Misfit](openTarget(t, store.TargetSpec{Table: "x"}).Check(context.Background(), double)); !is {
		t.Error("two columns of one name")
	}
}

// A run that stopped is gone on with; another layout, version or name begins a new one.
func TestTargetBeginsAndGoesOn(t *testing.T) {
	database(t)
	ctx := context.Background()
	l := layout(row.Int)
	one := func(layout *store.Layout, start store.Start, batches int64, finish bool) (store.State, error) {
		t.Helper()
		target := openTarget(t, store.TargetSpec{Table: "results"})
		defer target.Close()
		state, err := target.Begin(ctx, layout, start)
		if err != nil {
			return state, err
		}
		for i := range batches {
			commit(t, target, &store.Batch{Stretch: store.Stretch{Ordered: true, After: whole(i), Until: whole(i + 1)}, Mark: whole(i + 1), Counts: store.Counts{Read: 1, Computed: 1}, Results: [][]row.Value{result(whole(i+1), 1, state.Run)}})
		}
		if finish {
			if err := target.Finish(ctx, &store.Summary{Run: state.Run, Finished: moment}); err != nil {
				t.Fatal(err)
			}
		}
		return state, nil
	}
	expect := func(state store.State, err error, run string, resumed bool, mark row.Value, read int64, fresh bool) {
		t.Helper()
		if err != nil || state.Run != run || state.Resumed != resumed || !state.Mark.Equal(mark) || state.Counts.Read != read || state.Fresh != fresh {
			t.Errorf("%+v %v", state, err)
		}
	}
	state, err := one(l, start("a"), 2, false)
	expect(state, err, "a", false, row.Value{}, 0, false)
	state, err = one(l, start("b"), 3, false)
	expect(state, err, "a", true, whole(2), 2, false)
	state, err = one(l, start("b"), 0, true)
	expect(state, err, "a", true, whole(3), 5, false)
	state, err = one(l, start("b"), 1, false)
	expect(state, err, "b", false, row.Value{}, 0, false)
	newer := start("c")
	newer.EngineVersion = "1.0.1"
	state, err = one(l, newer, 1, false) // b is left unfinished
	expect(state, err, "c", false, row.Value{}, 0, true)
	state, err = one(l, newer, 1, false)
	expect(state, err, "c", true, whole(1), 1, true)
	newer.New, newer.Run = "", "d" // a name of its own leaves c, which was fresh, unfinished
	state, err = one(l, newer, 1, false)
	expect(state, err, "d", false, row.Value{}, 0, true)
	for _, refused := range []string{"a", "b", "c"} {
		newer.Run = refused
		if _, err = one(l, newer, 0, false); err == nil {
			t.Errorf("%s was gone on with", refused)
		}
	}
	newer.Run = "d"
	state, err = one(l, newer, 0, true)
	expect(state, err, "d", true, whole(1), 1, true)
	other := layout(row.Int)
	other.Hash = "layout 2"
	newer.Run, newer.New = "", "e"
	state, err = one(other, newer, 0, true)
	expect(state, err, "e", false, row.Value{}, 0, true)
	newer.New = "f"
	state, err = one(other, newer, 0, true)
	expect(state, err, "f", false, row.Value{}, 0, false)
}

// A batch is committed whole or not at all, and a process that was passed by commits nothing.
func TestTargetCommitsWholeBatches(t *testing.T) {
	address := database(t)
	ctx := context.Background()
	l := layout(row.Int)
	target := openTarget(t, store.TargetSpec{Table: "results"})
	begin(t, target, l, start("a"))
	batch := &store.Batch{Stretch: store.Stretch{Ordered: true}, Mark: whole(2), Results: [][]row.Value{result(whole(1), 1, "a"), result(whole(1), 2, "a")}} // one asset twice
	if err := target.Commit(ctx, batch); err == nil {
		t.Error("one asset twice")
	}
	wrong := result(whole(2), 1, "a")
	wrong[2] = row.OfString("deep")
	if err := target.Commit(ctx, &store.Batch{Stretch: store.Stretch{Ordered: true}, Mark: whole(2), Results: [][]row.Value{wrong}}); err == nil || !strings.Contains(err.Error(), "normal_depth") {
		t.Errorf("a text as a depth: %v", err)
	}
	if state := query(t, address, "select mark, batches, (select count(*) from results) from results_runs"); state[0] != "null|0|0" {
		t.Error(state)
	}
	commit(t, target, &store.Batch{Stretch: store.Stretch{Ordered: true}, Mark: whole(1), Results: [][]row.Value{result(whole(1), 1, "a")}})
	execute(t, address, "update results_runs set owner = 'somebody else'")
	if err := target.Commit(ctx, &store.Batch{Stretch: store.Stretch{Ordered: true}, Mark: whole(2), Results: [][]row.Value{result(whole(2), 1, "a")}}); err == nil {
		t.Error("a run that was taken over is written to")
	}
	if err := target.Finish(ctx, &store.Summary{Run: "a", Finished: moment}); err == nil {
		t.Error("a run that was taken over is finished")
	}
	if state := query(t, address, "select mark, batches, (select count(*) from results) from results_runs"); state[0] != "1|1|1" {
		t.Error(state)
	}
}

// A database that goes away and comes back costs time only.
func TestDatabaseRestarts(t *testing.T) {
	server := postgrestest.Start(t, postgrestest.Options{})
	address := postgrestest.Create(t, server.URL())
	use(t, address)
	execute(t, address, "create table assets as select i as id from generate_series(1, 100) i", "alter table assets add primary key (id)", "analyze assets")
	ctx := context.Background()
	source := openSource(t, store.SourceSpec{Table: "assets", Key: "id"})
	target := openTarget(t, store.TargetSpec{Table: "results"})
	begin(t, target, layout(row.Int), start("a"))
	reader, err := source.Read(ctx, &store.Query{Columns: []string{"id"}})
	if err != nil {
		t.Fatal(err)
	}
	var page row.Page
	var after row.Value
	back := make(chan bool)
	for i := range 10 {
		switch {
		case i%3 == 1:
			server.Crash(t)
			server.Run(t)
		case i%3 == 2:
			server.Stop(t)
			go func() {
				time.Sleep(300 * time.Millisecond)
				server.Run(t)
				back <- true
			}()
		}
		if err := reader.Next(ctx, &page, 10); err != nil {
			t.Fatal(err)
		}
		if i%3 == 2 {
			<-back
		}
		if i%3 == 0 && i > 0 {
			server.Crash(t)
			server.Run(t)
		}
		batch := store.Batch{Stretch: store.Stretch{Ordered: true, After: after}, Counts: store.Counts{Read: 10}}
		for j := range page.Rows() {
			batch.Results = append(batch.Results, result(whole(page.Row(j)[0].Int()), 1, "a"))
		}
		after = page.Row(9)[0]
		batch.Mark, batch.Stretch.Until = after, after
		known := 0
		if err := target.Stored(ctx, &batch.Stretch, func(row.Value, store.Stored) { known++ }); err != nil || known != 0 {
			t.Fatal(known, err)
		}
		commit(t, target, &batch)
	}
	if got := query(t, address, "select count(*), min(asset), max(asset), (select mark || ' ' || batches || ' ' || read from results_runs) from results"); got[0] != "100|1|100|100 10 100" {
		t.Error(got)
	}
}
