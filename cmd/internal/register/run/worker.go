package run

import (
	"context"
	"crypto/sha256"
	"encoding/binary"
	"encoding/hex"
	"fmt"
	"strings"
	"time"

	"leat/api/operation"
	"leat/api/wire"
	"leat/cmd/internal/register/mapping"
	"leat/cmd/internal/register/row"
	"leat/cmd/internal/register/store"
	"leat/compute"
)

// A mode is how far rows are taken.
type mode uint8

const (
	computing mode = iota
	checking       // the requests are made and checked, and nothing is solved
)

// An identity is what every result of a run bears.
type identity struct{ run, version row.Value }

func newIdentity(run string) *identity {
	return &identity{row.OfString(run), row.OfString(compute.EngineVersion)}
}

// A worker takes pages of rows through the mapping and the solver. It belongs to one goroutine at a time.
type worker struct {
	*plan
	mode    mode
	writer  *mapping.Writer
	options operation.Options
	body    []byte          // what is hashed: the operation, the engine's version, the request
	head    int             // where the request begins in it
	answer  wire.FlatAnswer // of the row at hand: it would reach the heap
}

func newWorker(p *plan, mode mode) *worker {
	w := &worker{plan: p, mode: mode, writer: p.mapping.NewWriter(), options: operation.Options{Units: p.file.System, Brief: true}}
	w.body = fmt.Appendf(nil, "%s\n%s\n", p.file.Operation.Name, compute.EngineVersion)
	w.head = len(w.body)
	return w
}

// A task is one page on its way, with all its memory.
type task struct {
	page   row.Page
	faults []store.RowFault
	batch  store.Batch
	known  known // stored results of the page's stretch
	skip   bool  // rows whose stored result is still right are left alone
	worst  worst

	cells  []row.Value
	keys   []row.Value
	memory row.Memory
	at     row.Value // when it is computed
	kinds  Kinds
	tally  tally

	done chan struct{}
}

// stretch sets what part of the register the page is. Where keys are texts, others (of a GeoJSON file whose ids are of several types) become texts.
func (t *task) stretch(keys row.Kind, ordered bool, after, until row.Value) {
	t.memory.Reset()
	t.keys = t.keys[:0]
	for i := range t.page.Rows() {
		key := &t.page.Row(i)[0]
		if key.IsNull() {
			continue
		}
		if keys == row.Text && key.Kind != row.Text {
			*key = t.memory.Text(key.String())
		}
		t.keys = append(t.keys, *key)
	}
	t.batch = store.Batch{
		Stretch: store.Stretch{Ordered: ordered, After: t.memory.Keep(after), Until: t.memory.Keep(until), Keys: t.keys},
		Results: t.batch.Results[:0], Problems: t.batch.Problems[:0], Gone: t.batch.Gone[:0],
	}
	t.known.reset()
	t.worst.reset()
	t.tally.reset()
	clear(t.kinds)
}

// work fills the task's batch from its page.
func (w *worker) work(ctx context.Context, t *task, id *identity) error {
	rows := t.page.Rows()
	width := len(w.layout.Columns)
	t.cells = t.cells[:0]
	if cap(t.cells) < rows*width {
		t.cells = make([]row.Value, 0, rows*width)
	}
	faults := t.faults
	t.at = row.OfTime(time.Now())
	checkpoint := func() error { return context.Cause(ctx) }
	w.options.Begin = func(int) func() error { return checkpoint }
	for i := range rows {
		if i%64 == 0 && ctx.Err() != nil {
			return context.Cause(ctx)
		}
		var fault *store.RowFault
		if len(faults) > 0 && faults[0].Row == i {
			fault, faults = &faults[0], faults[1:]
		}
		w.row(t, i, fault, id)
	}
	t.batch.Counts.Read = int64(rows)
	t.batch.Counts.Problems = int64(len(t.batch.Problems))
	t.batch.Gone = t.known.gone(t.batch.Gone)
	t.batch.Counts.Removed = int64(len(t.batch.Gone))
	return nil
}

func (w *worker) row(t *task, i int, fault *store.RowFault, id *identity) {
	values := t.page.Row(i)
	if fault != nil {
		w.bad(t, i, store.Problem{Column: fault.Column, Code: mapping.CodeUnreadable, Text: fault.Detail})
		t.batch.Counts.Bad++
		return
	}
	var problems []mapping.Problem
	w.body, problems = w.writer.Append(w.body[:w.head], mapping.Row{Values: values, Children: t.page.Children(i)})
	if len(problems) > 0 {
		for _, p := range problems {
			w.bad(t, i, store.Problem{Column: p.Column, Pointer: p.Pointer, Code: p.Code, Text: p.Text})
		}
		t.batch.Counts.Bad++
		return
	}
	body := w.body[w.head:]
	if w.mode == checking {
		if problem := w.file.Operation.Check(body, w.options); problem != nil {
			w.refused(t, i, problem)
		}
		return
	}
	fingerprint := w.fingerprint(body)
	copied := w.copiedHash(values)
	if stored := t.known.find(values[0]); stored != nil {
		if t.skip && stored.Fingerprint == fingerprint && stored.Copied == copied {
			t.known.keep(stored)
			t.batch.Counts.Unchanged++
			return
		}
	}
	solved, problem := w.solve(body)
	if problem != nil {
		w.refused(t, i, problem)
		return
	}
	t.known.replaced(values[0])
	w.result(t, values, &solved, &fingerprint, copied, id)
	t.batch.Counts.Computed++
}

