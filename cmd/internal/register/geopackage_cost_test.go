package register_test

import (
	"bytes"
	"context"
	"errors"
	"flag"
	"io"
	"os"
	"path/filepath"
	"strings"
	"syscall"
	"testing"
	"time"

	"zombiezen.com/go/sqlite"

	"leat/cmd/internal/demo/district"
	"leat/cmd/internal/geopackage"
	"leat/cmd/internal/register"
	gpkg "leat/cmd/internal/register/geopackage"
	"leat/cmd/internal/register/mapping"
	"leat/cmd/internal/register/row"
	"leat/cmd/internal/register/run"
	"leat/cmd/internal/register/store"
)

var times = flag.Int("times", 10, "length of the register in the benchmarks of GeoPackages, in demos of 1,200 assets")

// long makes the demo so many times as long in a folder of its own, with its mapping file, whose path it returns.
func long(b testing.TB, times int) string {
	b.Helper()
	folder := b.TempDir()
	content, err := os.ReadFile(filepath.Join("..", "..", "..", "deploy", "register", "ostermere_geopackage.yaml"))
	if err != nil {
		b.Fatal(err)
	}
	path := filepath.Join(folder, "mapping.yaml")
	if err := os.WriteFile(path, content, 0o600); err != nil {
		b.Fatal(err)
	}
	file := filepath.Join(folder, "ostermere.gpkg")
	if err := district.WriteGeoPackage(context.Background(), file); err != nil {
		b.Fatal(err)
	}
	if times > 1 {
		f, err := geopackage.Open(context.Background(), file, geopackage.Write)
		if err != nil {
			b.Fatal(err)
		}
		if err := errors.Join(f.Run("PRAGMA synchronous = OFF"), district.Multiply(f, times), f.Close()); err != nil {
			b.Fatal(err)
		}
	}
	return path
}

func duplicate(b testing.TB, mapping string) string {
	b.Helper()
	folder := b.TempDir()
	for _, name := range []string{"mapping.yaml", "ostermere.gpkg"} {
		from, err := os.Open(filepath.Join(filepath.Dir(mapping), name))
		if err != nil {
			b.Fatal(err)
		}
		to, err := os.Create(filepath.Join(folder, name))
		if err != nil {
			b.Fatal(err)
		}
		if _, err := io.Copy(to, from); err != nil {
			b.Fatal(err)
		}
		if err := errors.Join(from.Close(), to.Close()); err != nil {
			b.Fatal(err)
		}
	}
	return filepath.Join(folder, "mapping.yaml")
}

// BenchmarkGeoPackage sets a run over a GeoPackage against the same reading and writing without mapping, hashing and solving: pages, stored results, batches, and
// rows of the very same content. Compare the two as a ratio.
func BenchmarkGeoPackage(b *testing.B) {
	original := long(b, *times)
	sample := results(b)
	for _, form := range []struct {
		name string
		do   func(*testing.B, string)
	}{
		{"bare", func(b *testing.B, mapping string) { bare(b, mapping, sample) }},
		{"run", func(b *testing.B, mapping string) {
			if outcome := register.Run(context.Background(), []string{"run", "--quiet", mapping}, io.Discard, io.Discard); outcome != register.Problems {
				b.Fatalf("the run ended with %v", outcome)
			}
		}},
	} {
		b.Run(form.name, func(b *testing.B) {
			var cpu time.Duration
			for b.Loop() {
				b.StopTimer()
				mapping := duplicate(b, original)
				before := processorTime(b)
				b.StartTimer()
				form.do(b, mapping)
				b.StopTimer()
				cpu += processorTime(b) - before
				b.StartTimer()
			}
			rows := float64(*times*district.Rows) * float64(b.N)
			b.ReportMetric(rows/b.Elapsed().Seconds(), "rows/s")
			b.ReportMetric(float64(cpu.Microseconds())/rows, "cpu-us/row")
		})
	}
}

