package register

import (
	"bytes"
	"testing"
	"time"

	"leat/cmd/internal/register/run"
	"leat/cmd/internal/register/store"
)

func TestProgressLine(t *testing.T) {
	kinds := run.Kinds{{Code: "unknown_value", Columns: "shape"}: 3, {Code: "unknown_value", Columns: "material"}: 2, {Code: "missing_member"}: 9, {Code: "a"}: 1, {Code: "b"}: 1}
	counts := store.Counts{Read: 3000, Unchanged: 20, Bad: 15}
	for _, c := range []struct {
		progress run.Progress
		want     string
	}{
		{run.Progress{Counts: counts, Total: 9000, Kinds: kinds}, "3000 of 9000 rows, 1500 rows/s, 4s left, 20 unchanged, 15 bad (missing_member 9, unknown_value 5, a 1)"},
		{run.Progress{Counts: counts, Total: -1}, "3000 rows, 1500 rows/s, 20 unchanged, 15 bad"},
		{run.Progress{Counts: counts, Total: 2000}, "3000 of 3000 rows, 1500 rows/s, 20 unchanged, 15 bad"}, // rows that were put in meanwhile
	} {
		if got := progressLine(&c.progress, 2*time.Second); got != c.want {
			t.Errorf("%s\nwant %s", got, c.want)
		}
	}
}

// What is no terminal gets a line now and then, not one for each batch.
func TestProgressInALog(t *testing.T) {
	var out bytes.Buffer
	p := newProgress(&out)
	for range 100 {
		p.told(&run.Progress{Counts: store.Counts{Read: 5}, Total: 10})
	}
	if out.Len() > 0 {
		t.Errorf("%s", &out)
	}
	p.last = p.last.Add(-inLog)
	p.told(&run.Progress{Counts: store.Counts{Read: 5}, Total: 10})
	if bytes.Count(out.Bytes(), []byte("\n")) != 1 {
		t.Errorf("%q", out.String())
	}
}
