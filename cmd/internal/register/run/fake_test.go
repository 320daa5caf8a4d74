package run

import (
	"cmp"
	"context"
	"encoding/hex"
	"errors"
	"io"
	"maps"
	"slices"
	"sync"

	"leat/cmd/internal/register/row"
	"leat/cmd/internal/register/store"
)

// A memorySource is a register in memory: rows by a whole number. As a file it has them in another order than that of their keys.
type memorySource struct {
	columns []row.Column
	rows    map[int64][]row.Value
	file    bool
}

func (s *memorySource) Columns() []row.Column      { return s.columns }
func (s *memorySource) ChildColumns() []row.Column { return nil }
func (s *memorySource) Ordered() bool              { return !s.file }
func (s *memorySource) Close() error               { return nil }
func (s *memorySource) CheckKey(context.Context, []store.Condition) error {
	return nil
}

func (s *memorySource) keys(q *store.Query) []int64 {
	keys := slices.Sorted(maps.Keys(s.rows))
	if s.file {
		slices.SortFunc(keys, func(a, b int64) int { return cmp.Compare(a*7919%3001, b*7919%3001) })
		if at := slices.Index(keys, q.Until.Int()); at >= 0 && !q.Until.IsNull() {
			keys = keys[:at+1]
		}
		if at := slices.Index(keys, q.After.Int()); at >= 0 && !q.After.IsNull() {
			keys = keys[at+1:]
		}
		return keys
	}
	return slices.DeleteFunc(keys, func(k int64) bool {
		return !q.After.IsNull() && k <= q.After.Int() || !q.Until.IsNull() && k > q.Until.Int()
	})
}

func (s *memorySource) Count(_ context.Context, q *store.Query) (int64, error) {
	return int64(len(s.keys(q))), nil
}

func (s *memorySource) Read(_ context.Context, q *store.Query) (store.Reader, error) {
	return &memoryReader{s, q, s.keys(q)}, nil
}

type memoryReader struct {
	*memorySource
	query *store.Query
	left  []int64
}

func (r *memoryReader) Faults() []store.RowFault { return nil }

func (r *memoryReader) Next(_ context.Context, page *row.Page, limit int) error {
	page.Reset(len(r.query.Columns), 0)
	for ; len(r.left) > 0 && page.Rows() < limit; r.left = r.left[1:] {
		values := page.Add(0)
		for i, name := range r.query.Columns {
			at := slices.IndexFunc(r.columns, func(c row.Column) bool { return c.Name == name })
			values[i] = page.Keep(r.rows[r.left[0]][at])
		}
	}
	if page.Rows() == 0 {
		return io.EOF
	}
	return nil
}

// A memoryTarget keeps results in memory, as a database does: what was committed stays when a run is broken off.
type memoryTarget struct {
	mutex    sync.Mutex
	layout   *store.Layout
	results  map[int64][]row.Value
	problems map[int64][]store.Problem
	run      string
	hash     string
	open     bool
	fresh    bool
	mark     row.Value
	counts   store.Counts

	commits   int
	breakAt   int // the commit that fails, from 1; 0 for none
	breakPast bool
	onCommit  func(n int)
}

var errBroken = errors.New("the power is gone")

func newMemoryTarget() *memoryTarget {
	return &memoryTarget{results: map[int64][]row.Value{}, problems: map[int64][]store.Problem{}}
}

func (t *memoryTarget) Check(context.Context, *store.Layout) error { return nil }
func (t *memoryTarget) Close() error                               { return nil }

func (t *memoryTarget) Begin(_ context.Context, layout *store.Layout, start store.Start) (store.State, error) {
	if t.open && t.hash == layout.Hash {
		return store.State{Run: t.run, Resumed: true, Mark: t.mark, Counts: t.counts, Fresh: t.fresh}, nil
	}
	t.fresh = t.hash != layout.Hash
	t.layout, t.hash, t.run, t.open, t.mark, t.counts = layout, layout.Hash, start.New, true, row.Value{}, store.Counts{}
	return store.State{Run: t.run, Fresh: t.fresh}, nil
}

// covers reports whether a key lies in a stretch.
func covers(s *store.Stretch, key int64) bool {
	if !s.Ordered {
		return slices.ContainsFunc(s.Keys, func(k row.Value) bool { return k.Int() == key })
	}
	return (s.After.IsNull() || key > s.After.Int()) && (s.Until.IsNull() || key <= s.Until.Int())
}

func (t *memoryTarget) Stored(_ context.Context, s *store.Stretch, found func(row.Value, store.Stored)) error {
	t.mutex.Lock()
	defer t.mutex.Unlock()
	for key, cells := range t.results {
		if !covers(s, key) {
			continue
		}
		var stored store.Stored
		for i, c := range t.layout.Columns {
			switch c.Role {
			case store.RoleFingerprint:
				hex.Decode(stored.Fingerprint[:], cells[i].Bytes())
			case store.RoleCopiedHash:
				stored.Copied = cells[i].Int()
			}
		}
		found(row.OfInt(key), stored)
	}
	return nil
}

func (t *memoryTarget) Commit(_ context.Context, b *store.Batch) error {
	t.mutex.Lock()
	defer t.mutex.Unlock()
	t.commits++
	if t.commits == t.breakAt && !t.breakPast {
		return errBroken
	}
	for _, key := range b.Gone {
		delete(t.results, key.Int())
	}
	for key := range t.problems {
		if covers(&b.Stretch, key) {
			delete(t.problems, key)
		}
	}
	for _, cells := range b.Results {
		kept := make([]row.Value, len(cells))
		for i := range cells {
			kept[i] = cells[i].Clone()
		}
		t.results[cells[0].Int()] = kept
	}
	for _, p := range b.Problems {
		p.Asset = p.Asset.Clone()
		t.problems[p.Asset.Int()] = append(t.problems[p.Asset.Int()], p)
	}
	if !b.Mark.IsNull() {
		t.mark = b.Mark.Clone()
	}
	t.counts.Add(b.Counts)
	if t.onCommit != nil {
		t.onCommit(t.commits)
	}
	if t.commits == t.breakAt {
		return errBroken // after all: the answer was lost
	}
	return nil
}

func (t *memoryTarget) Finish(_ context.Context, s *store.Summary) error {
	t.open = false
	t.counts = s.Counts
	return nil
}
