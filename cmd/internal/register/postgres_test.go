package register_test

import (
	"context"
	"fmt"
	"path/filepath"
	"slices"
	"strings"
	"testing"

	"github.com/jackc/pgx/v5"

	"leat/cmd/internal/demo/district"
	"leat/cmd/internal/register"
	"leat/cmd/internal/register/postgres/postgrestest"
)

// office connects to an empty database, which it also names in the environment, as an operator would.
func office(t *testing.T) *pgx.Conn {
	t.Helper()
	config, err := pgx.ParseConfig(postgrestest.Database(t))
	if err != nil {
		t.Fatal(err)
	}
	for name, value := range map[string]string{"PGHOST": config.Host, "PGPORT": fmt.Sprint(config.Port), "PGUSER": config.User, "PGDATABASE": config.Database, "PGPASSWORD": config.Password} {
		t.Setenv(name, value)
	}
	connection, err := pgx.ConnectConfig(context.Background(), config)
	if err != nil {
		t.Fatal(err)
	}
	t.Cleanup(func() { connection.Close(context.Background()) })
	return connection
}

func execute(t *testing.T, connection *pgx.Conn, statements ...string) {
	t.Helper()
	for _, statement := range statements {
		if _, err := connection.Exec(context.Background(), statement, pgx.QueryExecModeSimpleProtocol); err != nil {
			t.Fatalf("%.200s: %v", statement, err)
		}
	}
}

// rows returns the rows of a query by column, as the database spells them, null as nothing.
func rows(t *testing.T, connection *pgx.Conn, query string) (out []map[string]string) {
	t.Helper()
	result, err := connection.Query(context.Background(), query, pgx.QueryExecModeSimpleProtocol)
	if err != nil {
		t.Fatalf("%s: %v", query, err)
	}
	for result.Next() {
		row := map[string]string{}
		for i, raw := range result.RawValues() {
			row[result.FieldDescriptions()[i].Name] = string(raw)
		}
		out = append(out, row)
	}
	if err := result.Err(); err != nil {
		t.Fatalf("%s: %v", query, err)
	}
	return out
}

const drainsInPostgres = `operation: depths
source: {format: postgres, schema: "the office", table: drains, key: asset}
target: {format: postgres, schema: results, table: drains_judged, columns: [normal_depth, critical_depth, capacity_ratio, slope_class, surcharged, warnings], prefix: leat_}
`

