package postgres

import (
	"context"
	"errors"
	"fmt"
	"hash/fnv"
	"os"
	"sync"
	"time"

	"github.com/jackc/pgx/v5"
	"github.com/riverqueue/river"
	"github.com/riverqueue/river/riverdriver/riverpgxv5"
	"github.com/riverqueue/river/rivertype"

	"leat/cmd/internal/register/row"
	"leat/cmd/internal/register/store"
)

const (
	// A job whose process gave no sign of life for stuckAfter is taken up again; the library looks every 30 s, so that it is done within a minute.
	stuckAfter = 15 * time.Second
	// signEvery is how often a process gives a sign of life for each of its jobs. A job may therefore take as long as it needs.
	signEvery = 4 * time.Second
	// lookEvery is how often the table of batches is looked at.
	lookEvery = 250 * time.Millisecond
)

// queue is that of a run: processes take batches of their own run only.
func (t *target) queue(run string) string {
	hash := fnv.New64a()
	hash.Write([]byte(t.results.quoted() + " " + run))
	return fmt.Sprintf("register_%016x", hash.Sum64())
}

// A hand does one batch at a time.
type hand struct {
	process store.Process
	writer  *writer
	batch   store.Batch
}

// crew is the worker that the library hands jobs to.
type crew struct {
	river.WorkerDefaults[batchJob]
	target *target
	stop   context.Context // done when batches are to be left
	hands  chan *hand
	name   string

	mutex sync.Mutex
	jobs  map[int64]bool // in hand
}

// NextRetry tries again soon: what fails is mostly the way to the database.
func (c *crew) NextRetry(job *river.Job[batchJob]) time.Time {
	return time.Now().Add(time.Duration(job.Attempt) * time.Second)
}

// Work does a batch.
func (c *crew) Work(ctx context.Context, job *river.Job[batchJob]) error {
	h := <-c.hands
	defer func() { c.hands <- h }()
	c.hold(job.ID, true)
	defer c.hold(job.ID, false)
	// The library's time limit is that of stuckAfter, for which our signs of life stand in.
	ctx, cancel := context.WithCancel(context.WithoutCancel(ctx))
	defer cancel()
	defer context.AfterFunc(c.stop, cancel)()
	err := c.do(ctx, h, job)
	if err != nil && c.stop.Err() != nil {
		return river.JobSnooze(0) // left for others, without counting as an attempt
	}
	return err
}

func (c *crew) hold(job int64, in bool) {
	c.mutex.Lock()
	defer c.mutex.Unlock()
	if in {
		c.jobs[job] = true
	} else {
		delete(c.jobs, job)
	}
}

// held returns the jobs in hand.
func (c *crew) held() (jobs []int64) {
	c.mutex.Lock()
	defer c.mutex.Unlock()
	for job := range c.jobs {
		jobs = append(jobs, job)
	}
	return jobs
}

func (c *crew) do(ctx context.Context, h *hand, job *river.Job[batchJob]) error {
	t := c.target
	var after, until *string
	var state string
	err := again(ctx, func() error {
		return t.pool.QueryRow(ctx, "select after, until, state from "+t.batches.quoted()+" where run = $1 and batch = $2", job.Args.Run, job.Args.Batch).Scan(&after, &until, &state)
	})
	switch {
	case errors.Is(err, pgx.ErrNoRows), err == nil && state != "waiting":
		return river.JobCancel(fmt.Errorf("batch %d of run %q is not to be done", job.Args.Batch, job.Args.Run))
	case err != nil:
		return err
	}
	bound := func(text *string) (row.Value, error) {
		if text == nil {
			return row.Value{}, nil
		}
		return t.key(*text)
	}
	from, err := bound(after)
	if err != nil {
		return err
	}
	to, err := bound(until)
	if err != nil {
		return err
	}
	if err := h.process(ctx, from, to, &h.batch); err != nil {
		return err
	}
	attempt := 0
	return again(ctx, func() error {
		attempt++
		if err := h.writer.ready(ctx); err != nil {
			return err
		}
		err := c.commit(ctx, h, job, attempt > 1)
		if err != nil && passing(err) {
			h.writer.close()
		}
		return err
	})
}

