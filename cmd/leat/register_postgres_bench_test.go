package main

import (
	"bytes"
	"context"
	"fmt"
	"io"
	"os"
	"slices"
	"strings"
	"syscall"
	"testing"
	"time"

	"github.com/jackc/pgx/v5"

	"leat/cmd/internal/register/postgres/postgrestest"
)

// A cost is what a way of doing things takes.
type cost struct{ first, changed, second []span }

// A span is how long something took, in seconds: by the clock, and of the processors, those of the server included.
type span struct{ clock, processors float64 }

func (s span) String() string { return fmt.Sprintf("%.2f (%.2f)", s.clock, s.processors) }

func ratio(of, to []span) (clock, processors float64) {
	pick := func(spans []span, of func(span) float64) []float64 {
		var out []float64
		for _, s := range spans {
			out = append(out, of(s))
		}
		return out
	}
	byClock, byProcessors := func(s span) float64 { return s.clock }, func(s span) float64 { return s.processors }
	return median(pick(of, byClock)) / median(pick(to, byClock)), median(pick(of, byProcessors)) / median(pick(to, byProcessors))
}

// clock starts a span. Its server's processes must have ended when it is stopped.
func clock(b testing.TB, server *postgrestest.Server) (stop func(client time.Duration) span) {
	began, before := time.Now(), server.Processors(b)
	return func(client time.Duration) span {
		took := time.Since(began).Seconds()
		time.Sleep(200 * time.Millisecond) // the server notices that its client has gone
		return span{took, (server.Processors(b) - before + client).Seconds()}
	}
}

func median(values []float64) float64 {
	sorted := slices.Sorted(slices.Values(values))
	return sorted[len(sorted)/2]
}

// BenchmarkPostgreSQL compares leat register with the same SQL alone, taking turns on the same server, which waits for the disk as Debian's does: a first run against COPY out, staging and
// upsert of the same rows with the same keys in the same batches; a run after every asset has changed against the same; and a run with nothing changed against COPY out of the register joined with
// the stored fingerprints. Metrics are the medians of three turns; memory is the most that the process had.
func BenchmarkPostgreSQL(b *testing.B) {
	for b.Loop() {
		server := postgrestest.Start(b, postgrestest.Options{Durable: true, Settings: []string{"max_wal_size=4GB", "checkpoint_timeout=30min"}})
		address := postgrestest.Create(b, server.URL())
		memory := map[int]int64{}
		few := newOffice(b, address, 10_000)
		memory[10_000] = few.measure(b, server, "results", nil)
		few.execute(b, "drop table drains, results, results_runs, results_problems")
		o := newOffice(b, address, *assets)
		bare := &bare{office: o, server: server}
		var ours, theirs cost
		for range 3 {
			o.execute(b, "drop table if exists results, results_runs, results_problems, bare", "checkpoint")
			memory[*assets] = max(memory[*assets], o.measure(b, server, "results", &ours.first))
			bare.load(b)
			o.execute(b, "create table bare (like results including all)", "checkpoint")
			theirs.first = append(theirs.first, bare.write(b))
			o.execute(b, "vacuum analyze results", "vacuum analyze bare", "update drains set side = side + 0.25", "vacuum analyze drains", "checkpoint")
			o.measure(b, server, "results", &ours.changed)
			o.execute(b, "checkpoint")
			bare.load(b)
			o.execute(b, "checkpoint")
			theirs.changed = append(theirs.changed, bare.write(b))
			o.execute(b, "vacuum analyze results", "checkpoint")
			theirs.second = append(theirs.second, bare.join(b))
			o.measure(b, server, "results", &ours.second)
		}
		b.Logf("seconds by the clock (and of the processors), ours and bare:\nfirst %v, %v\nall changed %v, %v\nnothing changed %v, %v", ours.first, theirs.first, ours.changed, theirs.changed, ours.second, theirs.second)
		for _, pair := range []struct {
			name         string
			ours, theirs []span
		}{{"first", ours.first, theirs.first}, {"changed", ours.changed, theirs.changed}, {"second", ours.second, theirs.second}} {
			byClock, byProcessors := ratio(pair.ours, pair.theirs)
			b.ReportMetric(byClock, pair.name+"/bare")
			b.ReportMetric(byProcessors, pair.name+"-processors/bare")
		}
		b.ReportMetric(float64(memory[10_000])/1024, "MiB-of-10000")
		b.ReportMetric(float64(memory[*assets])/1024, fmt.Sprintf("MiB-of-%d", *assets))
	}
}

