package postgres_test

import (
	"context"
	"errors"
	"strings"
	"sync"
	"testing"
	"time"

	"github.com/google/go-cmp/cmp"

	"leat/cmd/internal/register/postgres"
	"leat/cmd/internal/register/row"
	"leat/cmd/internal/register/store"
)

// sharedOffice has a register of a hundred assets and a target for it.
func sharedOffice(t *testing.T) (address string, source store.Source, open func() store.Sharing) {
	t.Helper()
	address = database(t, "create table assets as select i as id from generate_series(1, 100) i", "alter table assets add primary key (id)", "analyze assets")
	return address, openSource(t, store.SourceSpec{Table: "assets", Key: "id"}), func() store.Sharing { return openTarget(t, store.TargetSpec{Table: "results"}).(store.Sharing) }
}

// process reads its stretch and gives each asset its own number as depth.
func process(source store.Source, run string, fail func(after row.Value) error) store.Process {
	return func(ctx context.Context, after, until row.Value, batch *store.Batch) error {
		if err := fail(after); err != nil {
			return err
		}
		reader, err := source.Read(ctx, &store.Query{Columns: []string{"id"}, After: after, Until: until})
		if err != nil {
			return err
		}
		defer reader.Close()
		*batch = store.Batch{Stretch: store.Stretch{Ordered: true, After: after, Until: until}}
		var page row.Page
		if err := reader.Next(ctx, &page, 1000); err != nil {
			return err
		}
		for i := range page.Rows() {
			batch.Results = append(batch.Results, result(page.Row(i)[0], float64(page.Row(i)[0].Int()), run))
		}
		batch.Counts = store.Counts{Read: int64(page.Rows()), Computed: int64(page.Rows())}
		return nil
	}
}

func never(row.Value) error { return nil }

func TestSharedRunEndsOnce(t *testing.T) {
	address, source, open := sharedOffice(t)
	ctx := context.Background()
	first := open()
	if _, err := first.Join(ctx, layout(row.Int), start("a")); !errors.Is(err, store.ErrNoRun) {
		t.Errorf("joined before anything was begun: %v", err)
	}
	query1 := &store.Query{Columns: []string{"id"}}
	state, err := first.Share(ctx, layout(row.Int), start("a"), source, query1, 7)
	if err != nil || state.Run != "a" || state.Resumed || state.Fresh {
		t.Fatalf("%+v %v", state, err)
	}
	second := open()
	if state, err = second.Join(ctx, layout(row.Int), start("b")); err != nil || state.Run != "a" {
		t.Fatalf("%+v %v", state, err)
	}
	other := layout(row.Int)
	other.Hash = "layout 2"
	if _, err := open().Join(ctx, other, start("b")); err == nil || errors.Is(err, store.ErrNoRun) {
		t.Errorf("joined with another layout: %v", err)
	}
	var parts sync.WaitGroup
	for _, target := range []store.Sharing{first, second} {
		parts.Go(func() {
			var told store.Counts
			total, failed, err := target.Work(ctx, []store.Process{process(source, "a", never), process(source, "a", never)}, func(c store.Counts) { told = c })
			if err != nil || failed != 0 || total.Read != 100 || total.Computed != 100 || told.Read != 100 {
				t.Errorf("%+v %d %v, told %+v", total, failed, err, told)
			}
		})
	}
	parts.Wait()
	if got := query(t, address, "select count(*), sum(normal_depth), count(distinct run) from results"); got[0] != "100|5050|1" {
		t.Error(got)
	}
	if got := query(t, address, "select run, finished_at is not null, shared, batches, read, computed from results_runs"); got[0] != "a|t|t|15|100|100" {
		t.Error(got)
	}
	if _, err := open().Join(ctx, layout(row.Int), start("b")); !errors.Is(err, store.ErrNoRun) {
		t.Errorf("joined a finished run: %v", err)
	}
	// The next run leaves nothing of this one's batches.
	third := open()
	if state, err := third.Share(ctx, layout(row.Int), start("c"), source, query1, 50); err != nil || state.Run != "c" {
		t.Fatalf("%+v %v", state, err)
	}
	if got := query(t, address, "select run, count(*) from results_batches group by run"); len(got) != 1 || got[0] != "c|2" {
		t.Error(got)
	}
}

