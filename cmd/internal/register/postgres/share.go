package postgres

import (
	"context"
	"crypto/rand"
	"errors"
	"fmt"
	"io"
	"log/slog"

	"github.com/jackc/pgx/v5"
	"github.com/jackc/pgx/v5/pgconn"
	"github.com/riverqueue/river"
	"github.com/riverqueue/river/riverdriver/riverpgxv5"
	"github.com/riverqueue/river/rivermigrate"

	"leat/cmd/internal/register/row"
	"leat/cmd/internal/register/store"
)

// jobsSchema holds the tables of the jobs, apart from those of people.
const jobsSchema = "leat_jobs"

// attempts is how often a batch is tried before it is given up; tests are less patient.
var attempts = 5

// batchJob is the job of one batch; what it covers stands in the table of batches.
type batchJob struct {
	Run   string `json:"run"`
	Batch int64  `json:"batch"`
}

// Kind names the job.
func (batchJob) Kind() string { return "leat_register_batch" }

// quiet keeps the library's own log out of ours: what matters of it comes back as errors and in the table of batches.
var quiet = slog.New(slog.DiscardHandler)

func (t *target) Share(ctx context.Context, layout *store.Layout, start store.Start, source store.Source, query *store.Query, rows int) (store.State, error) {
	if err := t.Check(ctx, layout); err != nil {
		return store.State{}, err
	}
	t.owner = rand.Text()
	if err := t.migrate(ctx); err != nil {
		return store.State{}, err
	}
	// A process that writes alone keeps others out; look for it before anything is begun.
	watch := &writer{target: t, shared: true}
	if err := again(ctx, func() error { return watch.ready(ctx) }); err != nil {
		return store.State{}, err
	}
	defer watch.close()
	var state store.State
	err := again(ctx, func() error {
		return t.inTransaction(ctx, func(tx pgx.Tx) error {
			if err := t.create(ctx, tx, true); err != nil {
				return err
			}
			var err error
			if state, err = t.begin(ctx, tx, start, true); err != nil {
				return err
			}
			if state.Resumed {
				return t.revive(ctx, tx)
			}
			if err := t.leave(ctx, tx); err != nil {
				return err
			}
			cuts, err := t.cut(ctx, source, query, rows)
			if err != nil {
				return err
			}
			return t.insert(ctx, tx, cuts)
		})
	})
	return state, err
}

// migrate makes the tables of the jobs.
func (t *target) migrate(ctx context.Context) error {
	err := again(ctx, func() error {
		return pgx.BeginFunc(ctx, t.pool, func(tx pgx.Tx) error {
			// The lock is held while other connections do the work.
			if _, err := tx.Exec(ctx, "select pg_advisory_xact_lock($1::int4, hashtext($2::text))", lockSpace, jobsSchema); err != nil {
				return err
			}
			var there bool
			if err := tx.QueryRow(ctx, "select exists (select from pg_namespace where nspname = $1)", jobsSchema).Scan(&there); err != nil {
				return err
			}
			if !there {
				if _, err := t.pool.Exec(ctx, "create schema "+quote(jobsSchema)); err != nil {
					return err
				}
			}
			migrator, err := rivermigrate.New(riverpgxv5.New(t.pool), &rivermigrate.Config{Schema: jobsSchema, Logger: quiet})
			if err != nil {
				return err
			}
			_, err = migrator.Migrate(ctx, rivermigrate.DirectionUp, nil)
			return err
		})
	})
	if fault, is := errors.AsType[*pgconn.PgError](err); is && fault.Code == "42501" {
		return &store.Misfit{Field: "database", Detail: fmt.Sprintf("The user of the database may not make the schema %q, which holds the jobs of a shared run; somebody who may must create it and give it to that user.", jobsSchema)}
	}
	if err != nil {
		return fmt.Errorf("making the tables of the jobs: %w", err)
	}
	return nil
}

// leave does away with what earlier runs have left: batches, but for those that were given up, and the jobs of runs that nobody will go on with.
func (t *target) leave(ctx context.Context, tx pgx.Tx) error {
	rows, err := tx.Query(ctx, "select run from "+t.runs.quoted()+" where run <> $1 and shared and finished_at is null", t.run)
	if err != nil {
		return err
	}
	runs, err := pgx.CollectRows(rows, pgx.RowTo[string])
	if err != nil {
		return err
	}
	queues := make([]string, len(runs))
	for i, run := range runs {
		queues[i] = t.queue(run)
	}
	for _, statement := range []struct {
		text      string
		parameter any
	}{
		{"delete from " + quote(jobsSchema, "river_job") + " where queue = any($1::text[]) and state <> 'running'", queues},
		{"delete from " + t.batches.quoted() + " where run <> $1 and state <> 'failed'", t.run},
	} {
		if _, err := tx.Exec(ctx, statement.text, statement.parameter); err != nil {
			return err
		}
	}
	return nil
}

