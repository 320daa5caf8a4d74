package postgres_test

import (
	"context"
	"errors"
	"fmt"
	"io"
	"os"
	"path/filepath"
	"strings"
	"testing"

	"github.com/google/go-cmp/cmp"
	"github.com/jackc/pgx/v5"

	"leat/cmd/internal/register/postgres"
	"leat/cmd/internal/register/postgres/postgrestest"
	"leat/cmd/internal/register/row"
	"leat/cmd/internal/register/store"
)

// database creates an empty database, runs statements in it, and names it to what connects by the environment alone, as an operator would.
func database(t testing.TB, statements ...string) (address string) {
	t.Helper()
	address = postgrestest.Database(t)
	use(t, address)
	execute(t, address, statements...)
	return address
}

// use names a database in the environment.
func use(t testing.TB, address string) {
	t.Helper()
	config, err := pgx.ParseConfig(address)
	if err != nil {
		t.Fatal(err)
	}
	for name, value := range map[string]string{"PGHOST": config.Host, "PGPORT": fmt.Sprint(config.Port), "PGUSER": config.User, "PGDATABASE": config.Database, "PGPASSWORD": config.Password} {
		t.Setenv(name, value)
	}
}

func execute(t testing.TB, address string, statements ...string) {
	t.Helper()
	ctx := context.Background()
	connection, err := pgx.Connect(ctx, address)
	if err != nil {
		t.Fatal(err)
	}
	defer connection.Close(ctx)
	for _, statement := range statements {
		if _, err := connection.Exec(ctx, statement); err != nil {
			t.Fatalf("%s: %v", statement, err)
		}
	}
}

// query returns the rows of a query as texts, null as "null".
func query(t testing.TB, address, text string, parameters ...any) (rows []string) {
	t.Helper()
	ctx := context.Background()
	connection, err := pgx.Connect(ctx, address)
	if err != nil {
		t.Fatal(err)
	}
	defer connection.Close(ctx)
	result, err := connection.Query(ctx, text, append([]any{pgx.QueryExecModeSimpleProtocol}, parameters...)...)
	if err != nil {
		t.Fatalf("%s: %v", text, err)
	}
	for result.Next() {
		var cells []string
		for _, cell := range result.RawValues() {
			if cell == nil {
				cells = append(cells, "null")
			} else {
				cells = append(cells, string(cell))
			}
		}
		rows = append(rows, strings.Join(cells, "|"))
	}
	if err := result.Err(); err != nil {
		t.Fatalf("%s: %v", text, err)
	}
	return rows
}

func openSource(t testing.TB, spec store.SourceSpec) store.Source {
	t.Helper()
	source, err := postgres.OpenSource(context.Background(), &spec)
	if err != nil {
		t.Fatal(err)
	}
	t.Cleanup(func() { source.Close() })
	return source
}

// read returns all rows of a query as texts, with their child rows in brackets.
func read(t testing.TB, source store.Source, q store.Query, limit int) (out []string) {
	t.Helper()
	ctx := context.Background()
	reader, err := source.Read(ctx, &q)
	if err != nil {
		t.Fatal(err)
	}
	defer reader.Close()
	var page row.Page
	spell := func(values []row.Value) string {
		texts := make([]string, len(values))
		for i, v := range values {
			texts[i] = v.String()
			if v.IsNull() {
				texts[i] = "null"
			}
		}
		return strings.Join(texts, "|")
	}
	for {
		err := reader.Next(ctx, &page, limit)
		if errors.Is(err, io.EOF) {
			if page.Rows() != 0 {
				t.Error("the last page is not empty")
			}
			return out
		}
		if err != nil {
			t.Fatal(err)
		}
		if page.Rows() == 0 || page.Rows() > limit {
			t.Fatalf("a page of %d rows, at most %d are wanted", page.Rows(), limit)
		}
		for i := range page.Rows() {
			text := spell(page.Row(i))
			if children := page.Children(i); len(children) > 0 {
				text += "["
				for width := len(q.Child); len(children) > 0; children = children[width:] {
					text += "(" + spell(children[:width]) + ")"
				}
				text += "]"
			}
			out = append(out, text)
		}
	}
}

