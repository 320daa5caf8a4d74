package geopackage

import (
	"context"
	"errors"
	"fmt"
	"io/fs"
	"os"
	"path/filepath"
	"strings"
	"time"

	"zombiezen.com/go/sqlite"

	"leat/cmd/internal/geopackage"
	"leat/cmd/internal/register/store"
)

// A target is a table of results in a GeoPackage, with its tables of problems and of runs beside it. Commit and Stored have a connection each, so that they
// can be called at the same time.
type target struct {
	spec   *store.TargetSpec
	names  names
	exists bool // the file did, when it was opened

	layout  *store.Layout
	run     string
	writing *geopackage.File
	reading *geopackage.File
	journal string // the mode that the file had before
	sql     statements
}

// OpenTarget looks at the file that a specification names, without changing it. A file that does not exist is made when a run begins.
func OpenTarget(ctx context.Context, spec *store.TargetSpec) (store.Target, error) {
	t := &target{spec: spec, names: namesOf(spec)}
	if err := geopackage.CheckName(t.names.results); err != nil {
		return nil, misfit("table", err)
	}
	if err := geopackage.CheckName(t.names.problems); err != nil {
		return nil, misfit("problems", err)
	}
	if strings.EqualFold(t.names.problems, t.names.results) || strings.EqualFold(t.names.problems, t.names.runs) {
		return nil, &store.Misfit{Field: "problems", Detail: fmt.Sprintf("The table of problems cannot be %s, which holds something else.", t.names.problems)}
	}
	_, err := os.Stat(spec.Path)
	switch {
	case errors.Is(err, fs.ErrNotExist):
		if info, err := os.Stat(filepath.Dir(spec.Path)); err != nil || !info.IsDir() {
			return nil, &store.Misfit{Field: "path", Detail: fmt.Sprintf("There is no folder %s to put the file into.", filepath.Dir(spec.Path))}
		}
		return t, nil
	case err != nil:
		return nil, misfit("path", err)
	}
	t.exists = true
	f, err := geopackage.Open(ctx, spec.Path, geopackage.Write)
	if err != nil {
		return nil, misfit("path", err)
	}
	return t, f.Close()
}

func (t *target) Check(ctx context.Context, layout *store.Layout) error {
	plan, err := t.names.plan(layout)
	if err != nil {
		return err
	}
	if !t.exists {
		return nil
	}
	f, err := geopackage.Open(ctx, t.spec.Path, geopackage.Read)
	if err != nil {
		return err
	}
	return errors.Join(plan.check(f), f.Close())
}

func (t *target) Begin(ctx context.Context, layout *store.Layout, start store.Start) (store.State, error) {
	plan, err := t.names.plan(layout)
	if err != nil {
		return store.State{}, err
	}
	t.layout, t.sql = layout, plan.statements()
	if err := t.openToWrite(ctx); err != nil {
		return store.State{}, err
	}
	var state store.State
	err = t.writing.Within(func() error {
		if err := plan.check(t.writing); err != nil {
			return err
		}
		if err := plan.make(t.writing, start.At); err != nil {
			return err
		}
		var err error
		state, err = t.begin(start)
		return err
	})
	if err != nil {
		return store.State{}, err
	}
	t.run = state.Run
	t.reading, err = geopackage.Open(ctx, t.spec.Path, geopackage.Read)
	return state, err
}

// openToWrite opens or makes the file and puts it into WAL mode, so that programs that read it do not stop the run, nor the run them.
func (t *target) openToWrite(ctx context.Context) error {
	var err error
	if _, missing := os.Stat(t.spec.Path); errors.Is(missing, fs.ErrNotExist) {
		t.writing, err = geopackage.Create(ctx, t.spec.Path)
	} else {
		t.writing, err = geopackage.Open(ctx, t.spec.Path, geopackage.Write)
	}
	if err != nil {
		return err
	}
	if err := t.writing.Within(func() error { return nil }); err != nil { // tells a file that cannot be written to from one that is locked
		return err
	}
	if t.journal, err = t.writing.Text("PRAGMA journal_mode"); err != nil {
		return err
	}
	now, err := t.writing.Text("PRAGMA journal_mode = WAL")
	if err != nil {
		return err
	}
	if now != "wal" {
		return fmt.Errorf("%s cannot be put into SQLite's WAL mode, which a run needs; is it on a network drive? Copy it to a local disk first", t.spec.Path)
	}
	// What was committed survives a killed process in any case; after a loss of power the last batches may be missing, mark and all, and are done again.
	// A statement's own journal (each result has one, for its triggers) in memory is a small piece; beside a file it is 64 KiB taken from the system and given back.
	for _, set := range []string{"PRAGMA synchronous = NORMAL", "PRAGMA wal_autocheckpoint = 8000", "PRAGMA temp_store = MEMORY", "PRAGMA cache_size = -32768"} {
		if err := t.writing.Run(set); err != nil {
			return err
		}
	}
	return nil
}