// commit writes the results of a batch and completes its job, both or neither.
func (c *crew) commit(ctx context.Context, h *hand, job *river.Job[batchJob], repeated bool) error {
	t := c.target
	if repeated {
		// The connection was lost before it could say what had become of the batch.
		var state string
		err := h.writer.connection.QueryRow(ctx, "select state from "+t.batches.quoted()+" where run = $1 and batch = $2 and job = $3", job.Args.Run, job.Args.Batch, job.ID).Scan(&state)
		if err != nil || state == "done" {
			return err
		}
	}
	return pgx.BeginFunc(ctx, h.writer.connection, func(tx pgx.Tx) error {
		// First, so that of two processes that hold the same job the second waits here and finds it done.
		if _, err := river.JobCompleteTx[*riverpgxv5.Driver](ctx, tx, job); err != nil {
			if errors.Is(err, rivertype.ErrNotFound) {
				return fmt.Errorf("another process has taken batch %d over", job.Args.Batch)
			}
			return err
		}
		sets := countColumns(func(i int, quoted string) string { return fmt.Sprintf("%s = %s + $%d", quoted, quoted, i+5) })
		tag, err := tx.Exec(ctx, "update "+t.batches.quoted()+" set state = 'done', done_at = clock_timestamp(), worker = $4, "+sets+" where run = $1 and batch = $2 and job = $3 and state = 'waiting'",
			append([]any{job.Args.Run, job.Args.Batch, job.ID, c.name}, countValues(&h.batch.Counts)...)...)
		if err != nil {
			return err
		}
		if tag.RowsAffected() != 1 {
			return fmt.Errorf("another process has done batch %d", job.Args.Batch)
		}
		return h.writer.rows(ctx, tx, &h.batch)
	})
}

func (t *target) Work(ctx context.Context, processes []store.Process, progress func(store.Counts)) (total store.Counts, failed int64, err error) {
	host, _ := os.Hostname()
	stop, cancel := context.WithCancel(ctx)
	defer cancel()
	c := &crew{target: t, stop: stop, hands: make(chan *hand, len(processes)), name: fmt.Sprintf("%s %d", host, os.Getpid()), jobs: map[int64]bool{}}
	for _, process := range processes {
		h := &hand{process: process, writer: &writer{target: t, shared: true}}
		defer h.writer.close()
		c.hands <- h
	}
	workers := river.NewWorkers()
	if err := river.AddWorkerSafely(workers, c); err != nil {
		return total, 0, err
	}
	client, err := river.NewClient(riverpgxv5.New(t.pool), &river.Config{
		Schema: jobsSchema, Logger: quiet, Workers: workers,
		Queues:        map[string]river.QueueConfig{t.queue(t.run): {MaxWorkers: len(processes)}},
		FetchCooldown: 5 * time.Millisecond, FetchPollInterval: 100 * time.Millisecond,
		JobTimeout: stuckAfter, RescueStuckJobsAfter: stuckAfter, MaxAttempts: attempts,
	})
	if err != nil {
		return total, 0, err
	}
	if err := again(ctx, func() error { return client.Start(context.WithoutCancel(ctx)) }); err != nil {
		return total, 0, fmt.Errorf("taking part in the run: %w", err)
	}
	signs := make(chan struct{})
	go func() {
		defer close(signs)
		c.signs(stop)
	}()
	total, failed, err = t.watch(ctx, progress)
	cancel() // batches that are still in hand are left to others
	<-signs
	ended, end := context.WithTimeout(context.WithoutCancel(ctx), 30*time.Second)
	defer end()
	if stopped := client.StopAndCancel(ended); stopped != nil && err == nil {
		err = fmt.Errorf("leaving the run: %w", stopped)
	}
	return total, failed, err
}

// signs gives signs of life for the jobs in hand until ctx is done.
func (c *crew) signs(ctx context.Context) {
	for {
		select {
		case <-ctx.Done():
			return
		case <-time.After(signEvery):
		}
		if jobs := c.held(); len(jobs) > 0 {
			// Where this fails the database is away, and the next sign may come through; at worst a batch is done twice and committed once.
			_, _ = c.target.pool.Exec(ctx, "update "+quote(jobsSchema, "river_job")+" set attempted_at = now() where id = any($1::bigint[]) and state = 'running'", jobs)
		}
	}
}

