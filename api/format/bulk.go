package format

import (
	"errors"
	"fmt"
	"io"
	"sync"

	"leat/api/operation"
	"leat/api/stream"
	"leat/api/wire"
)

// A Choice says in which forms requests come and answers go.
type Choice struct {
	In, Out Kind
	// Flat has JSON objects, in NDJSON and in arrays, read and written as flat rows. Rows of CSV and properties of GeoJSON always are.
	Flat bool
	// Prefix, where not empty, is what the names of flat members begin with: only those are read, answers bear it too, and all else is handed through.
	Prefix string
}

// flatIn reports whether requests are flat rows.
func (c Choice) flatIn() bool { return c.Flat || c.In == GeoJSON || c.In == CSV }

// flatOut reports whether answers are flat rows.
func (c Choice) flatOut() bool { return c.Flat || c.Out == GeoJSON || c.Out == CSV }

// A Bulk is a Choice bound to an operation. It is immutable and safe for concurrent use; Open makes a Stream of it for each run.
type Bulk struct {
	choice    Choice
	operation *operation.Operation
	options   operation.Options
	lineBytes int
	plan      *wire.FlatPlan // of flat requests
	table     *wire.FlatTable
	columns   columns // of flat answers
	requests  sync.Pool
}

// New binds a choice to an operation. A record may have lineBytes bytes. The problem, 406, says which answers cannot be had so.
func New(op *operation.Operation, options operation.Options, choice Choice, lineBytes int) (*Bulk, *wire.Problem) {
	options.Inside = false
	b := &Bulk{choice: choice, operation: op, options: options, lineBytes: lineBytes}
	b.table = wire.FlatTableOf(op.Form)
	if choice.flatOut() {
		if b.table == nil {
			return nil, wire.NotAcceptable(fmt.Sprintf("The answers of %s are lists and have no flat form. Accept application/x-ndjson or application/json, without flat.", op.Name))
		}
		b.columns = newColumns(b.table, choice.Prefix)
		b.options.Brief = true // the lists would not be told
	}
	if choice.flatIn() {
		b.plan = wire.FlatPlanOf(op.Request)
	}
	switch {
	case choice.Out == GeoJSON && choice.In != GeoJSON:
		return nil, wire.NotAcceptable("Only requests that come as application/geo+json have geometries for an answer as application/geo+json. Accept text/csv, application/x-ndjson or application/json.")
	case choice.Out == CSV && choice.In != CSV && choice.Prefix != "":
		return nil, wire.NotAcceptable("What is handed through with prefix has columns of CSV only if it came as CSV. Accept application/json or application/x-ndjson with flat=true, or leave prefix out.")
	}
	b.requests.New = func() any {
		r := new(request)
		if b.plan != nil {
			r.row = b.plan.NewRow(choice.Prefix)
		}
		return r
	}
	return b, nil
}

// limits returns the sizes that requests are held to.
func (b *Bulk) limits() *wire.Limits {
	if b.options.Limits == nil {
		limits := wire.DefaultLimits()
		return &limits
	}
	return b.options.Limits
}

// A Stream is one run of a Bulk.
type Stream struct {
	Reader stream.Reader
	Writer stream.Writer
	Solver stream.Solver
}

// A source finds records and makes requests of them.
type source interface {
	stream.Reader
	// read makes a request of a record. It is called from several goroutines at once.
	read(r *request, record []byte)
}

// A target tells answers and frames them.
type target interface {
	stream.Writer
	// tell appends the answer to a request. It is called from several goroutines at once.
	tell(dst []byte, r *request, a *answer) []byte
}

// An answer is what became of a request.
type answer struct {
	line    int64
	id      []byte // the caller's, as its JSON literal
	solved  operation.Solved
	problem *wire.Problem // nil with an answer
}

// Open begins a run over a body.
func (b *Bulk) Open(body io.Reader) Stream {
	var from source
	var features *featureReader
	var rows *csvReader
	switch b.choice.In {
	case NDJSON:
		from = &lineSource{NewLineReader(body, b.lineBytes), b}
	case JSONArray:
		from = &arraySource{newArrayReader(body, b.lineBytes), b}
	case GeoJSON:
		features = newFeatureReader(body, b)
		from = features
	case CSV:
		rows = newCSVReader(body, b)
		from = rows
	}
	var to target
	switch b.choice.Out {
	case NDJSON:
		to = &lineTarget{b: b}
	case JSONArray:
		to = &arrayTarget{b: b}
	case GeoJSON:
		to = &featureTarget{b: b, from: features}
	case CSV:
		to = &csvTarget{b: b, from: rows}
	}
	return Stream{from, to, &solver{b, from, to}}
}

// A solver answers the records of one run.
type solver struct {
	b    *Bulk
	from source
	to   target
}

// Solve answers one record.
func (s *solver) Solve(worker int, record stream.Record, dst []byte) (extended []byte, problem bool) {
	r := s.b.requests.Get().(*request)
	r.reset()
	s.from.read(r, record.Bytes)
	a := &r.answer
	*a = answer{line: record.Line, id: r.id, problem: r.problem}
	if a.problem == nil {
		options := s.b.options
		options.Worker = worker
		a.solved, a.problem = s.b.operation.Solve(r.body, options)
		a.id = a.solved.ID
		switch {
		case a.problem != nil && r.flat:
			a.problem = r.row.Translate(a.problem)
		case a.problem == nil && s.b.choice.flatOut():
			if absent := a.solved.Answer.(wire.Flat).FlatAbsent(); absent != "" {
				a.problem = wire.NotAcceptable(absent)
			}
		}
	}
	dst, problem = s.to.tell(dst, r, a), a.problem != nil
	r.keep()
	s.b.requests.Put(r)
	return dst, problem
}

// Refuse answers one record that was not given to the operation, or on which it panicked.
func (s *solver) Refuse(_ int, record stream.Record, cause error, dst []byte) []byte {
	r := s.reread(record.Bytes)
	id := r.id
	if id == nil && (s.b.choice.In == NDJSON || s.b.choice.In == JSONArray) {
		id = findID(record.Bytes, s.b.choice.Prefix+"id")
	}
	return s.to.tell(dst, r, &answer{line: record.Line, id: id, problem: refusal(cause, s.b.choice.In)})
}

// reread reads a record that failed, for what of it stands in the answer: nothing of one that cannot be read without a panic.
func (s *solver) reread(record []byte) (r *request) {
	r = s.b.requests.New().(*request)
	defer func() {
		if recover() != nil {
			r = new(request)
		}
	}()
	if len(record) > 0 {
		s.from.read(r, record)
	}
	return r
}

// refusal is the problem of a record that the operation did not answer.
func refusal(cause error, in Kind) *wire.Problem {
	record := "record"
	if in == NDJSON {
		record = "line"
	}
	var overlong *stream.Overlong
	if errors.As(cause, &overlong) {
		return wire.TooLarge(wire.Fault{Code: "line_bytes", Detail: fmt.Sprintf("The %s is longer than line_bytes, %d bytes; GET /v1/limits shows the limits.", record, overlong.Limit)})
	}
	return wire.Internal(fmt.Sprintf("The service failed on this %s; the fault is ours. Other %ss are not affected.", record, record))
}

// A Refusal is the error of a reader that can find no further record.
type Refusal struct {
	// Problem is what to answer with, while nothing is sent.
	Problem *wire.Problem
}

func (r *Refusal) Error() string { return r.Problem.Error() }