// measure runs, adds the span that it took, and returns the most memory that the process had, in KiB.
func (o *office) measure(b testing.TB, server *postgrestest.Server, table string, spans *[]span) int64 {
	b.Helper()
	stop := clock(b, server)
	p := o.start(b, "run", "--quiet", "--rows", fmt.Sprint(*batchRows), o.mapping(b, table))
	// What the system says of the process when it has ended counts the memory of ours too, from which it was forked.
	var most int64
	for alive := true; alive; {
		select {
		case <-p.ended:
			alive = false
		case <-time.After(20 * time.Millisecond):
			status, _ := os.ReadFile(fmt.Sprintf("/proc/%d/status", p.Process.Pid)) // gone when the process has just ended
			if _, rest, found := strings.Cut(string(status), "VmHWM:"); found {
				var resident int64
				if _, err := fmt.Sscan(rest, &resident); err == nil {
					most = max(most, resident)
				}
			}
		}
	}
	if p.ProcessState.ExitCode() != exitProblems {
		b.Fatalf("%v\n%s", p.ProcessState, p.out.String())
	}
	if spans != nil {
		*spans = append(*spans, stop(p.ProcessState.UserTime()+p.ProcessState.SystemTime()))
	}
	return most
}

// bare is the SQL without computing.
type bare struct {
	office  *office
	server  *postgrestest.Server
	batches [][]byte // the results of each batch, as COPY in its binary form takes them
	columns string
	update  string

	*pgx.Conn // while something is measured
}

// connected does something on a connection of its own, and returns what it took.
func (s *bare) connected(b testing.TB, do func()) span {
	b.Helper()
	stop := clock(b, s.server)
	var err error
	if s.Conn, err = pgx.Connect(context.Background(), s.office.address); err != nil {
		b.Fatal(err)
	}
	var before, after syscall.Rusage
	if err := syscall.Getrusage(syscall.RUSAGE_SELF, &before); err != nil {
		b.Fatal(err)
	}
	do()
	if err := s.Conn.Close(context.Background()); err != nil {
		b.Fatal(err)
	}
	if err := syscall.Getrusage(syscall.RUSAGE_SELF, &after); err != nil {
		b.Fatal(err)
	}
	return stop(time.Duration(after.Utime.Nano() + after.Stime.Nano() - before.Utime.Nano() - before.Stime.Nano()))
}

func (s *bare) do(b testing.TB, statement string) {
	b.Helper()
	if _, err := s.Exec(context.Background(), statement); err != nil {
		b.Fatalf("%s: %v", statement, err)
	}
}

// load fetches what a run has written, batch by batch.
func (s *bare) load(b testing.TB) { s.connected(b, func() { s.fetch(b) }) }

func (s *bare) fetch(b testing.TB) {
	b.Helper()
	s.batches = s.batches[:0]
	for after := 0; after < *assets; after += *batchRows {
		var data bytes.Buffer
		if _, err := s.PgConn().CopyTo(context.Background(), &data, fmt.Sprintf("copy (select * from results where asset > %d and asset <= %d order by asset) to stdout (format binary)", after, after+*batchRows)); err != nil {
			b.Fatal(err)
		}
		s.batches = append(s.batches, data.Bytes())
	}
	var names []string
	rows, err := s.Query(context.Background(), "select quote_ident(attname) from pg_attribute where attrelid = 'results'::regclass and attnum > 0 order by attnum")
	if err != nil {
		b.Fatal(err)
	}
	if names, err = pgx.CollectRows(rows, pgx.RowTo[string]); err != nil {
		b.Fatal(err)
	}
	s.columns = strings.Join(names, ", ")
	var sets []string
	for _, name := range names[1:] {
		sets = append(sets, name+" = excluded."+name)
	}
	s.update = strings.Join(sets, ", ")
}

// write reads the register by COPY and writes the results by staging and upsert, a transaction a batch.
func (s *bare) write(b testing.TB) span {
	return s.connected(b, func() {
		ctx := context.Background()
		s.do(b, "create temporary table staging (like results) on commit delete rows")
		for i, data := range s.batches {
			if _, err := s.PgConn().CopyTo(ctx, io.Discard, fmt.Sprintf("copy (select * from drains where asset > %d order by asset limit %d) to stdout", i**batchRows, *batchRows)); err != nil {
				b.Fatal(err)
			}
			s.do(b, "begin")
			if _, err := s.PgConn().CopyFrom(ctx, bytes.NewReader(data), "copy staging from stdin (format binary)"); err != nil {
				b.Fatal(err)
			}
			s.do(b, "insert into bare ("+s.columns+") select "+s.columns+" from staging on conflict (asset) do update set "+s.update)
			s.do(b, "commit")
		}
	})
}

// join reads the register with the stored fingerprints by one COPY.
func (s *bare) join(b testing.TB) span {
	return s.connected(b, func() {
		if _, err := s.PgConn().CopyTo(context.Background(), io.Discard, "copy (select d.*, r.fingerprint from drains d left join results r using (asset) order by asset) to stdout"); err != nil {
			b.Fatal(err)
		}
	})
}