// processorTime is what the process has used, which other work on the machine does not lengthen as it does the clock's.
func processorTime(b *testing.B) time.Duration {
	var used syscall.Rusage
	if err := syscall.Getrusage(syscall.RUSAGE_SELF, &used); err != nil {
		b.Fatal(err)
	}
	return time.Duration(used.Utime.Nano() + used.Stime.Nano())
}

// results are those of the demo, in the order of the layout.
func results(b *testing.B) [][]row.Value {
	mapping := long(b, 1)
	var errText bytes.Buffer
	if outcome := register.Run(context.Background(), []string{"run", "--quiet", mapping}, io.Discard, &errText); outcome != register.Problems {
		b.Fatal(errText.String())
	}
	f, err := geopackage.Open(context.Background(), filepath.Join(filepath.Dir(mapping), "ostermere.gpkg"), geopackage.Read)
	if err != nil {
		b.Fatal(err)
	}
	defer f.Close()
	var out [][]row.Value
	err = f.Rows("SELECT * FROM leat_results", func(s *sqlite.Stmt) error {
		var cells []row.Value
		for i := 1; i < s.ColumnCount(); i++ {
			switch s.ColumnType(i) {
			case sqlite.TypeInteger:
				cells = append(cells, row.OfInt(s.ColumnInt64(i)))
			case sqlite.TypeFloat:
				cells = append(cells, row.OfFloat(s.ColumnFloat(i)))
			case sqlite.TypeText:
				cells = append(cells, row.OfString(s.ColumnText(i)))
			case sqlite.TypeBlob:
				blob := make([]byte, s.ColumnLen(i))
				s.ColumnBytes(i, blob)
				cells = append(cells, row.OfBytes(blob))
			default:
				cells = append(cells, row.Value{})
			}
		}
		out = append(out, cells)
		return nil
	})
	if err != nil {
		b.Fatal(err)
	}
	return out
}

// bare reads and writes as a run does, one page after another.
func bare(b *testing.B, path string, sample [][]row.Value) {
	ctx := context.Background()
	must := func(err error) {
		if err != nil {
			b.Fatal(err)
		}
	}
	file, err := mapping.Load(path)
	must(err)
	source, err := gpkg.OpenSource(ctx, &file.Source)
	must(err)
	job, err := run.Prepare(file, source, run.Options{})
	must(err)
	target, err := gpkg.OpenTarget(ctx, &file.Target.TargetSpec)
	must(err)
	must(target.Check(ctx, job.Layout()))
	must(source.CheckKey(ctx, file.Source.Filter))
	state, err := target.Begin(ctx, job.Layout(), job.Start(time.Now()))
	must(err)
	reader, err := source.Read(ctx, job.Query())
	must(err)
	var page row.Page
	after := row.Value{}
	for {
		err := reader.Next(ctx, &page, run.DefaultRows)
		if errors.Is(err, io.EOF) {
			break
		}
		must(err)
		batch := &store.Batch{Stretch: store.Stretch{Ordered: true, After: after}}
		for i := range page.Rows() {
			values := page.Row(i)
			batch.Stretch.Keys = append(batch.Stretch.Keys, values[0])
			if i%75 == 0 { // as many as are bad in the demo
				batch.Problems = append(batch.Problems, store.Problem{Asset: values[0], Column: "width_mm", Pointer: "/section/width", Code: "missing_member", Text: strings.Repeat("x", 100)})
				continue
			}
			cells := append([]row.Value(nil), sample[i%len(sample)]...)
			cells[0] = values[0]
			batch.Results = append(batch.Results, cells)
		}
		after = batch.Stretch.Keys[len(batch.Stretch.Keys)-1].Clone()
		batch.Stretch.Until, batch.Mark = after, after
		must(target.Stored(ctx, &batch.Stretch, func(row.Value, store.Stored) {}))
		must(target.Commit(ctx, batch))
	}
	must(reader.Close())
	must(target.Finish(ctx, &store.Summary{Run: state.Run, Finished: time.Now()}))
	must(target.Close())
	must(source.Close())
}