// begin finds the run to go on with, or enters a new one.
func (t *target) begin(start store.Start) (store.State, error) {
	f, runs := t.writing, geopackage.Quote(t.names.runs)
	type entry struct {
		layout, engine, journal string
		finished, fresh         bool
		state                   store.State
	}
	var newest *entry
	err := f.Rows("SELECT run, layout, engine_version, journal_mode, finished IS NOT NULL, fresh, mark, \"read\", computed, unchanged, bad, removed, problems FROM "+runs+" ORDER BY fid DESC LIMIT 1", func(s *sqlite.Stmt) error {
		newest = &entry{layout: s.ColumnText(1), engine: s.ColumnText(2), journal: s.ColumnText(3), finished: s.ColumnInt(4) != 0, fresh: s.ColumnInt(5) != 0}
		c := store.Counts{Read: s.ColumnInt64(7), Computed: s.ColumnInt64(8), Unchanged: s.ColumnInt64(9), Bad: s.ColumnInt64(10), Removed: s.ColumnInt64(11), Problems: s.ColumnInt64(12)}
		newest.state = store.State{Run: s.ColumnText(0), Resumed: true, Mark: ownValue(s, 6, t.layout.Columns[0].Kind), Counts: c, Fresh: newest.fresh}
		return nil
	})
	if err != nil {
		return store.State{}, err
	}
	same := newest != nil && newest.layout == t.layout.Hash && newest.engine == start.EngineVersion
	if newest != nil && !newest.finished {
		t.journal = newest.journal // the run that did not finish left the file in WAL mode
	}
	if newest != nil && !newest.finished && same && (start.Run == "" || start.Run == newest.state.Run) {
		return newest.state, nil
	}
	run := start.Run
	if run == "" {
		run = start.New
	}
	if n, err := f.Integer("SELECT count(*) FROM "+runs+" WHERE run = ?", run); err != nil {
		return store.State{}, err
	} else if n > 0 {
		return store.State{}, &store.Misfit{Detail: fmt.Sprintf("The run %s in %s is finished, was followed by another one, or was begun with another mapping or version of the engine; a new run needs another name.", run, t.names.runs)}
	}
	state := store.State{Run: run, Fresh: !same || newest.fresh && !newest.finished}
	err = f.Run("INSERT INTO "+runs+" (run, layout, engine_version, mapping, begun, fresh, journal_mode, \"read\", computed, unchanged, bad, removed, problems) VALUES (?, ?, ?, ?, ?, ?, ?, 0, 0, 0, 0, 0, 0)",
		run, t.layout.Hash, start.EngineVersion, start.Mapping, start.At.UTC().Format(timeForm), state.Fresh, t.journal)
	if err != nil {
		return store.State{}, err
	}
	// Problems of rows without a key cannot be found again by a stretch: they are those of the newest run only.
	return state, f.Run("DELETE FROM " + geopackage.Quote(t.names.problems) + " WHERE asset IS NULL")
}

func (t *target) Finish(ctx context.Context, summary *store.Summary) error {
	err := t.writing.Within(func() error {
		f := t.writing
		if err := f.Run("UPDATE "+geopackage.Quote(t.names.runs)+" SET finished = ? WHERE run = ?", summary.Finished.UTC().Format(timeForm), t.run); err != nil {
			return err
		}
		for _, name := range []string{t.names.results, t.names.problems, t.names.runs} {
			table, err := f.Table(name)
			if err != nil {
				return err
			}
			if err := f.Touch(table, summary.Finished); err != nil {
				return err
			}
		}
		return nil
	})
	if err != nil {
		return err
	}
	// Here already, since a command that is killed while it prints its summary never comes to Close.
	return t.Close()
}

func (t *target) closeReading() error {
	if t.reading == nil {
		return nil
	}
	f := t.reading
	t.reading = nil
	return f.Close()
}

// Close puts the file back into the mode that it had, so that it is one file again. While another program has it open that cannot be done and does no harm left undone.
func (t *target) Close() error {
	err := t.closeReading()
	if t.writing == nil {
		return err
	}
	f := t.writing
	t.writing = nil
	for _, mode := range []string{"delete", "truncate", "persist"} { // SQLite's own words; what a table says is never part of a statement
		if t.journal == mode {
			f.SetInterrupt(nil)
			f.SetBusyTimeout(time.Second)
			_ = f.Run("PRAGMA journal_mode = " + mode) // refused while others have the file open
		}
	}
	return errors.Join(err, f.Close())
}