// watch waits until the run has no batch left, and finishes it then.
func (t *target) watch(ctx context.Context, progress func(store.Counts)) (total store.Counts, failed int64, err error) {
	var known int64 = -1
	for {
		var waiting int64
		var newer bool
		err := again(ctx, func() error {
			if err := t.giveUp(ctx); err != nil {
				return err
			}
			return t.pool.QueryRow(ctx, "select count(*) filter (where state = 'waiting'), count(*) filter (where state = 'failed'), "+
				"exists (select from "+t.runs.quoted()+" where number > (select number from "+t.runs.quoted()+" where run = $1)), "+
				countColumns(func(_ int, quoted string) string { return "coalesce(sum(" + quoted + "), 0)::bigint" })+" from "+t.batches.quoted()+" where run = $1", t.run).
				Scan(append([]any{&waiting, &failed, &newer}, countPlaces(&total)...)...)
		})
		if err != nil {
			return total, failed, fmt.Errorf("reading the table %s: %w", t.batches, err)
		}
		if newer {
			return total, failed, fmt.Errorf("a newer run than %q was begun", t.run)
		}
		if total.Read != known && progress != nil {
			known = total.Read
			progress(total)
		}
		if waiting == 0 {
			ended := failed > 0 // the run stays open: begun again, it tries those batches again
			if !ended {
				if err := t.indexGeometries(ctx); err != nil {
					return total, failed, err
				}
				err = again(ctx, func() error {
					return t.inTransaction(ctx, func(tx pgx.Tx) (err error) { ended, err = t.end(ctx, tx); return err })
				})
			}
			if err != nil || ended {
				return total, failed, err
			}
		}
		select {
		case <-ctx.Done():
			return total, failed, context.Cause(ctx)
		case <-time.After(lookEvery):
		}
	}
}

// giveUp marks the batches whose jobs were given up, with the reason.
func (t *target) giveUp(ctx context.Context) error {
	_, err := t.pool.Exec(ctx, "update "+t.batches.quoted()+" b set state = 'failed', done_at = now(), error = coalesce(j.errors[array_upper(j.errors, 1)] ->> 'error', 'The job was given up.') from "+
		quote(jobsSchema, "river_job")+" j where b.run = $1 and b.state = 'waiting' and j.id = b.job and j.state in ('cancelled', 'discarded')", t.run)
	return err
}

// end finishes the run, unless it was gone on with: then the batches from before are done once more, since their rows may have changed meanwhile.
func (t *target) end(ctx context.Context, tx pgx.Tx) (ended bool, err error) {
	var finished bool
	var resumed *time.Time
	if err := tx.QueryRow(ctx, "select finished_at is not null, resumed_at from "+t.runs.quoted()+" where run = $1 for update", t.run).Scan(&finished, &resumed); err != nil {
		return false, err
	}
	if finished {
		return true, nil
	}
	if resumed != nil {
		if _, err := tx.Exec(ctx, "update "+t.runs.quoted()+" set resumed_at = null where run = $1", t.run); err != nil {
			return false, err
		}
		return false, t.repeat(ctx, tx, "b.state = 'done' and b.done_at < $2", *resumed)
	}
	sums := countColumns(func(_ int, quoted string) string { return "coalesce(sum(" + quoted + "), 0)::bigint as " + quoted })
	sets := countColumns(func(_ int, quoted string) string { return quoted + " = s." + quoted })
	tag, err := tx.Exec(ctx, "update "+t.runs.quoted()+" r set finished_at = now(), batches = s.batches, "+sets+" from (select count(*) as batches, count(*) filter (where state <> 'done') as open, "+sums+" from "+t.batches.quoted()+
		" where run = $1) s where r.run = $1 and s.open = 0", t.run)
	if err != nil {
		return false, err
	}
	return tag.RowsAffected() == 1, nil
}