func TestSourceReadsTypes(t *testing.T) {
	database(t, `create type state as enum ('in use', 'closed')`, `create domain width as numeric(8,3) check (value > 0)`,
		`create table assets (id int primary key, small smallint, big bigint, single real, double double precision, exact numeric, whole numeric(12,0), yes boolean, word varchar(20), padded char(5), code uuid,
		  day date, moment timestamptz, document jsonb, state state, wide width, raw bytea, span interval)`,
		`insert into assets values (1, -3, 9007199254740993, 0.013, 0.1, 12345678901234567890.000123, 42, true, 'Ostermere', 'ab', '0189c1a0-0000-7000-8000-0000000000ff', '2026-02-03', '2026-02-03 04:05:06.000007+00',
		  '{"b": [1, null]}', 'closed', 2.5, '\x00ff', '1 day 2 hours')`,
		`insert into assets (id, exact, double, single, moment) values (2, 'NaN', 'NaN', '-Infinity', 'infinity'), (3, 1e200, 'Infinity', 1e-30, '-infinity'), (4, 0, 0, 0, '1969-12-31 23:59:59.999999Z'), (5, -0.00012, 1e-300, 3.4e38, null)`,
		`insert into assets (id, exact) values (6, 10000), (7, 100000000), (8, -0.5), (9, 1e-20), (10, 123456.7), (11, ('9' || repeat('0', 400))::numeric), (12, 12340000.00005)`)
	source := openSource(t, store.SourceSpec{Table: "assets", Key: "id"})
	if !source.Ordered() {
		t.Error("not ordered")
	}
	var q store.Query
	var kinds []string
	for _, c := range source.Columns() {
		q.Columns = append(q.Columns, c.Name)
		kinds = append(kinds, fmt.Sprintf("%s %s (%s)", c.Name, c.Kind, c.Declared))
	}
	expectedKinds := []string{"id whole number (integer)", "small whole number (smallint)", "big whole number (bigint)", "single number (real)", "double number (double precision)", "exact number (numeric)",
		"whole whole number (numeric(12,0))", "yes true or false (boolean)", "word text (character varying(20))", "padded text (character(5))", "code text (uuid)", "day text (date)", "moment time (timestamp with time zone)",
		"document text (jsonb)", "state text (state)", "wide number (width)", "raw bytes (bytea)", "span text (interval)"}
	if difference := cmp.Diff(expectedKinds, kinds); difference != "" {
		t.Error(difference)
	}
	rows := read(t, source, q, 100)
	if len(rows) != 12 {
		t.Fatalf("%d rows", len(rows))
	}
	expected := "1|-3|9007199254740993|0.013|0.1|12345678901234567000|42|true|Ostermere|ab|0189c1a0-0000-7000-8000-0000000000ff|2026-02-03|2026-02-03T04:05:06.000007Z|" +
		`{"b": [1, null]}|closed|2.5|` + "\x00\xff|P1DT2H"
	if difference := cmp.Diff(expected, rows[0]); difference != "" {
		t.Error(difference)
	}
	few := store.Query{Columns: []string{"id", "exact", "double", "single", "moment"}}
	expectedFew := []string{"2|NaN|NaN|-Inf|infinity", "3|1e+200|+Inf|1e-30|-infinity", "4|0|0|0|1969-12-31T23:59:59.999999Z", "5|-0.00012|1e-300|3.4e+38|null",
		"6|10000|null|null|null", "7|100000000|null|null|null", "8|-0.5|null|null|null", "9|1e-20|null|null|null", "10|123456.7|null|null|null", "11|+Inf|null|null|null", "12|12340000.00005|null|null|null"}
	few.After = row.OfInt(1)
	if difference := cmp.Diff(expectedFew, read(t, source, few, 3)); difference != "" {
		t.Error(difference)
	}
}