// cut returns the keys at which batches end, in order; the last batch ends nowhere.
func (t *target) cut(ctx context.Context, source store.Source, query *store.Query, rows int) ([]row.Value, error) {
	keys := store.Query{Columns: query.Columns[:1], Filter: query.Filter, After: query.After, Until: query.Until}
	reader, err := source.Read(ctx, &keys)
	if err != nil {
		return nil, err
	}
	defer reader.Close()
	var cuts []row.Value
	var page row.Page
	for {
		err := reader.Next(ctx, &page, rows)
		if errors.Is(err, io.EOF) {
			break
		}
		if err != nil {
			return nil, err
		}
		cuts = append(cuts, page.Row(page.Rows() - 1)[0].Clone())
	}
	if len(cuts) > 0 {
		cuts = cuts[:len(cuts)-1] // rows behind the last key are the last batch's
	}
	return cuts, nil
}

// insert puts the batches of a run and their jobs in.
func (t *target) insert(ctx context.Context, tx pgx.Tx, cuts []row.Value) error {
	numbers := make([]int64, len(cuts)+1)
	for i := range numbers {
		numbers[i] = int64(i)
	}
	jobs, err := t.enqueue(ctx, tx, numbers)
	if err != nil {
		return err
	}
	at := func(i int) any {
		if i < 0 || i >= len(cuts) {
			return nil
		}
		return cuts[i].String()
	}
	_, err = tx.CopyFrom(ctx, pgx.Identifier{t.batches.schema, t.batches.name}, []string{"run", "batch", "after", "until", "job", "state"},
		pgx.CopyFromSlice(len(numbers), func(i int) ([]any, error) {
			return []any{t.run, numbers[i], at(i - 1), at(i), jobs[i], "waiting"}, nil
		}))
	if err != nil {
		return fmt.Errorf("writing the table %s: %w", t.batches, err)
	}
	return nil
}

// enqueue makes a job for each of some batches.
func (t *target) enqueue(ctx context.Context, tx pgx.Tx, batches []int64) (jobs []int64, err error) {
	client, err := river.NewClient(riverpgxv5.New(t.pool), &river.Config{Schema: jobsSchema, Logger: quiet})
	if err != nil {
		return nil, err
	}
	parameters := make([]river.InsertManyParams, len(batches))
	for i, batch := range batches {
		parameters[i] = river.InsertManyParams{Args: batchJob{t.run, batch}, InsertOpts: &river.InsertOpts{Queue: t.queue(t.run), MaxAttempts: attempts}}
	}
	inserted, err := client.InsertManyTx(ctx, tx, parameters)
	if err != nil {
		return nil, fmt.Errorf("putting batches into the queue: %w", err)
	}
	for _, result := range inserted {
		jobs = append(jobs, result.Job.ID)
	}
	return jobs, nil
}

// revive gives new jobs to the batches of a run that have none left: those that were given up, and those whose job is gone.
func (t *target) revive(ctx context.Context, tx pgx.Tx) error {
	return t.repeat(ctx, tx, "b.state = 'failed' or b.state = 'waiting' and not exists (select from "+quote(jobsSchema, "river_job")+
		" j where j.id = b.job and j.state not in ('completed', 'cancelled', 'discarded'))")
}

// repeat has some batches of the run done again. condition is ours and speaks of b.
func (t *target) repeat(ctx context.Context, tx pgx.Tx, condition string, parameters ...any) error {
	rows, err := tx.Query(ctx, "select b.batch from "+t.batches.quoted()+" b where b.run = $1 and ("+condition+") order by b.batch for update", append([]any{t.run}, parameters...)...)
	if err != nil {
		return err
	}
	numbers, err := pgx.CollectRows(rows, pgx.RowTo[int64])
	if err != nil || len(numbers) == 0 {
		return err
	}
	jobs, err := t.enqueue(ctx, tx, numbers)
	if err != nil {
		return err
	}
	_, err = tx.Exec(ctx, "update "+t.batches.quoted()+" b set state = 'waiting', error = null, job = n.job from (select unnest($2::bigint[]) as batch, unnest($3::bigint[]) as job) n where b.run = $1 and b.batch = n.batch",
		t.run, numbers, jobs)
	return err
}

func (t *target) Join(ctx context.Context, layout *store.Layout, start store.Start) (store.State, error) {
	if err := t.Check(ctx, layout); err != nil {
		return store.State{}, err
	}
	var open *earlierRun
	err := again(ctx, func() error {
		return pgx.BeginFunc(ctx, t.pool, func(tx pgx.Tx) error {
			var there bool
			err := tx.QueryRow(ctx, "select to_regclass($1) is not null and to_regclass($2) is not null", t.runs.quoted(), t.batches.quoted()).Scan(&there)
			if err != nil || !there {
				return err
			}
			open, err = t.earlier(ctx, tx, "order by number desc limit 1")
			return err
		})
	})
	switch {
	case err != nil:
		return store.State{}, err
	case open == nil || open.finished || !open.shared || start.Run != "" && open.run != start.Run:
		return store.State{}, store.ErrNoRun
	case open.layout != t.layout.Hash || open.engineVersion != start.EngineVersion:
		return store.State{}, &store.Misfit{Detail: fmt.Sprintf("The run %q that is open was begun with another mapping or another version of the engine; its processes must have the same.", open.run)}
	}
	if err := t.migrate(ctx); err != nil {
		return store.State{}, err
	}
	t.run = open.run
	return store.State{Run: open.run, Resumed: true, Counts: open.counts, Fresh: open.fresh}, nil
}
