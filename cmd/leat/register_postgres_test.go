package main

import (
	"bytes"
	"context"
	"flag"
	"fmt"
	"math/rand/v2"
	"os"
	"os/exec"
	"path/filepath"
	"strings"
	"testing"
	"time"

	"github.com/jackc/pgx/v5"

	"leat/cmd/internal/register/postgres/postgrestest"
)

var (
	assets       = flag.Int("assets", 40_000, "length of the register in PostgreSQL whose run is disturbed")
	disturbances = flag.Int("disturbances", 4, "how often a run over PostgreSQL is killed, or its database restarted")
	batchRows    = flag.Int("batch", 500, "rows of a batch of such a run")
)

// An office is a database with a register in it.
type office struct {
	address     string
	environment []string
	folder      string
}

// newOffice makes a register of so many drains, one in a hundred of them bad.
func newOffice(t testing.TB, address string, assets int) *office {
	t.Helper()
	config, err := pgx.ParseConfig(address)
	if err != nil {
		t.Fatal(err)
	}
	o := &office{address: address, folder: t.TempDir()}
	for name, value := range map[string]string{"PGHOST": config.Host, "PGPORT": fmt.Sprint(config.Port), "PGUSER": config.User, "PGDATABASE": config.Database, "PGPASSWORD": config.Password} {
		o.environment = append(o.environment, name+"="+value)
	}
	o.execute(t, fmt.Sprintf(`create table drains as select i::bigint as asset, (array['C', 'T', 'V'])[i %% 3 + 1] as shape, (300 + i %% 1500)::int as size, (1 + i %% 5 * 0.25)::numeric(4,2) as side,
  case when i %% 300 = 57 then 'wood' when i %% 2 = 0 then 'concrete' else 'earth' end as material, case when i %% 300 = 157 then -999 else 0.05 + i %% 290 / 100.0 end::double precision as fall,
  case when i %% 300 = 257 then null else 1 + i * 7 %% 400 end::real as flow, 'Drain ' || i as name from generate_series(1, %d) i`, assets),
		"alter table drains add primary key (asset)", "vacuum analyze drains")
	return o
}

// mapping writes a mapping file whose results go to a table, and returns its path.
func (o *office) mapping(t testing.TB, table string) string {
	t.Helper()
	path := filepath.Join(o.folder, table+".yaml")
	err := os.WriteFile(path, []byte(`operation: depths
source: {format: postgres, table: drains, key: asset}
target: {format: postgres, table: `+table+`}
missing: [-999]
columns:
  section_kind: {column: shape, values: {C: circular, T: trapezoidal, V: triangular}}
  section_diameter: {column: size, unit: mm}
  section_bottom_width: {column: size, unit: mm}
  section_side_slope: side
  section_bank_height: {constant: 1.5, for: [trapezoidal, triangular]}
  roughness_manning: {column: material, values: {concrete: 0.013, earth: 0.025}}
  bed_slope: {column: fall, unit: "%"}
  discharge: {column: flow, unit: l/s}
`), 0o600)
	if err != nil {
		t.Fatal(err)
	}
	return path
}

func (o *office) execute(t testing.TB, statements ...string) {
	t.Helper()
	connection, err := pgx.Connect(context.Background(), o.address)
	if err != nil {
		t.Fatal(err)
	}
	defer connection.Close(context.Background())
	for _, statement := range statements {
		if _, err := connection.Exec(context.Background(), statement); err != nil {
			t.Fatalf("%s: %v", statement, err)
		}
	}
}

// value returns the only value of a query, as text.
func (o *office) value(t testing.TB, query string) string {
	t.Helper()
	text, err := o.ask(query)
	if err != nil {
		t.Fatalf("%s: %v", query, err)
	}
	return text
}

func (o *office) ask(query string) (text string, err error) {
	connection, err := pgx.Connect(context.Background(), o.address)
	if err != nil {
		return "", err
	}
	defer connection.Close(context.Background())
	err = connection.QueryRow(context.Background(), query).Scan(&text)
	return text, err
}

