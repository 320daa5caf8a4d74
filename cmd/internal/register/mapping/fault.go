// Package mapping reads the file that says how the tables of a register become requests: which column or constant feeds which
// member, in which unit, what counts as missing, and where the results go. Compiled for the columns of a table, a mapping turns
// a row into one request, as canonical JSON, or into problems that name the row's column.
package mapping

import (
	"cmp"
	"fmt"
	"slices"
	"strings"
)

// A Fault is one thing wrong in a mapping file. Nothing is written while there is one.
type Fault struct {
	File         string
	Line, Column int    // from 1; 0 for the file as a whole
	Detail       string // a full sentence
}

func (f *Fault) Error() string {
	if f.Line == 0 {
		return fmt.Sprintf("%s: %s", f.File, f.Detail)
	}
	return fmt.Sprintf("%s:%d:%d: %s", f.File, f.Line, f.Column, f.Detail)
}

// Faults are all that were found, in the order of their lines.
type Faults []*Fault

func (f Faults) Error() string {
	lines := make([]string, len(f))
	for i := range f {
		lines[i] = f[i].Error()
	}
	return strings.Join(lines, "\n")
}

// err returns the faults as an error, nil where there are none.
func (f Faults) err() error {
	if len(f) == 0 {
		return nil
	}
	slices.SortStableFunc(f, func(a, b *Fault) int { return cmp.Or(cmp.Compare(a.Line, b.Line), cmp.Compare(a.Column, b.Column)) })
	return f
}

// A place is where something stands in the file.
type place struct{ line, column int }