// Ten thousand rows of PostgreSQL with one in a hundred bad: results are the unary answers bit for bit, also with the processes of a shared run; each bad row is in the table of problems with its column.
func TestTenThousandRowsOfPostgreSQL(t *testing.T) {
	connection := office(t)
	text, requests, bad := drainsCSV(10_000)
	execute(t, connection, `create schema "the office"`, `create schema results`,
		`create table "the office".drains (asset varchar(10) primary key, shape char(3), size text, side text, material text, fall numeric, flow text)`)
	if _, err := connection.PgConn().CopyFrom(context.Background(), strings.NewReader(text), `copy "the office".drains from stdin (format csv, header)`); err != nil {
		t.Fatal(err)
	}
	_, columns, _ := strings.Cut(drainsMapping, "missing:")
	path := folder(t, map[string]string{"alone.yaml": drainsInPostgres + "missing:" + columns, "shared.yaml": strings.Replace(drainsInPostgres, "drains_judged", "drains_shared", 1) + "missing:" + columns})
	for _, arguments := range [][]string{{"run", "--rows", "333", filepath.Join(path, "alone.yaml")}, {"run", "--shared", "--workers", "3", "--rows", "333", filepath.Join(path, "shared.yaml")}} {
		outcome, out, stderr := command(t, arguments...)
		if outcome != register.Problems || !strings.Contains(out, "10000 rows") || !strings.Contains(out, "9900 computed") || !strings.Contains(out, "100 bad") {
			t.Fatalf("%v\n%s\n%s", outcome, out, stderr)
		}
		table := "results.drains_judged"
		if slices.Contains(arguments, "--shared") {
			table = "results.drains_shared"
		}
		judgeDrains(t, rows(t, connection, "select *, replace(leat_computed_at::text, '+00', 'Z') as leat_computed_at from "+table+" order by substr(leat_asset, 2)::int"), requests)
		problems := rows(t, connection, "select * from "+table+"_problems")
		if len(problems) != len(bad) {
			t.Errorf("%d problems, want %d", len(problems), len(bad))
		}
		for _, p := range problems {
			if bad[p["asset"]] != p["column"] || p["line"] != "" || p["text"] == "" || p["code"] == "" || p["run"] == "" {
				t.Errorf("%v, bad in %s", p, bad[p["asset"]])
			}
		}
	}
	comment := rows(t, connection, "select col_description('results.drains_judged'::regclass, attnum) as text from pg_attribute where attrelid = 'results.drains_judged'::regclass and attname = 'leat_normal_depth'")
	if !strings.HasSuffix(comment[0]["text"], "in m") {
		t.Errorf("the comment of a depth is %q", comment[0]["text"])
	}
	// Once more: nothing has changed, and nothing is written but the account of the run and the problems.
	before := rows(t, connection, "select sum(xmin::text::bigint) as sum from results.drains_judged")[0]["sum"]
	if outcome, out, stderr := command(t, "run", filepath.Join(path, "alone.yaml")); outcome != register.Problems || !strings.Contains(out, "0 computed, 9900 unchanged") {
		t.Errorf("%v\n%s\n%s", outcome, out, stderr)
	}
	if after := rows(t, connection, "select sum(xmin::text::bigint) as sum from results.drains_judged")[0]["sum"]; after != before {
		t.Error("a run with nothing changed has written results")
	}
	// Some change, some go, one comes, one is mended, one breaks; only those are written.
	var mended string
	for key := range bad {
		if bad[key] == "material" {
			mended = key
		}
	}
	execute(t, connection, `update "the office".drains set flow = '12.5' where asset in ('D10', 'D20')`, `delete from "the office".drains where asset in ('D30', 'D9999')`, `update "the office".drains set material = 'earth' where asset = '`+mended+`'`,
		`update "the office".drains set size = '-1' where asset = 'D40'`, `insert into "the office".drains values ('D10000', 'C', '600', '1:2', 'concrete', 1, '50')`)
	if outcome, out, stderr := command(t, "run", filepath.Join(path, "alone.yaml")); outcome != register.Problems || !strings.Contains(out, "4 computed, 9895 unchanged, 100 bad, 3 results removed") {
		t.Errorf("%v\n%s\n%s", outcome, out, stderr)
	}
	if n := rows(t, connection, "select count(*) as n from results.drains_judged")[0]["n"]; n != "9899" {
		t.Errorf("%s results", n)
	}
}

// The demo in PostgreSQL has the results of the demo in a GeoPackage.
func TestOstermereInPostgreSQL(t *testing.T) {
	connection := office(t)
	var statements strings.Builder
	if err := district.WriteSQL(&statements); err != nil {
		t.Fatal(err)
	}
	execute(t, connection, statements.String())
	mapping := demo(t, "ostermere_postgres.yaml")
	outcome, out, stderr := command(t, "run", "--quiet", "--rows", "137", mapping)
	if outcome != register.Problems {
		t.Fatalf("%v\n%s\n%s", outcome, out, stderr)
	}
	other := demo(t, "ostermere_geopackage.yaml")
	if outcome, out, stderr := command(t, "run", "--quiet", other); outcome != register.Problems {
		t.Fatalf("%v\n%s\n%s", outcome, out, stderr)
	}
	file := filepath.Join(filepath.Dir(other), "ostermere.gpkg")
	want := texts(t, file, "SELECT asset, fingerprint, verdict, governing_flow FROM leat_results ORDER BY asset")
	var got []string
	for _, row := range rows(t, connection, `select * from ostermere.leat_results order by asset collate "C"`) {
		got = append(got, row["asset"]+"|"+row["fingerprint"]+"|"+row["verdict"]+"|"+row["governing_flow"])
	}
	if !slices.Equal(want, got) {
		t.Errorf("%d results in PostgreSQL, %d in the GeoPackage, or others", len(got), len(want))
	}
	problems := texts(t, file, `SELECT asset || '|' || "column" || '|' || code || '|' || text FROM leat_results_problems ORDER BY 1`)
	var found []string
	for _, row := range rows(t, connection, `select * from ostermere.leat_results_problems`) {
		found = append(found, row["asset"]+"|"+row["column"]+"|"+row["code"]+"|"+row["text"])
	}
	slices.Sort(found)
	if !slices.Equal(problems, found) {
		t.Errorf("problems in the GeoPackage:\n%s\nin PostgreSQL:\n%s", strings.Join(problems, "\n"), strings.Join(found, "\n"))
	}
}