// hash is of all results and problems but for the run and the moment, with their numbers.
func (o *office) hash(t testing.TB, table string) string {
	t.Helper()
	return o.value(t, `select count(*) || ' results ' || md5(string_agg(md5((to_jsonb(r) - 'run' - 'computed_at')::text), '' order by asset)) from `+table+` r`) + ", " +
		o.value(t, `select count(*) || ' problems ' || md5(string_agg(md5((to_jsonb(p) - 'run')::text), '' order by asset, "column", pointer, code, text)) from `+table+`_problems p`)
}

// finished reports whether a run has come to its end.
func (o *office) finished(table, run string) bool {
	text, err := o.ask("select (finished_at is not null)::text from " + table + "_runs where run = '" + run + "'")
	return err == nil && text == "true"
}

// A process is a leat register that may be killed.
type process struct {
	*exec.Cmd
	out   bytes.Buffer
	ended chan struct{}
}

func (o *office) start(t testing.TB, arguments ...string) *process {
	t.Helper()
	p := &process{Cmd: command(t, o.environment, append([]string{"register"}, arguments...)...), ended: make(chan struct{})}
	p.Stdout, p.Stderr = &p.out, &p.out
	if err := p.Start(); err != nil {
		t.Fatal(err)
	}
	go func() {
		_ = p.Wait() // the exit code is looked at by whoever waits
		close(p.ended)
	}()
	return p
}

// kill kills the process unless it has ended, and reports whether it did.
func (p *process) kill() bool {
	select {
	case <-p.ended:
		return false
	default:
	}
	_ = p.Process.Kill() // it may have ended just now
	<-p.ended
	return !p.ProcessState.Exited()
}

// whole runs undisturbed and returns the hash and the time that it took.
func (o *office) whole(t testing.TB) (hash string, took time.Duration) {
	t.Helper()
	began := time.Now()
	p := o.start(t, "run", "--quiet", "--rows", fmt.Sprint(*batchRows), o.mapping(t, "whole"))
	<-p.ended
	if p.ProcessState.ExitCode() != exitProblems {
		t.Fatalf("undisturbed: %v\n%s", p.ProcessState, p.out.String())
	}
	took = time.Since(began)
	hash = o.hash(t, "whole")
	good := *assets - *assets/100
	if !strings.HasPrefix(hash, fmt.Sprint(good, " results ")) {
		t.Fatalf("%s, expected %d", hash, good)
	}
	return hash, took
}

// A run that is killed again and again, at moments that nobody chose, ends in the same results as one that is left alone.
func TestAKilledRunOverPostgreSQLGoesOn(t *testing.T) {
	o := newOffice(t, postgrestest.Database(t), *assets)
	want, took := o.whole(t)
	dice := rand.New(rand.NewPCG(4, 1))
	mapping := o.mapping(t, "broken")
	arguments := []string{"run", "--quiet", "--run", "night", "--rows", fmt.Sprint(*batchRows), mapping}
	killed := 0
	for range *disturbances {
		p := o.start(t, arguments...)
		select {
		case <-p.ended:
		case <-time.After(time.Duration(dice.Float64() * 1.6 * float64(took) / float64(*disturbances))):
			if p.kill() {
				killed++
			}
		}
	}
	if killed == 0 {
		t.Error("no run was killed: the register is too short for this machine")
	}
	if !o.finished("broken", "night") {
		p := o.start(t, arguments...)
		<-p.ended
		if p.ProcessState.ExitCode() != exitProblems {
			t.Fatalf("the last run: %v\n%s", p.ProcessState, p.out.String())
		}
	}
	t.Logf("killed %d times; undisturbed it takes %v", killed, took.Round(time.Millisecond))
	if got := o.hash(t, "broken"); got != want {
		t.Errorf("%s after kills, %s without", got, want)
	}
	if runs := o.value(t, "select count(*)::text from broken_runs"); runs != "1" {
		t.Errorf("%s runs", runs)
	}
}

// takenUp is how long a killed process's batch may lie before another process has taken it up, done it and ended.
const takenUp = 75 * time.Second