// Whatever the pages and the type of the key, each row comes once and in order.
func TestSourcePages(t *testing.T) {
	address := database(t,
		`create table numbered as select i as id, 'K' || i % 97 || '-' || i as name, md5(i::text)::uuid as code, i::numeric(12,0) as whole from generate_series(-300, 700) i`,
		`alter table numbered add primary key (id)`, `create unique index on numbered (code)`, `create unique index on numbered (whole)`, `update numbered set name = 'é' || name where id % 3 = 0`, `update numbered set name = lower(name) where id % 5 = 0`, `analyze`,
		`create view "Strange ""view""" as select id, name, code from numbered where id <> 13`)
	for _, test := range []struct{ table, key, order string }{
		{"numbered", "id", "id"}, {"numbered", "name", `name collate "C"`}, {"numbered", "code", "code"}, {"numbered", "whole", "whole"}, {`Strange "view"`, "id", "id"}, {`Strange "view"`, "name", `name collate "C"`},
	} {
		expected := query(t, address, fmt.Sprintf(`select %s, id from %s order by %s`, test.key, pgx.Identifier{test.table}.Sanitize(), test.order))
		source := openSource(t, store.SourceSpec{Table: test.table, Key: test.key})
		q := store.Query{Columns: []string{test.key, "id"}}
		for _, limit := range []int{1, 7, 1000, 1001, 5000} {
			if limit == 1 && test.key != "id" {
				continue
			}
			if difference := cmp.Diff(expected, read(t, source, q, limit)); difference != "" {
				t.Errorf("%s by %s, pages of %d: %s", test.table, test.key, limit, difference)
			}
		}
		// A stretch begins after a key and ends with one.
		page := &row.Page{}
		reader, err := source.Read(context.Background(), &q)
		if err != nil {
			t.Fatal(err)
		}
		if err := reader.Next(context.Background(), page, 500); err != nil {
			t.Fatal(err)
		}
		q.After, q.Until = page.Row(99)[0], page.Row(299)[0]
		if difference := cmp.Diff(expected[100:300], read(t, source, q, 33)); difference != "" {
			t.Errorf("%s by %s: %s", test.table, test.key, difference)
		}
		if count, err := source.Count(context.Background(), &q); err != nil || count != 200 {
			t.Errorf("%d rows counted, %v", count, err)
		}
		reader.Close()
	}
}

func TestSourceFilter(t *testing.T) {
	database(t, `create type state as enum ('in use', 'closed')`,
		`create table assets (id int primary key, n int, f double precision, e numeric, b boolean, w text, s state, raw bytea)`,
		`insert into assets select i, i, i / 10.0, i / 10.0, i % 2 = 0, case when i % 4 <> 0 then 'w' || i % 4 end, case when i % 3 = 0 then 'closed' else 'in use' end::state from generate_series(1, 12) i`,
		`insert into assets (id) values (13)`)
	source := openSource(t, store.SourceSpec{Table: "assets", Key: "id"})
	text, number, whole := row.OfString, row.OfFloat, row.OfInt
	for _, test := range []struct {
		filter   []store.Condition
		expected string
	}{
		{nil, "1 2 3 4 5 6 7 8 9 10 11 12 13"},
		{[]store.Condition{{Column: "n", Op: store.AnyOf, Values: []row.Value{whole(3), number(4), text("5"), number(6.5)}}}, "3 4 5"},
		{[]store.Condition{{Column: "f", Op: store.AnyOf, Values: []row.Value{number(0.3), number(0.7)}}}, "3 7"},
		{[]store.Condition{{Column: "e", Op: store.AnyOf, Values: []row.Value{number(0.3), number(0.7)}}}, "3 7"},
		{[]store.Condition{{Column: "e", Op: store.Above, Values: []row.Value{number(0.3)}}, {Column: "f", Op: store.AtMost, Values: []row.Value{whole(1)}}}, "4 5 6 7 8 9 10"},
		{[]store.Condition{{Column: "n", Op: store.AtLeast, Values: []row.Value{number(2.5)}}, {Column: "n", Op: store.Below, Values: []row.Value{whole(6)}}}, "3 4 5"},
		{[]store.Condition{{Column: "w", Op: store.NoneOf, Values: []row.Value{text("w1"), text("w2")}}}, "3 7 11"},
		{[]store.Condition{{Column: "w", Op: store.IsNull}}, "4 8 12 13"},
		{[]store.Condition{{Column: "b", Op: store.AnyOf, Values: []row.Value{row.OfBool(true)}}, {Column: "w", Op: store.NotNull}}, "2 6 10"},
		{[]store.Condition{{Column: "s", Op: store.AnyOf, Values: []row.Value{text("closed")}}}, "3 6 9 12"},
		{[]store.Condition{{Column: "s", Op: store.AnyOf, Values: []row.Value{text("no such state")}}}, ""},
		{[]store.Condition{{Column: "w", Op: store.AtLeast, Values: []row.Value{text("w3")}}}, "3 7 11"},
		{[]store.Condition{{Column: "w", Op: store.AnyOf, Values: []row.Value{text(`w1') or (1=1`), text(`'; drop table assets; --`)}}}, ""},
	} {
		got := strings.Join(read(t, source, store.Query{Columns: []string{"id"}, Filter: test.filter}, 5), " ")
		if got != test.expected {
			t.Errorf("%v: %q, expected %q", test.filter, got, test.expected)
		}
	}
	for _, filter := range []store.Condition{
		{Column: "missing", Op: store.IsNull}, {Column: "n", Op: store.AnyOf, Values: []row.Value{text("three")}}, {Column: "b", Op: store.AnyOf, Values: []row.Value{whole(1)}},
		{Column: "raw", Op: store.AnyOf, Values: []row.Value{text("x")}}, {Column: `n" is null or "n`, Op: store.NotNull},
	} {
		_, err := source.Read(context.Background(), &store.Query{Columns: []string{"id"}, Filter: []store.Condition{filter}})
		if misfit, is := errors.AsType[*store.Misfit](err); !is || misfit.Field != "filter" {
			t.Errorf("%v: %v", filter, err)
		}
	}
}

