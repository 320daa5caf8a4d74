package run

import (
	"context"
	"errors"
	"fmt"
	"io"
	"math/rand/v2"
	"runtime"
	"time"

	"leat/cmd/internal/register/mapping"
	"leat/cmd/internal/register/row"
	"leat/cmd/internal/register/store"
	"leat/compute"
)

// DefaultRows is the number of rows of a batch unless told otherwise.
const DefaultRows = 5000

// Options are what a command says beside the mapping file. The zero Options are those of a command without flags.
type Options struct {
	Run     string // id of the run to begin or to go on with; empty for the unfinished one, or a new one
	Rows    int    // of a batch; 0 for DefaultRows
	Workers int    // 0 for as many as there are processors
	DryRun  bool   // compute everything, write nothing
	// Begun is told of the run once the target has begun it; nil is not.
	Begun func(store.State)
	// Progress is told after each batch, in order; nil is not. It must not keep the problems.
	Progress func(*Progress)
}

// A Progress is where a run stands.
type Progress struct {
	Counts   store.Counts
	Total    int64           // rows to read; -1 where unknown
	Kinds    Kinds           // of the problems so far
	Problems []store.Problem // of the last batch
}

// A Report is the account of a run or of a check.
type Report struct {
	Run     string
	Resumed bool
	Counts  store.Counts // of this process, a resumed run's earlier part not included
	Kinds   Kinds        // of its problems
	Worst   []Worst      // of the assets computed by this process
	// Verdicts and Warned count those assets by verdict and by each code among their warnings.
	Verdicts, Warned map[string]int64
	Took             time.Duration
}

// A Job is a mapping file with its opened tables.
type Job struct {
	plan    *plan
	source  store.Source
	options Options
}

// Prepare compiles a mapping file for the tables of its source. The error is mapping.Faults where the file is at fault.
func Prepare(file *mapping.File, source store.Source, options Options) (*Job, error) {
	m, err := file.Compile(source.Columns(), source.ChildColumns())
	if err != nil {
		return nil, err
	}
	p, err := newPlan(file, m, source.Columns())
	if err != nil {
		return nil, err
	}
	if options.Rows <= 0 {
		options.Rows = DefaultRows
	}
	if options.Workers <= 0 {
		options.Workers = runtime.GOMAXPROCS(0)
	}
	return &Job{plan: p, source: source, options: options}, nil
}

// Layout is what the results look like.
func (j *Job) Layout() *store.Layout { return j.plan.layout }

// Query reads all that the mapping needs.
func (j *Job) Query() *store.Query {
	return &store.Query{Columns: j.plan.mapping.Columns, Filter: j.plan.file.Source.Filter, Child: j.plan.mapping.Child}
}

// CheckKey makes sure that the key column tells the rows apart. The error is mapping.Faults where it does not.
func (j *Job) CheckKey(ctx context.Context) error {
	err := j.source.CheckKey(ctx, j.plan.file.Source.Filter)
	var fault *store.KeyFault
	if errors.As(err, &fault) {
		return j.plan.file.Place("source", &store.Misfit{Field: "key", Detail: fault.Sentence(j.plan.file.Source.Key)})
	}
	var misfit *store.Misfit
	if errors.As(err, &misfit) {
		return j.plan.file.Place("source", misfit)
	}
	return err
}

// Start is what the target begins a run with.
func (j *Job) Start(now time.Time) store.Start {
	return store.Start{
		Run: j.options.Run, New: NewID(now), EngineVersion: compute.EngineVersion, Mapping: j.plan.file.Hash, At: now,
	}
}

// NewID returns an id for a run: when it began, and a random end, so that two that begin together differ.
func NewID(now time.Time) string {
	return fmt.Sprintf("%s-%08x", now.UTC().Format("20060102T150405Z"), rand.Uint32())
}

// Check reads everything and checks every request, without computing or writing.
func (j *Job) Check(ctx context.Context) (*Report, error) {
	return j.all(ctx, nil, checking)
}

// Run computes and writes. target was checked; it is begun here and finished, but not closed. With DryRun target may be nil.
// An error other than mapping.Faults means that the run did not come to its end; started again, it goes on.
func (j *Job) Run(ctx context.Context, target store.Target) (*Report, error) {
	if j.options.DryRun {
		target = nil
	}
	return j.all(ctx, target, computing)
}