// Three processes share a run, and one after another is killed and begun again.
func TestKilledProcessesOfASharedRun(t *testing.T) {
	o := newOffice(t, postgrestest.Database(t), *assets)
	want, took := o.whole(t)
	dice := rand.New(rand.NewPCG(4, 3))
	mapping := o.mapping(t, "shared")
	const name = "night"
	begin := func(place int) *process {
		if place == 0 {
			return o.start(t, "run", "--shared", "--quiet", "--run", name, "--rows", fmt.Sprint(*batchRows), "--workers", "1", mapping)
		}
		return o.start(t, "work", "--quiet", "--workers", "1", mapping)
	}
	processes := []*process{begin(0), nil, nil}
	for deadline := time.Now().Add(time.Minute); ; time.Sleep(10 * time.Millisecond) {
		if text, err := o.ask("select count(*)::text from shared_batches"); err == nil && text != "0" {
			break
		}
		if time.Now().After(deadline) {
			processes[0].kill()
			t.Fatalf("no batches:\n%s", processes[0].out.String())
		}
	}
	processes[1], processes[2] = begin(1), begin(2)
	killed := 0
	for range *disturbances {
		time.Sleep(time.Duration(dice.Float64() * 1.2 * float64(took) / float64(*disturbances)))
		place := dice.IntN(3)
		if o.finished("shared", name) {
			break
		}
		if processes[place].kill() {
			killed++
		}
		if o.finished("shared", name) {
			break
		}
		processes[place] = begin(place)
	}
	since := time.Now()
	for place := range processes {
		select {
		case <-processes[place].ended:
		case <-time.After(time.Until(since.Add(takenUp + 10*took))):
			t.Errorf("a process has not ended %v after the last kill", time.Since(since).Round(time.Second))
			processes[place].kill()
		}
		t.Logf("place %d: %v %s", place, processes[place].ProcessState, strings.TrimSpace(firstLine(processes[place].out.Bytes())))
	}
	t.Logf("killed %d times; ended %v after the last kill; one process alone, undisturbed, takes %v; by process: %s", killed, time.Since(since).Round(time.Millisecond), took.Round(time.Millisecond),
		o.value(t, "select string_agg(worker || ': ' || n, ', ') from (select worker, count(*)::text as n from shared_batches group by worker) w"))
	if killed == 0 {
		t.Error("no process was killed: the register is too short for this machine")
	}
	if !o.finished("shared", name) {
		t.Errorf("the run is not finished: %s", o.value(t, "select json_agg(b)::text from shared_batches b where state <> 'done'"))
	}
	if got := o.hash(t, "shared"); got != want {
		t.Errorf("%s after kills, %s without", got, want)
	}
	if first := o.start(t, "work", mapping); true {
		if <-first.ended; first.ProcessState.ExitCode() != exitFailed || !strings.Contains(first.out.String(), "no run is open") {
			t.Errorf("joining a finished run: %v\n%s", first.ProcessState, first.out.String())
		}
	}
}

// A database that is restarted during a run costs time only: the processes live on.
func TestADatabaseRestartedDuringARun(t *testing.T) {
	server := postgrestest.Start(t, postgrestest.Options{})
	o := newOffice(t, postgrestest.Create(t, server.URL()), *assets)
	want, took := o.whole(t)
	for _, table := range []string{"alone", "shared"} {
		arguments := []string{"run", "--quiet", "--run", "night", "--rows", fmt.Sprint(*batchRows), o.mapping(t, table)}
		if table == "shared" {
			arguments = append(arguments, "--shared")
		}
		p := o.start(t, arguments...)
		restarts := 0
	disturb:
		for i := range max(*disturbances/2, 2) {
			select {
			case <-p.ended:
				break disturb
			case <-time.After(took / 4):
			}
			if i%2 == 0 {
				server.Crash(t)
			} else {
				server.Stop(t)
			}
			server.Run(t)
			restarts++
		}
		<-p.ended
		t.Logf("%s: %d restarts, %v; %s", table, restarts, p.ProcessState, firstLine(p.out.Bytes()))
		if p.ProcessState.ExitCode() != exitProblems || restarts == 0 {
			t.Errorf("%s: %v\n%s", table, p.ProcessState, p.out.String())
		}
		if got := o.hash(t, table); got != want {
			t.Errorf("%s: %s after restarts, %s without", table, got, want)
		}
	}
}
