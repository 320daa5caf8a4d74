package postgres

import (
	"context"
	"errors"
	"fmt"
	"io"
	"strconv"
	"strings"
	"time"

	"github.com/jackc/pgx/v5"

	"leat/cmd/internal/register/row"
	"leat/cmd/internal/register/store"
)

// lockSpace keeps our advisory locks apart from those of others: "leat" in ASCII.
const lockSpace = 0x6c656174

// staging is the table of a connection that new results come to before they replace the old.
const staging = `pg_temp."leat_staging"`

// errTaken says that this process may no longer write.
var errTaken = errors.New("another process has taken this run over")

// writer is the connection that batches are committed on. It has a staging table and holds the lock of the results.
type writer struct {
	target     *target
	shared     bool // hold the lock together with others
	connection *pgx.Conn
	buffer     copyBuffer
}

func (w *writer) close() {
	if w.connection != nil {
		ctx, cancel := context.WithTimeout(context.Background(), time.Second)
		defer cancel()
		_ = w.connection.Close(ctx) // whatever it says, the lock and the staging table are gone with it
		w.connection = nil
	}
}

// lockPatience is how long a process that was killed may take to be gone.
const lockPatience = 30 * time.Second

// ready makes a connection ready unless one is.
func (w *writer) ready(ctx context.Context) error {
	if w.connection != nil && !w.connection.IsClosed() {
		return nil
	}
	w.close()
	t := w.target
	connection, err := pgx.ConnectConfig(ctx, t.pool.Config().ConnConfig)
	if err != nil {
		return err
	}
	w.connection = connection
	if err := w.prepare(ctx); err != nil {
		w.close()
		return err
	}
	return nil
}

func (w *writer) prepare(ctx context.Context) error {
	t := w.target
	lock := "select pg_try_advisory_lock($1::int4, hashtext($2::text))"
	if w.shared {
		lock = strings.Replace(lock, "lock(", "lock_shared(", 1)
	}
	for since := time.Now(); ; {
		var held bool
		// Another word than that of inTransaction: this lock is held for long.
		if err := w.connection.QueryRow(ctx, lock, lockSpace, "writing "+t.results.quoted()).Scan(&held); err != nil {
			return err
		}
		if held {
			break
		}
		if time.Since(since) > lockPatience {
			return &store.Misfit{Field: "table", Detail: fmt.Sprintf("Another run is writing to %s. This one was not begun; it can be once the other is finished.", t.results)}
		}
		select {
		case <-ctx.Done():
			return ctx.Err()
		case <-time.After(200 * time.Millisecond):
		}
	}
	lines := make([]string, len(t.columns))
	for i, column := range t.columns {
		lines[i] = quote(column.name) + " " + t.typeOf(&t.layout.Columns[i])
	}
	_, err := w.connection.Exec(ctx, "create temporary table "+strings.TrimPrefix(staging, "pg_temp.")+" ("+strings.Join(lines, ", ")+") on commit delete rows")
	return err
}

func (t *target) Commit(ctx context.Context, batch *store.Batch) error {
	w := t.write
	attempt := 0
	err := again(ctx, func() error {
		attempt++
		if err := w.ready(ctx); err != nil {
			return err
		}
		err := w.once(ctx, batch, attempt > 1)
		if err != nil && w.connection != nil && passing(err) {
			w.close() // a new one finds out what has become of the batch
		}
		return err
	})
	if err != nil {
		return fmt.Errorf("writing to %s: %w", t.results, err)
	}
	t.count++
	return nil
}

