package store

import (
	"context"
	"time"

	"leat/cmd/internal/register/row"
)

// A Target is where results go. Begin comes first; then Stored and Commit, which may be called at the same time, each from one goroutine
// at a time; then Finish. Whatever happens, Close ends it.
type Target interface {
	// Check makes sure, without changing anything, that the layout can be written: nothing that is not ours would be
	// overwritten, and nothing that is ours has other columns. Else the error is a *Misfit.
	Check(ctx context.Context, layout *Layout) error
	// Begin makes what is not there yet and begins a run, or goes on with the one that start names, or that was not finished
	// with the same layout and engine version.
	Begin(ctx context.Context, layout *Layout, start Start) (State, error)
	// Stored calls found for each result that is stored for a stretch of the register, in any order. The key lives until found returns.
	Stored(ctx context.Context, stretch *Stretch, found func(key row.Value, stored Stored)) error
	// Commit writes a batch and its mark together: both or neither. It keeps nothing of the batch.
	Commit(ctx context.Context, batch *Batch) error
	// Finish ends the run. Files get their name only here.
	Finish(ctx context.Context, summary *Summary) error
	Close() error
}

// A Role says what a column of the results holds.
type Role uint8

// The roles.
const (
	RoleAsset         Role = iota // the key of the source's row; unique
	RoleCopied                    // a column of the source, as it was
	RoleAnswer                    // of the flat answer
	RoleRun                       // id of the run that wrote the row
	RoleFingerprint               // 64 hexadecimal digits
	RoleCopiedHash                // of the copied columns, a whole number; only where some are copied
	RoleEngineVersion             //
	RoleComputedAt                // Time
)

// A ResultColumn is a column of the results.
type ResultColumn struct {
	row.Column
	Role        Role
	Unit        string // as people write it: "m3/s"; empty for none
	UCUM        string // its code; empty where there is none
	Description string // one line
}

// A Layout is what the results look like. Names bear the prefix already.
type Layout struct {
	Columns []ResultColumn // the first is the asset
	// Hash is of all that decides what a result row looks like, given its request: columns, units, operation. Where it
	// differs from that of the run that wrote the stored results, these are not to be taken for unchanged.
	Hash string
}

// A Start is what a run is begun with.
type Start struct {
	Run           string // the id wished for; empty for the unfinished one, or else New
	New           string // the id of a new run
	EngineVersion string
	Mapping       string // hash of the mapping file, for the record
	At            time.Time
}

// A State is where a run stands.
type State struct {
	Run     string
	Resumed bool
	// Mark is the key of the last row whose batch was committed; null at the start.
	Mark row.Value
	// Counts are those committed so far.
	Counts Counts
	// Fresh says that stored results are of another layout or engine version, so that each row is to be computed anew.
	Fresh bool
}

// Stored is what a Target remembers of a result.
type Stored struct {
	Fingerprint [32]byte
	Copied      int64 // of RoleCopiedHash; 0 without that column
}

// A Stretch is the part of the register that a batch covers.
type Stretch struct {
	// Ordered says that the rows are all those with keys in After < key <= Until. Else only Keys tells which they are.
	Ordered      bool
	After, Until row.Value // null is no bound
	Keys         []row.Value
}

// A Batch is the outcome of a stretch. In one transaction: the results of Gone and the problems of the whole stretch are removed, Results are inserted or
// put in place of those with the same asset, Problems are inserted, Mark is set unless null, and Counts are added to the run's.
type Batch struct {
	Stretch  Stretch
	Results  [][]row.Value // by row, in the order of the layout's columns
	Problems []Problem
	Gone     []row.Value // assets whose stored results no longer hold: now bad, or not there any more
	Mark     row.Value
	Counts   Counts
}

// A Problem is one fault of one row of the register.
type Problem struct {
	Asset   row.Value
	Line    int64  // in a file, from 1; 0 in a table
	Column  string // of the source, several joined with a comma; empty where it is not of one
	Pointer string // into the request; may be empty
	Code    string // stable, snake_case
	Text    string // a full sentence
}

// ProblemColumns are the columns of a table of problems, after run.
var ProblemColumns = []string{"asset", "line", "column", "pointer", "code", "text"}

// Counts are of rows.
type Counts struct {
	Read, Computed, Unchanged, Bad, Removed int64
	Problems                                int64 // faults: a bad row may have several
}

// Add adds other counts.
func (c *Counts) Add(o Counts) {
	c.Read += o.Read
	c.Computed += o.Computed
	c.Unchanged += o.Unchanged
	c.Bad += o.Bad
	c.Removed += o.Removed
	c.Problems += o.Problems
}

// A Summary is the account of a run.
type Summary struct {
	Run      string
	Counts   Counts
	Finished time.Time
}

// A Process does one stretch of a register: it reads the rows of the query's range, solves them, and fills the batch, which belongs to the caller
// afterwards until the next call. It is what a Sharing hands its batches to.
type Process func(ctx context.Context, after, until row.Value, batch *Batch) error

// A Sharing is a Target that can share a run among processes: batches are jobs in its database, and a batch's results and its completion commit together.
type Sharing interface {
	Target
	// Share begins a run as Begin does and cuts the source into jobs of about so many rows each, all in one transaction; a run that goes on
	// keeps its jobs.
	Share(ctx context.Context, layout *Layout, start Start, source Source, query *Query, rows int) (State, error)
	// Join takes part in the run that is open, and returns ErrNoRun where there is none.
	Join(ctx context.Context, layout *Layout, start Start) (State, error)
	// Work takes jobs until the run has none left (those of other processes included) or ctx is done, with so many at a time, each with a process of its own.
	// progress is told of batches that this or another process has committed. failed are batches given up for good.
	Work(ctx context.Context, processes []Process, progress func(Counts)) (total Counts, failed int64, err error)
}