func TestSourcePoints(t *testing.T) {
	database(t, `create schema survey`,
		`create table assets (name text primary key)`, `insert into assets values ('b'), ('a'), ('B'), ('c'), ('é'), ('d')`,
		`create table survey.points (asset varchar(10), number int, x numeric, z real)`,
		`insert into survey.points values ('b', 2, 1, 0.1), ('b', 1, 0, 1.1), ('a', 1, -1.5, 2), ('é', 1, 0, 1), ('é', 2, 1, 0), ('é', 3, 2, 1), ('nobody', 1, 0, 0), (null, 1, 0, 0), ('aa', 1, 5, 5), ('d', 1, 7, 7)`)
	source := openSource(t, store.SourceSpec{Table: "assets", Key: "name", Points: &store.PointsSpec{Schema: "survey", Table: "points", Key: "asset", Order: "number", Offset: "x", Level: "z"}})
	if len(source.ChildColumns()) != 4 {
		t.Error("columns of the points")
	}
	expected := []string{"B", "a[(-1.5|2)]", "b[(0|1.1)(1|0.1)]", "c", "d[(7|7)]", "é[(0|1)(1|0)(2|1)]"}
	q := store.Query{Columns: []string{"name"}, Child: []string{"x", "z"}}
	for _, limit := range []int{1, 2, 3, 100} {
		if difference := cmp.Diff(expected, read(t, source, q, limit)); difference != "" {
			t.Errorf("pages of %d: %s", limit, difference)
		}
	}
}

func TestSourceGeometry(t *testing.T) {
	address := database(t, `create extension postgis`,
		`create table assets (id bigint primary key, line geometry(LineStringZM, 25832))`,
		`insert into assets values (1, 'SRID=25832;LINESTRING ZM (500000 5300000 1 0, 500010 5300000 0.5 10)'), (2, null)`)
	source := openSource(t, store.SourceSpec{Table: "assets", Key: "id"})
	if c := source.Columns()[1]; c.Kind != row.Bytes || c.Geometry != "ewkb" {
		t.Errorf("%+v", c)
	} else if c.Spatial == nil || c.Spatial.Type != "LINESTRING" || c.Spatial.Z != 1 || c.Spatial.M != 1 || c.Spatial.System.Organization != "EPSG" || c.Spatial.System.Code != 25832 ||
		c.Spatial.System.Name != "ETRS89 / UTM zone 32N" || !strings.HasPrefix(c.Spatial.System.Definition, "PROJCS[") {
		t.Errorf("%+v", c.Spatial)
	}
	rows := read(t, source, store.Query{Columns: []string{"id", "line"}}, 10)
	hex := strings.ToLower(query(t, address, "select line::text from assets where id = 1")[0])
	if got := fmt.Sprintf("%x", strings.TrimPrefix(rows[0], "1|")); got != hex {
		t.Errorf("%s, the database shows %s", got, hex)
	}
}