// once tries to commit a batch. With repeated it may have been committed already, by a connection that was lost before it could say so.
func (w *writer) once(ctx context.Context, batch *store.Batch, repeated bool) error {
	t := w.target
	if repeated {
		var count int64
		err := w.connection.QueryRow(ctx, "select batches from "+t.runs.quoted()+" where run = $1 and owner = $2", t.run, t.owner).Scan(&count)
		switch {
		case errors.Is(err, pgx.ErrNoRows):
			return errTaken
		case err != nil:
			return err
		case count == t.count+1:
			return nil
		}
	}
	return pgx.BeginFunc(ctx, w.connection, func(tx pgx.Tx) error {
		parameters := append([]any{t.run, t.owner, t.count}, countValues(&batch.Counts)...)
		sets := countColumns(func(i int, quoted string) string { return quoted + " = " + quoted + " + $" + strconv.Itoa(i+4) })
		if !batch.Mark.IsNull() {
			parameters = append(parameters, batch.Mark.String())
			sets += ", mark = $" + strconv.Itoa(len(parameters))
		}
		// Whoever has taken the run over waits here for us, or we find ourselves passed by.
		tag, err := tx.Exec(ctx, "update "+t.runs.quoted()+" set batches = batches + 1, "+sets+" where run = $1 and owner = $2 and batches = $3 and finished_at is null", parameters...)
		if err != nil {
			return err
		}
		if tag.RowsAffected() != 1 {
			return errTaken
		}
		return w.rows(ctx, tx, batch)
	})
}

// rows writes what a batch holds.
func (w *writer) rows(ctx context.Context, tx pgx.Tx, batch *store.Batch) error {
	t := w.target
	if err := w.results(ctx, tx, batch); err != nil {
		return err
	}
	if len(batch.Gone) > 0 {
		var c clause
		c.conditions = append(c.conditions, c.among(quote(t.layout.Columns[0].Name), t.keyKind, batch.Gone))
		if _, err := tx.Exec(ctx, "delete from "+t.results.quoted()+c.where(), c.parameters...); err != nil {
			return err
		}
	}
	var c clause
	order := `"asset"`
	if t.order != quote(t.layout.Columns[0].Name) {
		order += ` collate "C"`
	}
	t.stretch(&c, order, &batch.Stretch)
	if _, err := tx.Exec(ctx, "delete from "+t.problems.quoted()+c.where(), c.parameters...); err != nil {
		return err
	}
	if len(batch.Problems) == 0 {
		return nil
	}
	w.buffer.reset()
	for i := range batch.Problems {
		if err := w.problem(&batch.Problems[i]); err != nil {
			return err
		}
	}
	return w.copy(ctx, tx, t.problems.quoted(), t.problem)
}

func (w *writer) problem(p *store.Problem) error {
	t := w.target
	w.buffer.begin(len(t.problem))
	w.buffer.string(t.run)
	if t.keyKind == row.Int && p.Asset.Kind != row.Int {
		w.buffer.null() // a row without a key
	} else if err := w.buffer.add(&t.problem[1], p.Asset); err != nil {
		return err
	}
	if p.Line > 0 {
		w.buffer.int(p.Line)
	} else {
		w.buffer.null()
	}
	for _, text := range []string{p.Column, p.Pointer} {
		if text == "" {
			w.buffer.null()
		} else {
			w.buffer.string(text)
		}
	}
	w.buffer.string(p.Code)
	w.buffer.string(p.Text)
	return nil
}

// results writes the results. Where none is stored for the stretch there is nothing that they could replace, and they need no staging.
func (w *writer) results(ctx context.Context, tx pgx.Tx, batch *store.Batch) error {
	if len(batch.Results) == 0 {
		return nil
	}
	t := w.target
	w.buffer.reset()
	for _, values := range batch.Results {
		if err := w.buffer.row(t.columns, values); err != nil {
			return err
		}
	}
	var c clause
	t.stretch(&c, t.order, &batch.Stretch)
	var any bool
	if err := tx.QueryRow(ctx, "select exists (select from "+t.results.quoted()+c.where()+")", c.parameters...).Scan(&any); err != nil {
		return err
	}
	if !any {
		return w.copy(ctx, tx, t.results.quoted(), t.columns)
	}
	if err := w.copy(ctx, tx, staging, t.columns); err != nil {
		return err
	}
	_, err := tx.Exec(ctx, t.upsert)
	return err
}

// copy sends the buffer's rows to a table.
func (w *writer) copy(ctx context.Context, tx pgx.Tx, to string, columns []copyColumn) error {
	names := make([]string, len(columns))
	for i, column := range columns {
		names[i] = quote(column.name)
	}
	_, err := tx.Conn().PgConn().CopyFrom(ctx, io.Reader(w.buffer.rows()), "copy "+to+" ("+strings.Join(names, ", ")+") from stdin (format binary)")
	return err
}
