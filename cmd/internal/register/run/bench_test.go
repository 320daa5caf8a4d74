package run

import (
	"context"
	"testing"

	"leat/cmd/internal/register/mapping"
	"leat/cmd/internal/register/row"
	"leat/cmd/internal/register/store"
)

// benchmarkWorker takes a page of 5000 rows through a worker, again and again, and tells the cost of a row.
func benchmarkWorker(b *testing.B, mode mode, stored bool) {
	f, err := mapping.Parse("m.yaml", []byte(file))
	if err != nil {
		b.Fatal(err)
	}
	job, err := Prepare(f, sourceOf(nil), Options{})
	if err != nil {
		b.Fatal(err)
	}
	const rows = 5000
	w, t, id := newWorker(job.plan, mode), &task{skip: true}, newIdentity("r")
	t.page.Reset(len(job.plan.mapping.Columns), 0)
	all := drains(rows)
	for i := range all {
		cells, values := all[i].cells(), t.page.Add(0)
		for k, name := range job.plan.mapping.Columns {
			for at := range columns {
				if columns[at].Name == name {
					values[k] = t.page.Keep(cells[at])
				}
			}
		}
	}
	t.stretch(row.Int, true, row.Value{}, row.Value{})
	if err := w.work(context.Background(), t, id); err != nil {
		b.Fatal(err)
	}
	fingerprints := map[int64]store.Stored{}
	for _, cells := range t.batch.Results {
		var s store.Stored
		s.Copied = cells[len(cells)-3].Int()
		w.unhex(&s, cells)
		fingerprints[cells[0].Int()] = s
	}
	b.ReportAllocs()
	n := 0
	for b.Loop() {
		t.stretch(row.Int, true, row.Value{}, row.Value{})
		if stored {
			for i := range rows {
				if s, found := fingerprints[all[i].key]; found {
					t.known.add(row.OfInt(all[i].key), s)
				}
			}
		}
		if err := w.work(context.Background(), t, id); err != nil {
			b.Fatal(err)
		}
		n += rows
	}
	if stored != (t.batch.Counts.Unchanged > 0) {
		b.Fatal("not what was to be measured")
	}
	b.ReportMetric(float64(b.Elapsed().Nanoseconds())/float64(n), "ns/row")
}

// unhex reads the fingerprint of a result.
func (w *worker) unhex(into *store.Stored, cells []row.Value) {
	for i, c := range w.layout.Columns {
		if c.Role == store.RoleFingerprint {
			const digits = "0123456789abcdef"
			for k, d := range cells[i].Bytes() {
				for v := range digits {
					if digits[v] == d {
						into.Fingerprint[k/2] = into.Fingerprint[k/2]<<4 | byte(v)
					}
				}
			}
		}
	}
}

func BenchmarkComputed(b *testing.B)  { benchmarkWorker(b, computing, false) }
func BenchmarkUnchanged(b *testing.B) { benchmarkWorker(b, computing, true) }
func BenchmarkChecked(b *testing.B)   { benchmarkWorker(b, checking, false) }
