package register

import (
	"context"
	"errors"
	"fmt"
	"runtime"
	"time"

	"leat/cmd/internal/register/mapping"
	"leat/cmd/internal/register/run"
	"leat/cmd/internal/register/store"
)

// share begins or joins a run that several processes work on.
func (c *command) share(ctx context.Context, file *mapping.File, source store.Source, target store.Target, job *run.Job) (Outcome, error) {
	sharing, ok := target.(store.Sharing)
	if !ok || !source.Ordered() {
		return Failed, file.Place("target", &store.Misfit{Field: "format", Detail: "A run can be shared among processes only where both the register and the results are tables of PostgreSQL."})
	}
	start := job.Start(time.Now())
	var state store.State
	var err error
	if c.name == "run" {
		state, err = sharing.Share(ctx, job.Layout(), start, source, job.Query(), c.options.Rows)
	} else {
		state, err = sharing.Join(ctx, job.Layout(), start)
	}
	if errors.Is(err, store.ErrNoRun) {
		return Failed, errors.New("no run is open to join; begin one with leat register run --shared")
	}
	if err != nil {
		return Failed, placed(file, "target", err)
	}
	c.options.Begun(state)
	workers := c.options.Workers
	if workers == 0 {
		workers = runtime.GOMAXPROCS(0)
	}
	progress := func(store.Counts) {}
	if c.options.Progress != nil {
		all, err := source.Count(ctx, job.Query())
		if err != nil {
			return Failed, err
		}
		progress = func(counts store.Counts) { c.options.Progress(&run.Progress{Counts: counts, Total: all}) }
	}
	began := time.Now()
	total, failed, err := sharing.Work(ctx, job.Processes(target, state, workers), progress)
	if err != nil {
		return Failed, err
	}
	c.summarize(file, &run.Report{Run: state.Run, Resumed: state.Resumed, Counts: total, Took: time.Since(began)})
	if failed > 0 {
		return Failed, fmt.Errorf("%d batches failed for good; the table of failed batches says why", failed)
	}
	if total.Bad > 0 {
		return Problems, nil
	}
	return Done, nil
}