// solve solves a request. A panic costs the row, not the run.
func (w *worker) solve(body []byte) (solved operation.Solved, problem *wire.Problem) {
	defer func() {
		if v := recover(); v != nil {
			problem = wire.Internal(fmt.Sprintf("The solver failed on this row; please report it: %v.", v))
		}
	}()
	if solved, problem = w.file.Operation.Solve(body, w.options); problem != nil {
		return solved, problem
	}
	if absent := solved.Answer.(wire.Flat).FlatAbsent(); absent != "" {
		return solved, wire.Internal(absent)
	}
	return solved, nil
}

// fingerprint is that of the contract: see wire.Fingerprint.
func (w *worker) fingerprint(body []byte) (sum [32]byte) {
	if w.mapping.Canonical {
		return sha256.Sum256(w.body)
	}
	digits := wire.Fingerprint(w.file.Operation.Name, body, w.file.System)
	hex.Decode(sum[:], []byte(digits))
	return sum
}

// copiedHash is of the columns that the results copy; 0 where there are none.
func (w *worker) copiedHash(values []row.Value) int64 {
	if len(w.mapping.Copied) == 0 {
		return 0
	}
	hash := sha256.New()
	var room [32]byte
	for _, at := range w.mapping.Copied {
		v := values[at]
		head := append(room[:0], byte(v.Kind))
		if v.Kind == row.Text || v.Kind == row.Bytes {
			head = binary.BigEndian.AppendUint64(head, uint64(len(v.Bytes())))
		} else {
			head = v.Append(head)
		}
		hash.Write(head)
		hash.Write(v.Bytes())
	}
	return int64(binary.BigEndian.Uint64(hash.Sum(room[:0])))
}

// result adds the row of an answer.
func (w *worker) result(t *task, values []row.Value, solved *operation.Solved, fingerprint *[32]byte, copied int64, id *identity) {
	start := len(t.cells)
	t.cells = append(t.cells, values[0])
	for _, at := range w.mapping.Copied {
		t.cells = append(t.cells, values[at])
	}
	answer := &w.answer
	*answer = wire.FlatAnswer{Units: solved.Units, Answer: solved.Answer}
	for k, i := range w.answers {
		v := w.table.Value(answer, i)
		cell := row.Value{}
		if v.Given {
			switch w.layout.Columns[1+len(w.mapping.Copied)+k].Kind {
			case row.Float:
				cell = row.OfFloat(v.Number)
			case row.Int:
				cell = row.OfInt(int64(v.Number))
			case row.Bool:
				cell = row.OfBool(v.Truth)
			default:
				cell = t.memory.Text(v.Text)
			}
		}
		t.cells = append(t.cells, cell)
	}
	var digits [64]byte
	hex.Encode(digits[:], fingerprint[:])
	t.cells = append(t.cells, id.run, row.OfText(t.memory.Copy(digits[:])))
	if len(w.mapping.Copied) > 0 {
		t.cells = append(t.cells, row.OfInt(copied))
	}
	t.cells = append(t.cells, id.version, t.at)
	t.batch.Results = append(t.batch.Results, t.cells[start:len(t.cells):len(t.cells)])
	t.worst.consider(w.plan, values[0], answer)
	t.tally.count(w.plan, answer)
}

// refused adds the problems that a request was answered with.
func (w *worker) refused(t *task, i int, problem *wire.Problem) {
	t.batch.Counts.Bad++
	if len(problem.Errors) == 0 {
		code := problem.Type[strings.LastIndexByte(problem.Type, '/')+1:]
		w.bad(t, i, store.Problem{Code: code, Text: problem.Detail})
		return
	}
	for _, f := range problem.Errors {
		w.bad(t, i, store.Problem{Column: w.mapping.ColumnsAt(f.Pointer), Pointer: f.Pointer, Code: f.Code, Text: f.Detail})
	}
}

// bad adds one problem of a row.
func (w *worker) bad(t *task, i int, p store.Problem) {
	p.Asset, p.Line = t.page.Row(i)[0], t.page.Line(i)
	t.batch.Problems = append(t.batch.Problems, p)
	t.kinds.count(&p)
}
