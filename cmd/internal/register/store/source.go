// Package store says what a register's tables must be able to do: a Source gives rows, a Target takes results. Each kind of
// file or database is a package beside this one.
package store

import (
	"context"
	"fmt"
	"strings"

	"leat/cmd/internal/register/row"
)

// A Source is a register that is read. Its methods may be called from several goroutines; each Reader by one at a time.
type Source interface {
	// Columns are those of the table, in its order.
	Columns() []row.Column
	// ChildColumns are those of the child table; nil where the specification names none.
	ChildColumns() []row.Column
	// Ordered reports whether rows come in the order of their keys, so that a range of keys is a stretch of the table and
	// a Target can be asked for the same range. Databases are (numbers by size, texts by their bytes: COLLATE "C"); files come as they stand.
	Ordered() bool
	// CheckKey makes sure that the key column is never null and never has a value twice, among the rows that the filter lets
	// through. Else the error is a *KeyFault.
	CheckKey(ctx context.Context, filter []Condition) error
	// Count returns the number of rows in the query, for the time that is left; -1 where that would take long to find out.
	Count(ctx context.Context, query *Query) (int64, error)
	// Read begins to read. With the query checked against Columns, an error is one of the file or database.
	Read(ctx context.Context, query *Query) (Reader, error)
	Close() error
}

// A Query chooses rows and columns.
type Query struct {
	// Columns are read in this order, each once. The first is the key.
	Columns []string
	// Filter lets through the rows that meet all conditions.
	Filter []Condition
	// After and Until bound the keys: only rows after the first and up to and with the second. Null is no bound. In a
	// Source that is not ordered, After means the rows that stand after that of the key, and Until those up to it.
	After, Until row.Value
	// Child are the columns of the child table to read with each row, in order of the child's key and its order column, the specification's; nil for none.
	Child []string
}

// A Reader gives the rows of a query, in the order of their keys or as they stand in a file.
type Reader interface {
	// Next empties the page and puts the next rows into it, at most limit, with all their child rows. It returns io.EOF, with
	// an empty page, when there are no more. A row that cannot be read while later ones can (a line of CSV with too few
	// cells) is put in with its key, as far as that is known, and reported by a *RowFault of Faults.
	Next(ctx context.Context, page *row.Page, limit int) error
	// Faults are those of the rows of the last page, in order; usually none.
	Faults() []RowFault
	Close() error
}

// A RowFault says why a row of a page could not be read.
type RowFault struct {
	Row    int    // in the page
	Column string // empty for the whole row
	Detail string // a full sentence
}

// A KeyFault says that a column does not identify the rows.
type KeyFault struct {
	Nulls int64    // rows without a key
	Twice []string // some values that several rows have, as text
}

func (f *KeyFault) Error() string { return f.facts("of the source") }

// Sentence says so of a column, and how to go on.
func (f *KeyFault) Sentence(column string) string {
	if f.Nulls > 0 {
		return f.facts(column) + fmt.Sprintf(" To leave such rows out, write filter: {%s: {not: null}} in source.", column)
	}
	return f.facts(column) + " Name a column that tells each asset from all others, or leave rows out with filter in source."
}

func (f *KeyFault) facts(column string) string {
	switch {
	case f.Nulls == 1:
		return fmt.Sprintf("The key column %s is empty in a row; every asset needs a key.", column)
	case f.Nulls > 0:
		return fmt.Sprintf("The key column %s is empty in %d rows; every asset needs a key.", column, f.Nulls)
	}
	return fmt.Sprintf("The key column %s is not unique: several rows have %s.", column, strings.Join(f.Twice, ", "))
}

// A Misfit is a fault of a specification that only the file or database could tell: it does not exist, has no such table, would be overwritten.
// The command shows it with the line of the mapping file where Field stands.
type Misfit struct {
	Field  string // below source or target: "path", "table", "points.table"; empty for the whole
	Detail string // a full sentence: what is wrong and what would be accepted
}

func (m *Misfit) Error() string { return m.Detail }
