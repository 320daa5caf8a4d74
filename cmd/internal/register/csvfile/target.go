package csvfile

import (
	"bytes"
	"cmp"
	"context"
	"fmt"
	"os"
	"slices"

	"leat/cmd/internal/register/row"
	"leat/cmd/internal/register/store"
	"leat/cmd/internal/register/wholefile"
)

// A target is a CSV file of results with one of problems beside it. Both appear when the run is finished: a run that is broken off leaves
// nothing, and begun again computes everything.
type target struct {
	spec     *store.TargetSpec
	results  *wholefile.File
	problems *Problems
	line     []byte
}

// OpenTarget opens a CSV file for results.
func OpenTarget(_ context.Context, spec *store.TargetSpec) (store.Target, error) {
	return &target{spec: spec}, nil
}

// CheckPath refuses to overwrite files, unless that is wanted.
func CheckPath(spec *store.TargetSpec) error {
	for _, file := range []struct{ field, path string }{{"path", spec.Path}, {"problems", spec.Problems}} {
		info, err := os.Stat(file.path)
		switch {
		case os.IsNotExist(err):
		case err != nil:
			return &store.Misfit{Field: file.field, Detail: "The file cannot be written: " + err.Error() + "."}
		case info.IsDir():
			return &store.Misfit{Field: file.field, Detail: file.path + " is a folder; name a file in it."}
		case !spec.Overwrite:
			return &store.Misfit{Field: file.field, Detail: file.path + " exists and would be overwritten; allow that with overwrite: true, or name another file."}
		}
	}
	return nil
}

// Check looks at the paths.
func (t *target) Check(context.Context, *store.Layout) error { return CheckPath(t.spec) }

// Begin begins both files.
func (t *target) Begin(_ context.Context, layout *store.Layout, start store.Start) (store.State, error) {
	state := store.State{Run: cmp.Or(start.Run, start.New), Fresh: true}
	var err error
	if t.problems, err = NewProblems(t.spec, state.Run); err != nil {
		return state, err
	}
	if t.results, err = wholefile.Create(t.spec.Path); err != nil {
		return state, err
	}
	names := make([]row.Value, len(layout.Columns))
	for i := range names {
		names[i] = row.OfString(layout.Columns[i].Name)
	}
	_, err = t.results.Write(appendRecord(nil, names, &t.spec.CSV))
	return state, err
}

// Stored finds nothing: each run computes everything.
func (t *target) Stored(context.Context, *store.Stretch, func(row.Value, store.Stored)) error {
	return nil
}

// Commit writes a batch.
func (t *target) Commit(_ context.Context, batch *store.Batch) error {
	for _, result := range batch.Results {
		t.line = appendRecord(t.line[:0], result, &t.spec.CSV)
		if _, err := t.results.Write(t.line); err != nil {
			return err
		}
	}
	return t.problems.Write(batch.Problems)
}

// Finish gives the files their names, that of the results last.
func (t *target) Finish(context.Context, *store.Summary) error {
	if err := t.problems.Finish(); err != nil {
		return err
	}
	return t.results.Finish()
}

// Close removes what is not finished.
func (t *target) Close() error {
	if t.results != nil {
		t.results.Discard()
	}
	if t.problems != nil {
		t.problems.Discard()
	}
	return nil
}

// Problems is a CSV file of problems.
type Problems struct {
	*wholefile.File
	spec *store.CSVSpec
	run  row.Value
	line []byte
}

// NewProblems begins the file of problems of a target.
func NewProblems(spec *store.TargetSpec, run string) (*Problems, error) {
	file, err := wholefile.Create(spec.Problems)
	if err != nil {
		return nil, err
	}
	p := &Problems{File: file, spec: &spec.CSV, run: row.OfString(run)}
	names := []row.Value{row.OfString("run")}
	for _, name := range store.ProblemColumns {
		names = append(names, row.OfString(name))
	}
	if _, err := file.Write(appendRecord(nil, names, p.spec)); err != nil {
		return nil, fmt.Errorf("%s: %w", spec.Problems, err)
	}
	return p, nil
}

// Write adds problems.
func (p *Problems) Write(problems []store.Problem) error {
	for i := range problems {
		q := &problems[i]
		line := row.Value{}
		if q.Line > 0 {
			line = row.OfInt(q.Line)
		}
		p.line = appendRecord(p.line[:0], []row.Value{
			p.run, q.Asset, line, row.OfString(q.Column), row.OfString(q.Pointer), row.OfString(q.Code), row.OfString(q.Text),
		}, p.spec)
		if _, err := p.File.Write(p.line); err != nil {
			return err
		}
	}
	return nil
}

// appendRecord appends a line of CSV (RFC 4180).
func appendRecord(dst []byte, cells []row.Value, spec *store.CSVSpec) []byte {
	delimiter := cmp.Or(spec.Delimiter, ',')
	for i := range cells {
		if i > 0 {
			dst = append(dst, delimiter)
		}
		start := len(dst)
		dst = cells[i].Append(dst)
		cell := dst[start:]
		switch cells[i].Kind {
		case row.Float:
			if mark := cmp.Or(spec.Decimal, '.'); mark != '.' {
				if at := bytes.IndexByte(cell, '.'); at >= 0 {
					cell[at] = mark
				}
			}
		case row.Text, row.Bytes:
		default:
			continue
		}
		if bytes.IndexByte(cell, delimiter) >= 0 || bytes.ContainsAny(cell, "\"\r\n") {
			plain := slices.Clone(cell)
			dst = append(dst[:start], '"')
			dst = append(dst, bytes.ReplaceAll(plain, []byte{'"'}, []byte(`""`))...)
			dst = append(dst, '"')
		}
	}
	return append(dst, '\r', '\n')
}
