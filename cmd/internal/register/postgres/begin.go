package postgres

import (
	"context"
	"crypto/rand"
	"errors"
	"fmt"
	"strconv"

	"github.com/jackc/pgx/v5"

	"leat/cmd/internal/register/row"
	"leat/cmd/internal/register/store"
)

func (t *target) Begin(ctx context.Context, layout *store.Layout, start store.Start) (store.State, error) {
	if err := t.Check(ctx, layout); err != nil {
		return store.State{}, err
	}
	t.owner = rand.Text()
	t.write = &writer{target: t}
	// From here on nobody else writes; a process that was killed may take a moment to be gone.
	if err := again(ctx, func() error { return t.write.ready(ctx) }); err != nil {
		return store.State{}, err
	}
	var state store.State
	err := again(ctx, func() error {
		return t.inTransaction(ctx, func(tx pgx.Tx) error {
			if err := t.create(ctx, tx, false); err != nil {
				return err
			}
			var err error
			state, err = t.begin(ctx, tx, start, false)
			return err
		})
	})
	return state, err
}

// inTransaction does what belongs together, one process at a time.
func (t *target) inTransaction(ctx context.Context, do func(tx pgx.Tx) error) error {
	return pgx.BeginFunc(ctx, t.pool, func(tx pgx.Tx) error {
		// Tables cannot be created twice at a time, nor runs.
		if _, err := tx.Exec(ctx, "select pg_advisory_xact_lock($1::int4, hashtext($2::text))", lockSpace, t.results.quoted()); err != nil {
			return err
		}
		return do(tx)
	})
}

// An earlierRun is a row of the table of runs.
type earlierRun struct {
	run, layout, engineVersion string
	finished, fresh, shared    bool
	mark                       *string
	batches                    int64
	counts                     store.Counts
}

func (t *target) earlier(ctx context.Context, tx pgx.Tx, condition string, parameters ...any) (*earlierRun, error) {
	var e earlierRun
	places := append([]any{&e.run, &e.layout, &e.engineVersion, &e.finished, &e.fresh, &e.shared, &e.mark, &e.batches}, countPlaces(&e.counts)...)
	err := tx.QueryRow(ctx, "select run, layout, engine_version, finished_at is not null, fresh, shared, mark, batches, "+countColumns(func(_ int, quoted string) string { return quoted })+
		" from "+t.runs.quoted()+" "+condition, parameters...).Scan(places...)
	if errors.Is(err, pgx.ErrNoRows) {
		return nil, nil
	}
	if err != nil {
		return nil, fmt.Errorf("reading the table %s: %w", t.runs, err)
	}
	return &e, nil
}

// begin finds the run to go on with, or makes a new one.
func (t *target) begin(ctx context.Context, tx pgx.Tx, start store.Start, shared bool) (store.State, error) {
	same := func(e *earlierRun) bool { return e.layout == t.layout.Hash && e.engineVersion == start.EngineVersion }
	newest, err := t.earlier(ctx, tx, "order by number desc limit 1")
	if err != nil {
		return store.State{}, err
	}
	resumed := newest
	if start.Run != "" {
		if resumed, err = t.earlier(ctx, tx, "where run = $1", start.Run); err != nil {
			return store.State{}, err
		}
		switch {
		case resumed == nil:
		case resumed.finished:
			return store.State{}, &store.Misfit{Field: "run", Detail: fmt.Sprintf("The run %q is finished; a new run needs a name of its own, or none.", start.Run)}
		case !same(resumed) || resumed.run != newest.run:
			return store.State{}, &store.Misfit{Field: "run", Detail: fmt.Sprintf("The run %q cannot be gone on with: since it stopped the mapping or the version has changed, or another run was begun.", start.Run)}
		case resumed.shared != shared:
			return store.State{}, &store.Misfit{Field: "run", Detail: fmt.Sprintf("The run %q was begun %s, and can only be gone on with so.", start.Run, map[bool]string{true: "with several processes", false: "with one process"}[resumed.shared])}
		}
	} else if resumed != nil && (resumed.finished || !same(resumed) || resumed.shared != shared) {
		resumed = nil
	}
	if resumed != nil {
		if _, err := tx.Exec(ctx, "update "+t.runs.quoted()+" set owner = $1, resumed_at = now() where run = $2", t.owner, resumed.run); err != nil {
			return store.State{}, fmt.Errorf("writing the table %s: %w", t.runs, err)
		}
		t.run, t.count = resumed.run, resumed.batches
		state := store.State{Run: resumed.run, Resumed: true, Counts: resumed.counts, Fresh: resumed.fresh}
		if resumed.mark != nil {
			if state.Mark, err = t.key(*resumed.mark); err != nil {
				return store.State{}, err
			}
		}
		return state, nil
	}
	state := store.State{Run: start.Run}
	if state.Run == "" {
		state.Run = start.New
	}
	// A fresh run that was left unfinished leaves a mixture.
	state.Fresh = newest == nil || !same(newest) || newest.fresh && !newest.finished
	if newest == nil {
		var any bool
		if err := tx.QueryRow(ctx, "select exists (select from "+t.results.quoted()+")").Scan(&any); err != nil {
			return store.State{}, err
		}
		state.Fresh = any // results of runs whose account somebody has removed
	}
	_, err = tx.Exec(ctx, "insert into "+t.runs.quoted()+" (run, started_at, layout, engine_version, mapping, fresh, shared, owner) values ($1, $2, $3, $4, $5, $6, $7, $8)",
		state.Run, start.At, t.layout.Hash, start.EngineVersion, start.Mapping, state.Fresh, shared, t.owner)
	if err != nil {
		return store.State{}, fmt.Errorf("writing the table %s: %w", t.runs, err)
	}
	// Problems of rows without a key belong to no stretch.
	if _, err := tx.Exec(ctx, "delete from "+t.problems.quoted()+" where asset is null"); err != nil {
		return store.State{}, fmt.Errorf("writing the table %s: %w", t.problems, err)
	}
	t.run, t.count = state.Run, 0
	return state, nil
}

// key reads a key as the table of runs holds it.
func (t *target) key(text string) (row.Value, error) {
	if t.keyKind != row.Int {
		return row.OfString(text), nil
	}
	number, err := strconv.ParseInt(text, 10, 64)
	if err != nil {
		return row.Value{}, fmt.Errorf("the table %s has the key %q where a whole number is expected", t.runs, text)
	}
	return row.OfInt(number), nil
}

func (t *target) Finish(ctx context.Context, summary *store.Summary) error {
	sets := countColumns(func(i int, quoted string) string { return quoted + " = $" + strconv.Itoa(i+4) })
	if err := t.indexGeometries(ctx); err != nil {
		return err
	}
	return again(ctx, func() error {
		tag, err := t.pool.Exec(ctx, "update "+t.runs.quoted()+" set finished_at = $1, "+sets+" where run = $2 and owner = $3",
			append([]any{summary.Finished, t.run, t.owner}, countValues(&summary.Counts)...)...)
		if err != nil {
			return fmt.Errorf("writing the table %s: %w", t.runs, err)
		}
		if tag.RowsAffected() != 1 {
			return errTaken
		}
		return nil
	})
}
