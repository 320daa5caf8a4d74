package format

import (
	"strconv"

	"github.com/go-json-experiment/json/jsontext"

	"leat/api/stream"
	"leat/api/wellformed"
	"leat/api/wire"
)

// A lineSource reads NDJSON: one request a line.
type lineSource struct {
	*LineReader
	b *Bulk
}

func (s *lineSource) read(r *request, record []byte) { r.readJSON(s.b, record) }

// readJSON makes a request of a record that is a JSON object, nested or flat.
func (r *request) readJSON(b *Bulk, record []byte) {
	if !b.choice.Flat {
		r.body = record
		return
	}
	switch {
	case !jsontext.Value(record).IsValid():
		r.problem, r.id = malformed(record, b), findID(record, b.choice.Prefix+"id")
	case record[wellformed.SkipSpace(record, 0)] != '{':
		r.problem = wire.InvalidRequest(wire.Fault{Code: "not_an_object", Detail: "A record must be an object, one for each request."})
	default:
		r.readMembers(b, record)
		r.build(b)
	}
}

// A lineTarget writes NDJSON: one answer a line, and a last line that says how the run ended.
//
//	{"id":…,"line":n,"result":{…}}
//	{"id":…,"line":n,"problem":{…}}
type lineTarget struct {
	lineWriter
	b *Bulk
}

func (t *lineTarget) tell(dst []byte, r *request, a *answer) []byte {
	return t.b.appendObject(dst, r, a)
}

// appendObject appends an answer as a JSON object, nested or flat.
func (b *Bulk) appendObject(dst []byte, r *request, a *answer) []byte {
	if b.choice.Flat {
		return b.columns.appendRow(dst, r, a, b.choice.Prefix != "", false)
	}
	dst = append(dst, '{')
	if len(a.id) > 0 {
		dst = append(dst, `"id":`...)
		dst = append(dst, a.id...)
		dst = append(dst, ',')
	}
	dst = append(dst, `"line":`...)
	dst = strconv.AppendInt(dst, a.line, 10)
	if a.problem != nil {
		dst = a.problem.AppendJSON(append(dst, `,"problem":`...))
	} else {
		dst = a.solved.AppendJSON(append(dst, `,"result":`...), false)
	}
	return append(dst, '}')
}

// An arraySource reads one JSON array of requests.
type arraySource struct {
	*arrayReader
	b *Bulk
}

func (s *arraySource) read(r *request, record []byte) { r.readJSON(s.b, record) }

// An arrayTarget writes one JSON array of the objects that NDJSON has on its lines.
type arrayTarget struct {
	b     *Bulk
	begun bool // an answer was framed
}

func (t *arrayTarget) tell(dst []byte, r *request, a *answer) []byte {
	return t.b.appendObject(dst, r, a)
}

// Begin opens the array.
func (t *arrayTarget) Begin(dst []byte) []byte { return append(dst, '[') }

// Answer puts each object on a line of its own.
func (t *arrayTarget) Answer(dst, answer []byte) []byte { return appendItem(dst, answer, &t.begun) }

func appendItem(dst, item []byte, begun *bool) []byte {
	if *begun {
		dst = append(dst, ',')
	}
	*begun = true
	return append(append(dst, '\n'), item...)
}

// Flush has nothing.
func (t *arrayTarget) Flush(dst []byte) []byte { return dst }

// End closes the array; one that is not complete it leaves open.
func (t *arrayTarget) End(dst []byte, s stream.Summary) []byte {
	if !s.Complete {
		return dst
	}
	return append(dst, "\n]\n"...)
}
