package format

import (
	"errors"
	"fmt"
	"io"
	"strconv"
	"sync"

	"leat/api/operation"
	"leat/api/stream"
	"leat/api/wire"
)

// NDJSON is the format of one request a line in and one line out for each:
//
//	{"id":…,"line":n,"result":{…}}
//	{"id":…,"line":n,"problem":{…}}
//
// followed by a line that says how the run ended. The id is left out where the request gives none. It is safe for
// concurrent use.
type NDJSON struct {
	operation *operation.Operation
	options   operation.Options
	lineBytes int
	scratch   sync.Pool // of *[]byte: an answer before its id is known
}

var _ Format = (*NDJSON)(nil)

// NewNDJSON binds the format to an operation. A line may have lineBytes bytes without its end.
func NewNDJSON(op *operation.Operation, options operation.Options, lineBytes int) *NDJSON {
	options.Inside = false
	return &NDJSON{operation: op, options: options, lineBytes: lineBytes}
}

// MediaType is application/x-ndjson.
func (f *NDJSON) MediaType() string { return "application/x-ndjson" }

// Reader finds the lines of a body.
func (f *NDJSON) Reader(body io.Reader) stream.Reader { return NewLineReader(body, f.lineBytes) }

// Writer ends each answer with a line feed.
func (f *NDJSON) Writer() stream.Writer { return lineWriter{} }

// keptScratch is the largest scratch buffer that is kept for use again.
const keptScratch = 1 << 20

// Solve answers one line.
func (f *NDJSON) Solve(_ int, record stream.Record, dst []byte) ([]byte, bool) {
	scratch, found := f.scratch.Get().(*[]byte)
	if !found {
		scratch = new([]byte)
	}
	answer, id, problem := f.operation.Answer((*scratch)[:0], record.Bytes, f.options)
	dst = appendHead(dst, id, record.Line)
	if problem != nil {
		dst = appendTail(dst, problem)
	} else {
		dst = append(dst, `"result":`...)
		dst = append(dst, answer...)
		dst = append(dst, '}')
	}
	if cap(answer) <= keptScratch {
		*scratch = answer
		f.scratch.Put(scratch)
	}
	return dst, problem != nil
}

// Refuse answers one line that was not given to the operation, or on which it panicked.
func (f *NDJSON) Refuse(_ int, record stream.Record, cause error, dst []byte) []byte {
	dst = appendHead(dst, findID(record.Bytes), record.Line)
	return appendTail(dst, refusal(cause))
}

func appendHead(dst, id []byte, line int64) []byte {
	dst = append(dst, '{')
	if len(id) > 0 {
		dst = append(dst, `"id":`...)
		dst = append(dst, id...)
		dst = append(dst, ',')
	}
	dst = append(dst, `"line":`...)
	dst = strconv.AppendInt(dst, line, 10)
	return append(dst, ',')
}

func appendTail(dst []byte, problem *wire.Problem) []byte {
	dst = append(dst, `"problem":`...)
	dst = problem.AppendJSON(dst)
	return append(dst, '}')
}

// refusal is the problem of a line that the operation did not answer.
func refusal(cause error) *wire.Problem {
	var overlong *stream.Overlong
	if errors.As(cause, &overlong) {
		return wire.TooLarge(wire.Fault{Code: "line_bytes", Detail: fmt.Sprintf("The line is longer than line_bytes, %d bytes; GET /v1/limits shows the limits.", overlong.Limit)})
	}
	return wire.Internal("The service failed on this line; the fault is ours. Other lines are not affected.")
}