// What fails for good stands in the table of batches with its reason, the others are done, and the run stays open until it has succeeded.
func TestBatchesThatFailForGood(t *testing.T) {
	defer postgres.SetAttempts(1)()
	address, source, open := sharedOffice(t)
	ctx := context.Background()
	target := open()
	if _, err := target.Share(ctx, layout(row.Int), start("a"), source, &store.Query{Columns: []string{"id"}}, 10); err != nil {
		t.Fatal(err)
	}
	broken := func(after row.Value) error {
		switch {
		case after.IsNull():
			panic("the first batch")
		case after.Int() == 50:
			return errors.New("the sixth batch cannot be done")
		}
		return nil
	}
	total, failed, err := target.Work(ctx, []store.Process{process(source, "a", broken)}, nil)
	if err != nil || failed != 2 || total.Read != 80 {
		t.Errorf("%+v %d %v", total, failed, err)
	}
	got := query(t, address, "select batch, state, error from results_batches where state <> 'done' order by batch")
	if len(got) != 2 || got[0] != "0|failed|the first batch" || got[1] != "5|failed|the sixth batch cannot be done" {
		t.Error(got)
	}
	if got := query(t, address, "select count(*), (select count(*) from results_runs where finished_at is null) from results"); got[0] != "80|1" {
		t.Error(got)
	}
	// Begun again it tries those once more, and then those from before, whose rows may have changed.
	target = open()
	state, err := target.Share(ctx, layout(row.Int), start("b"), source, &store.Query{Columns: []string{"id"}}, 33)
	if err != nil || state.Run != "a" || !state.Resumed {
		t.Fatalf("%+v %v", state, err)
	}
	total, failed, err = target.Work(ctx, []store.Process{process(source, "a", never)}, nil)
	if err != nil || failed != 0 || total.Read != 180 {
		t.Errorf("%+v %d %v", total, failed, err)
	}
	if got := query(t, address, "select count(*), sum(normal_depth), (select count(*) from results_runs where finished_at is null) from results"); got[0] != "100|5050|0" {
		t.Error(got)
	}
}

// A newer run sends the processes of an older one home; work that is stopped leaves its batch to others at once.
func TestProcessesThatStop(t *testing.T) {
	address, source, open := sharedOffice(t)
	ctx := context.Background()
	target := open()
	if _, err := target.Share(ctx, layout(row.Int), start("a"), source, &store.Query{Columns: []string{"id"}}, 10); err != nil {
		t.Fatal(err)
	}
	stopped, stop := context.WithCancel(ctx)
	hang := func(ctx context.Context, after, until row.Value, batch *store.Batch) error {
		stop()
		<-ctx.Done()
		return ctx.Err()
	}
	began := time.Now()
	if _, _, err := target.Work(stopped, []store.Process{hang}, nil); !errors.Is(err, context.Canceled) || time.Since(began) > 20*time.Second {
		t.Errorf("%v after %v", err, time.Since(began))
	}
	if got := query(t, address, "select count(*) from leat_jobs.river_job where state = 'running' or attempt > 0"); got[0] != "0" {
		t.Errorf("%s jobs are taken", got[0])
	}
	older := open()
	if _, err := older.Join(ctx, layout(row.Int), start("b")); err != nil {
		t.Fatal(err)
	}
	newer := start("c")
	newer.EngineVersion = "1.0.1"
	if state, err := open().Share(ctx, layout(row.Int), newer, source, &store.Query{Columns: []string{"id"}}, 10); err != nil || state.Run != "c" || !state.Fresh {
		t.Errorf("%+v %v", state, err)
	}
	if _, _, err := older.Work(ctx, []store.Process{process(source, "a", never)}, nil); err == nil || !strings.Contains(err.Error(), "newer run") {
		t.Error(err)
	}
	if difference := cmp.Diff([]string{"c|waiting|10"}, query(t, address, "select run, state, count(*) from results_batches group by run, state order by run")); difference != "" {
		t.Error(difference)
	}
}