func (j *Job) all(ctx context.Context, target store.Target, mode mode) (*Report, error) {
	began := time.Now()
	start := j.Start(began)
	state := store.State{Run: start.New}
	if target != nil {
		var err error
		if state, err = target.Begin(ctx, j.plan.layout, start); err != nil {
			return nil, err
		}
		if j.options.Begun != nil {
			j.options.Begun(state)
		}
	}
	report := &Report{Run: state.Run, Resumed: state.Resumed, Kinds: Kinds{}}
	total := int64(-1)
	query := j.Query()
	query.After = state.Mark
	if j.options.Progress != nil {
		var err error
		if total, err = j.source.Count(ctx, query); err != nil {
			return nil, err
		}
	}
	var top worst
	var all tally
	p := &pipeline{
		plan: j.plan, source: j.source, target: target, mode: mode, query: *query, rows: j.options.Rows,
		skip: !state.Fresh, mark: true, id: newIdentity(state.Run),
	}
	for range j.options.Workers {
		p.workers = append(p.workers, newWorker(j.plan, mode))
	}
	for range tasksFor(j.options.Workers) {
		p.tasks = append(p.tasks, &task{done: make(chan struct{}, 1)})
	}
	p.written = func(t *task) {
		report.Counts.Add(t.batch.Counts)
		report.Kinds.add(t.kinds)
		top.merge(&t.worst)
		all.merge(&t.tally)
		if j.options.Progress != nil {
			j.options.Progress(&Progress{Counts: report.Counts, Total: total, Kinds: report.Kinds, Problems: t.batch.Problems})
		}
	}
	if err := p.run(ctx); err != nil {
		return report, err
	}
	if !state.Mark.IsNull() {
		// Rows before the mark may have changed since they were computed: once more over them, leaving alone what is as it was.
		p.query.After, p.query.Until, p.skip, p.mark = row.Value{}, state.Mark, true, false
		if err := p.run(ctx); err != nil {
			return report, err
		}
	}
	report.Worst, report.Verdicts, report.Warned, report.Took = top.assets, all.verdicts, all.warned, time.Since(began)
	if target != nil {
		counts := state.Counts
		counts.Add(report.Counts)
		if err := target.Finish(ctx, &store.Summary{Run: state.Run, Counts: counts, Finished: time.Now()}); err != nil {
			return report, err
		}
	}
	return report, nil
}

// Processes are for a target that shares its run among processes: each does the stretches that it is given. state is that which the run was begun or joined with.
func (j *Job) Processes(target store.Target, state store.State, n int) []store.Process {
	out := make([]store.Process, n)
	id := newIdentity(state.Run)
	for i := range out {
		w, t := newWorker(j.plan, computing), &task{}
		out[i] = func(ctx context.Context, after, until row.Value, batch *store.Batch) error {
			return j.stretch(ctx, target, w, t, id, !state.Fresh, after, until, batch)
		}
	}
	return out
}

// stretch does one stretch, however many rows it has by now, as one batch.
func (j *Job) stretch(ctx context.Context, target store.Target, w *worker, t *task, id *identity, skip bool, after, until row.Value, batch *store.Batch) error {
	query := j.Query()
	query.After, query.Until = after, until
	reader, err := j.source.Read(ctx, query)
	if err != nil {
		return err
	}
	defer reader.Close()
	const all = 1 << 30 // rows were put in since the stretch was cut: all are wanted
	if err := reader.Next(ctx, &t.page, all); err != nil && !errors.Is(err, io.EOF) {
		return err
	}
	t.faults = append(t.faults[:0], reader.Faults()...)
	t.stretch(j.plan.layout.Columns[0].Kind, true, after, until)
	t.skip = skip
	if err := target.Stored(ctx, &t.batch.Stretch, func(key row.Value, stored store.Stored) { t.known.add(key, stored) }); err != nil {
		return err
	}
	if err := w.work(ctx, t, id); err != nil {
		return err
	}
	*batch = t.batch
	return nil
}
