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

	"leat/api/admit"
	"leat/api/format"
	"leat/api/operation"
	"leat/api/stream"
	"leat/api/wire"
)

// panicsLogged is how many panics of one stream are logged; the metrics count all.
const panicsLogged = 3

// closing is how long what a client still sends is read after its answer is complete.
const closing = time.Second

var errGone = errors.New("the client has gone")

// bulk is the handler of one operation on a stream of requests.
func (s *Server) bulk(op *operation.Operation) gin.HandlerFunc {
	answered := s.lineCounter(op.Name)
	return func(c *gin.Context) {
		if s.isDraining() {
			s.refuse(c, aboutToStop())
			return
		}
		if s.tooOften(c) {
			return
		}
		said, choice, problem := s.admitBulk(c)
		// The request's own context ends when the pump has reading stopped, too, which is no sign of a client gone.
		slots := make([]*admit.Hold, s.admission.pool.Slots())
		for worker := range slots {
			slots[worker] = s.admission.pool.Hold(admit.Bulk)
		}
		slot := func(worker int) *admit.Hold { return slots[worker] }
		said.Begin = checkpoints(context.WithoutCancel(c.Request.Context()), s.config.TimeLimit, slot)
		var form *format.Bulk
		if problem == nil {
			form, problem = format.New(op, said.Options, choice, int(s.config.LineBytes))
		}
		if problem != nil {
			s.refuse(c, problem)
			return
		}
		if !s.admission.streams.Take() {
			s.metrics.turnedAway.WithLabelValues(awayStreams).Inc()
			s.refuse(c, tooManyStreams(s.config.Streams))
			return
		}
		defer s.admission.streams.Leave()
		// Without full duplex, net/http drops what it has not read of a chunked body at the first byte of the answer, and says nothing.
		// The deadlines of the server give way to the pump's watch over progress.
		control := http.NewResponseController(c.Writer)
		if err := errors.Join(control.EnableFullDuplex(), control.SetReadDeadline(time.Time{}), control.SetWriteDeadline(time.Time{})); err != nil {
			s.log.Error("bulk is not possible on this connection", slog.String("request_id", exchangeOf(c).requestID), slog.String("error", err.Error()))
			s.refuse(c, internalFault())
			return
		}
		s.pump(c, control, form.Open, slot, choice.Out, answered)
	}
}

// pump runs one stream, which open begins, and ends its answer of some kind: cleanly, or broken off so that the client notices.
func (s *Server) pump(c *gin.Context, control *http.ResponseController, open func(io.Reader) format.Stream, slot func(worker int) *admit.Hold, kind format.Kind, answered func(lines, problems int)) {
	e := exchangeOf(c)
	var panics atomic.Int32
	past := time.Unix(1, 0)
	activity := stream.NewActivity()
	received := activity.Reader(c.Request.Body)
	output := &bulkOutput{c: c, kind: kind, body: &e.bytesIn}
	ctx, cancel := context.WithCancelCause(context.WithoutCancel(c.Request.Context()))
	defer cancel(nil)
	ignoreRequest := context.AfterFunc(c.Request.Context(), func() { cancel(errGone) })
	defer ignoreRequest()
	run := open(received)
	pump := stream.Pump{
		Reader:   run.Reader,
		Writer:   run.Writer,
		Solver:   run.Solver,
		Workers:  s.admission.pool.Slots(),
		Slot:     func(worker int) stream.Slot { return slot(worker) },
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
	if kind.Framed() {
		pump.Held = output.hold
	}
	summary, err := pump.Run(ctx)
	e.lines, e.problems = summary.Lines, summary.Problems
	if err == nil {
		if !summary.Complete {
			e.early = string(summary.Reason)
			if kind.Framed() {
				s.unfinished(c, control, summary.Reason)
				return
			}
		}
		output.end(summary)
		// net/http reads on for a while when the handler has returned; a silent client must not hold it up.
		control.SetReadDeadline(time.Now().Add(closing))
		return
	}
	var broken *stream.BrokenError
	var read *stream.ReadError
	var refusal *format.Refusal
	switch {
	case errors.As(err, &broken):
		s.logPanic(e, broken.Err, broken.Stack, slog.String("part", broken.Part))
		if !c.Writer.Written() {
			closeConnection(c)
			s.writeProblem(c, internalFault())
			return
		}
		e.cut = "internal fault"
	case errors.Is(err, stream.ErrDeclined):
		s.refuseLate(c, control, tooLongForProtocol())
		return
	case errors.As(err, &refusal) && !c.Writer.Written():
		s.refuseLate(c, control, refusal.Problem)
		return
	case errors.As(err, &read) && !c.Writer.Written():
		closeConnection(c)
		s.writeProblem(c, brokenBody())
		return
	default:
		e.cut = err.Error()
	}
	panic(http.ErrAbortHandler)
}

// unfinished ends an answer that cannot be whole and whose form cannot say so: by a problem while nothing of it is sent, else by breaking it off.
func (s *Server) unfinished(c *gin.Context, control *http.ResponseController, reason stream.Reason) {
	if c.Writer.Written() {
		exchangeOf(c).cut = "unfinished, " + string(reason)
		panic(http.ErrAbortHandler)
	}
	s.refuseLate(c, control, unfinished(reason, s.config.IdleLimit))
}

// refuseLate is refuse after the pump, which has cut off reading, perhaps.
func (s *Server) refuseLate(c *gin.Context, control *http.ResponseController, problem *wire.Problem) {
	control.SetReadDeadline(time.Now().Add(s.config.IdleLimit))
	control.SetWriteDeadline(time.Now().Add(s.config.IdleLimit + answerTime))
	closeConnection(c)
	skip(c.Request)
	s.writeProblem(c, problem)
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