func TestKeys(t *testing.T) {
	database(t, `create table once (k int primary key)`, `insert into once values (1)`,
		`create table loose (k text, ok boolean)`, `insert into loose values ('a', true), ('b', true), ('b', false), (null, false)`,
		`create table inexact (k double precision, t timestamptz, b boolean)`)
	check := func(table string, filter ...store.Condition) error {
		return openSource(t, store.SourceSpec{Table: table, Key: "k"}).CheckKey(context.Background(), filter)
	}
	if err := check("once"); err != nil {
		t.Error(err)
	}
	if fault, is := errors.AsType[*store.KeyFault](check("loose")); !is || fault.Nulls != 1 || len(fault.Twice) != 1 || fault.Twice[0] != "b" {
		t.Errorf("%+v", fault)
	}
	if err := check("loose", store.Condition{Column: "ok", Op: store.AnyOf, Values: []row.Value{row.OfBool(true)}}); err != nil {
		t.Error(err)
	}
	for _, key := range []string{"k", "t", "b", "none"} {
		_, err := postgres.OpenSource(context.Background(), &store.SourceSpec{Table: "inexact", Key: key})
		if misfit, is := errors.AsType[*store.Misfit](err); !is || misfit.Field != "key" {
			t.Errorf("%s: %v", key, err)
		}
	}
}

func TestSourceMisfits(t *testing.T) {
	database(t, `create table assets (id int primary key, name text)`, `create table points (asset text, x float8)`, `create sequence counter`)
	points := store.PointsSpec{Table: "points", Key: "asset", Offset: "x"}
	for _, test := range []struct {
		spec  store.SourceSpec
		field string
	}{
		{store.SourceSpec{Table: "Assets", Key: "id"}, "table"},
		{store.SourceSpec{Table: "assets; drop table assets", Key: "id"}, "table"},
		{store.SourceSpec{Table: "assets", Schema: "other", Key: "id"}, "table"},
		{store.SourceSpec{Table: "counter", Key: "id"}, "table"},
		{store.SourceSpec{Table: strings.Repeat("a", 64), Key: "id"}, "table"},
		{store.SourceSpec{Table: "", Key: "id"}, "table"},
		{store.SourceSpec{Table: "assets", Key: "ID"}, "key"},
		{store.SourceSpec{Table: "assets", Key: "id", Points: &points}, "points.key"}, // a number against a text
		{store.SourceSpec{Table: "assets", Key: "name", Points: &store.PointsSpec{Table: "none", Key: "asset", Offset: "x"}}, "points.table"},
		{store.SourceSpec{Table: "assets", Key: "name", Points: &store.PointsSpec{Table: "points", Key: "asset", Order: "z"}}, "points.order"},
		{store.SourceSpec{Table: "assets", Key: "id", Database: store.DatabaseSpec{Name: "no_such_database"}}, ""},
		{store.SourceSpec{Table: "assets", Key: "id", Database: store.DatabaseSpec{PasswordFile: "/nowhere"}}, "password_file"},
	} {
		_, err := postgres.OpenSource(context.Background(), &test.spec)
		misfit, is := errors.AsType[*store.Misfit](err)
		if !is || misfit.Field != test.field || !strings.HasSuffix(misfit.Detail, ".") {
			t.Errorf("%+v: %v", test.spec, err)
		}
	}
}

// No password is told, whichever way it came.
func TestPasswordsAreNotTold(t *testing.T) {
	database(t)
	const secret = "correct-horse-battery"
	file := filepath.Join(t.TempDir(), "password")
	if err := os.WriteFile(file, []byte(secret+"\n"), 0o600); err != nil {
		t.Fatal(err)
	}
	for _, spec := range []store.DatabaseSpec{{User: "nobody_there"}, {User: "nobody_there", PasswordFile: file}, {Host: "/nowhere"}, {Port: "x"}, {Name: "it's \\ here"}} {
		t.Setenv("PGPASSWORD", secret)
		_, err := postgres.OpenSource(context.Background(), &store.SourceSpec{Table: "assets", Key: "id", Database: spec})
		if err == nil || strings.Contains(err.Error(), secret) {
			t.Errorf("%+v: %v", spec, err)
		}
	}
}

func TestEmptyTable(t *testing.T) {
	database(t, `create table assets (id int primary key)`)
	if rows := read(t, openSource(t, store.SourceSpec{Table: "assets", Key: "id"}), store.Query{Columns: []string{"id"}}, 10); rows != nil {
		t.Error(rows)
	}
}
