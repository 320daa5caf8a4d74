package serve

import (
	"context"
	"errors"
	"fmt"
	"io"
	"log/slog"
	"net/http"
	"sync/atomic"
	"time"

	"github.com/gin-gonic/gin"

	"leat/api/format"
	"leat/api/operation"
	"leat/api/stream"
)

// panicsLogged is how many panics of one stream are logged; the metrics count all.
const panicsLogged = 3

// closing is how long what a client still sends is read after its answer is complete.
const closing = time.Second

var errGone = errors.New("the client has gone")

var ndjsonType = []string{mediaNDJSON}

// bulk is the handler of one operation on a stream of requests.
func (s *Server) bulk(op *operation.Operation) gin.HandlerFunc {
	answered := s.lineCounter(op.Name)
	return func(c *gin.Context) {
		if s.isDraining() {
			s.refuse(c, aboutToStop())
			return
		}
		options, _, problem := s.admit(c, operation.Options{}, mediaNDJSON, mediaNDJSON)
		if problem != nil {
			s.refuse(c, problem)
			return
		}
		// Without full duplex, net/http drops what it has not read of a chunked body at the first byte of the answer, and says nothing.
		// The deadlines of the server give way to the pump's watch over progress.
		control := http.NewResponseController(c.Writer)
		if err := errors.Join(control.EnableFullDuplex(), control.SetReadDeadline(time.Time{}), control.SetWriteDeadline(time.Time{})); err != nil {
			s.log.Error("bulk is not possible on this connection", slog.String("request_id", exchangeOf(c).requestID), slog.String("error", err.Error()))
			s.refuse(c, internalFault())
			return
		}
		if op.Long {
			// The request's own context ends when the pump has reading stopped, too, which is no sign of a client gone.
			options.Begin = checkpoints(context.WithoutCancel(c.Request.Context()), s.config.TimeLimit)
		}
		s.pump(c, control, format.NewNDJSON(op, options, int(s.config.LineBytes)), answered)
	}
}

// pump runs one stream and ends its answer: cleanly with its end line, or broken off so that the client notices.
func (s *Server) pump(c *gin.Context, control *http.ResponseController, form format.Format, answered func(lines, problems int)) {
	e := exchangeOf(c)
	var panics atomic.Int32
	past := time.Unix(1, 0)
	activity := stream.NewActivity()
	received := activity.Reader(c.Request.Body)
	output := &bulkOutput{c: c, media: ndjsonType, body: &e.bytesIn}
	ctx, cancel := context.WithCancelCause(context.WithoutCancel(c.Request.Context()))
	defer cancel(nil)
	ignoreRequest := context.AfterFunc(c.Request.Context(), func() { cancel(errGone) })
	defer ignoreRequest()
	pump := stream.Pump{
		Reader:   form.Reader(received),
		Writer:   form.Writer(),
		Solver:   form,
		Output:   output,
		Flush:    control.Flush,
		Store:    s.store,
		Draining: s.draining,
		Stall:    s.config.IdleLimit,
		Activity: activity,

		StopReading: func() {
			ignoreRequest() // its context ends when net/http sees the deadline pass, which is no sign of a client gone
			control.SetReadDeadline(past)
		},
		StopWriting: func() {
			if output.began.Load() {
				control.SetWriteDeadline(past)
			} else {
				control.SetWriteDeadline(time.Now().Add(answerTime)) // there is still a problem to write
			}
		},
		Discard:  func() { io.Copy(io.Discard, received) },
		Answered: answered,
		Panicking: func(line int64, panicked *stream.Panicked) {
			if panics.Add(1) <= panicsLogged {
				s.logPanic(e, panicked.Value, panicked.Stack, slog.Int64("line", line))
			}
		},
	}
	summary, err := pump.Run(ctx)
	e.lines, e.problems = summary.Lines, summary.Problems
	if err == nil {
		if !summary.Complete {
			e.early = string(summary.Reason)
		}
		// net/http reads on for a while when the handler has returned; a silent client must not hold it up.
		control.SetReadDeadline(time.Now().Add(closing))
		return
	}
	var broken *stream.BrokenError
	var read *stream.ReadError
	switch {
	case errors.As(err, &broken):
		s.logPanic(e, broken.Err, broken.Stack, slog.String("part", broken.Part))
		if !c.Writer.Written() {
			closeConnection(c)
			s.writeProblem(c, internalFault())
			return
		}
		e.cut = "internal fault"
	case errors.As(err, &read) && !c.Writer.Written():
		closeConnection(c)
		s.writeProblem(c, brokenBody())
		return
	default:
		e.cut = err.Error()
	}
	panic(http.ErrAbortHandler)
}

// A bulkOutput sends the header just before the first byte of a stream's answer.
type bulkOutput struct {
	c     *gin.Context
	media []string
	body  *countingBody
	began atomic.Bool
}

func (o *bulkOutput) Write(p []byte) (int, error) {
	if !o.began.Swap(true) {
		h := o.c.Writer.Header()
		h["Content-Type"] = o.media
		h["Cache-Control"] = noStore
		if !o.body.ended.Load() || len(o.c.Request.TransferEncoding) > 0 {
			// Whether the body will have been read to its end when the answer is complete is open. If not, the
			// connection cannot be used again: what is left of the body would be taken for the next request. Chunks: see unary.
			closeConnection(o.c)
		}
		o.c.Writer.WriteHeader(http.StatusOK)
	}
	return o.c.Writer.Write(p)
}

func (s *Server) isDraining() bool {
	select {
	case <-s.draining:
		return true
	default:
		return false
	}
}

// logPanic writes the line that a fault of ours gets beside the request's own.
func (s *Server) logPanic(e *exchange, cause any, stack []byte, more ...slog.Attr) {
	s.log.LogAttrs(context.Background(), slog.LevelError, "panic", append(more,
		slog.String("request_id", e.requestID),
		slog.String("cause", fmt.Sprint(cause)),
		slog.String("stack", string(stack)),
	)...)
}
