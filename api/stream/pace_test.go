package stream

import (
	"testing"
	"time"
)

func TestPaceStartsSmallAndGrows(t *testing.T) {
	var p pace
	for i, want := range []int{1, 2, 4, 8, 16, 32, batchRecords, batchRecords} {
		if got := p.records(); got != want {
			t.Errorf("batch %d: %d records, want %d", i, got, want)
		}
		p.note(want, time.Duration(want)*time.Microsecond, 100*want)
	}
}

// Batches of slow records take no longer than a slot may be held, and batches of long answers are bounded.
func TestPaceHoldsBatchesShort(t *testing.T) {
	for name, c := range map[string]struct {
		cost  time.Duration
		bytes int
		most  int
	}{
		"slow":      {cost: time.Millisecond, bytes: 100, most: 6},
		"very slow": {cost: time.Second, bytes: 100, most: 1},
		"long":      {cost: time.Microsecond, bytes: 50 << 10, most: 6},
		"huge":      {cost: time.Microsecond, bytes: 50 << 20, most: 1},
	} {
		var p pace
		for range 20 {
			n := p.records()
			p.note(n, time.Duration(n)*c.cost, n*c.bytes)
		}
		if got := p.records(); got < 1 || got > c.most {
			t.Errorf("%s: %d records, want 1 to %d", name, got, c.most)
		}
	}
}

// When records become quick again, batches become large again.
func TestPaceRecovers(t *testing.T) {
	var p pace
	for range 20 {
		p.note(1, time.Second, 1<<20)
	}
	for range 100 {
		p.note(1, time.Microsecond, 100)
	}
	p.batches = 100
	if got := p.records(); got != batchRecords {
		t.Errorf("%d records", got)
	}
}
