package run

import (
	"context"
	"errors"
	"fmt"
	"io"
	"runtime/debug"
	"sync"

	"leat/cmd/internal/register/row"
	"leat/cmd/internal/register/store"
)

// A pipeline takes a stretch of the register from the source to the target: reading, looking up what is stored, solving on all
// workers and writing go on at the same time, each with a page of its own; pages are written in the order in which they were read.
// The number of pages on their way is fixed, so that memory does not grow with the register.
type pipeline struct {
	*plan
	source store.Source
	target store.Target // nil: nothing is looked up or written
	mode   mode
	query  store.Query
	rows   int // of a page
	skip   bool
	mark   bool // batches set the run's mark
	id     *identity

	workers []*worker
	tasks   []*task // as many as may be on their way

	// written is told of each page after it was committed, in order.
	written func(*task)
}

// tasksFor is the number of pages on their way: one at each stage, and one more for each worker so that none waits.
func tasksFor(workers int) int { return workers + 3 }

// run takes all rows of the query. It returns when all its goroutines have ended.
func (p *pipeline) run(ctx context.Context) error {
	ctx, stop := context.WithCancelCause(ctx)
	defer stop(nil)
	reader, err := p.source.Read(ctx, &p.query)
	if err != nil {
		return err
	}
	defer reader.Close()

	free := make(chan *task, len(p.tasks))
	read := make(chan *task, len(p.tasks))
	work := make(chan *task, len(p.tasks))
	ordered := make(chan *task, len(p.tasks))
	for _, t := range p.tasks {
		free <- t
	}
	var parts sync.WaitGroup
	part := func(f func() error) {
		parts.Go(func() {
			defer func() {
				if v := recover(); v != nil {
					stop(fmt.Errorf("panic: %v\n%s", v, debug.Stack()))
				}
			}()
			if err := f(); err != nil {
				stop(err)
			}
		})
	}
	part(func() error { defer close(read); return p.read(ctx, reader, free, read) })
	part(func() error { defer close(work); defer close(ordered); return p.lookUp(ctx, read, work, ordered) })
	for _, w := range p.workers {
		part(func() error {
			for t := range work {
				err := w.work(ctx, t, p.id)
				if err != nil {
					stop(err)
				}
				t.done <- struct{}{}
			}
			return nil
		})
	}
	part(func() error { return p.write(ctx, ordered, free) })
	parts.Wait()
	return context.Cause(ctx)
}

// read fills pages.
func (p *pipeline) read(ctx context.Context, reader store.Reader, free <-chan *task, read chan<- *task) error {
	after := p.query.After
	for {
		var t *task
		select {
		case t = <-free:
		case <-ctx.Done():
			return nil
		}
		err := reader.Next(ctx, &t.page, p.rows)
		end := errors.Is(err, io.EOF)
		if err != nil && !end {
			return err
		}
		t.faults = append(t.faults[:0], reader.Faults()...)
		until := p.query.Until
		if !end {
			until = t.page.Row(t.page.Rows() - 1)[0]
		}
		// The end is a stretch too: what is stored beyond the last row is of assets that are gone.
		t.stretch(p.layout.Columns[0].Kind, p.source.Ordered(), after, until)
		after = until.Clone()
		t.skip = p.skip
		if p.mark && !end {
			t.batch.Mark = t.batch.Stretch.Until
		}
		select {
		case read <- t:
		case <-ctx.Done():
			return nil
		}
		if end {
			return nil
		}
	}
}

// lookUp asks the target for what is stored for each page.
func (p *pipeline) lookUp(ctx context.Context, read <-chan *task, work, ordered chan<- *task) error {
	for t := range read {
		if p.target != nil && p.mode == computing && (t.batch.Stretch.Ordered || len(t.keys) > 0) {
			err := p.target.Stored(ctx, &t.batch.Stretch, func(key row.Value, stored store.Stored) { t.known.add(key, stored) })
			if err != nil {
				return err
			}
		}
		work <- t
		ordered <- t
	}
	return nil
}

// write commits pages in order.
func (p *pipeline) write(ctx context.Context, ordered <-chan *task, free chan<- *task) error {
	for t := range ordered {
		select {
		case <-t.done:
		case <-ctx.Done():
			return nil
		}
		if ctx.Err() != nil {
			return nil
		}
		if p.target != nil && p.mode == computing {
			if err := p.target.Commit(ctx, &t.batch); err != nil {
				return err
			}
		}
		p.written(t)
		free <- t
	}
	return nil
}
