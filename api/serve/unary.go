package serve

import (
	"context"
	"net/http"
	"slices"
	"sync"
	"time"

	"github.com/gin-gonic/gin"

	"leat/api/admit"
	"leat/api/format"
	"leat/api/operation"
	"leat/api/picture"
	"leat/api/record"
	"leat/api/wire"
)

// answers are buffers for the answers of unary operations.
type answers struct{ pool sync.Pool }

// largestKeptAnswer bounds the buffers that are kept for reuse: states at as many depths as a request may ask for fit.
const largestKeptAnswer = 8 << 20

func (a *answers) get() *[]byte {
	if b, found := a.pool.Get().(*[]byte); found {
		return b
	}
	b := make([]byte, 0, 4<<10)
	return &b
}

func (a *answers) put(b *[]byte) {
	if cap(*b) <= largestKeptAnswer {
		*b = (*b)[:0]
		a.pool.Put(b)
	}
}

// unary is the handler of one operation on one request object.
func (s *Server) unary(op *operation.Operation) gin.HandlerFunc {
	limit := bodyLimit{"body_bytes", s.config.BodyBytes}
	if op.Long {
		limit = bodyLimit{"profile_body_bytes", s.config.ProfileBytes}
	}
	forms := slices.Concat(format.Renderings(op), picture.Renderings(op), record.Renderings(op))
	offers := []string{mediaJSON}
	for i := range forms {
		offers = append(offers, forms[i].MediaType)
	}
	class := classOf(op)
	return func(c *gin.Context) {
		if s.tooOften(c) {
			return
		}
		options, accepted, problem := s.admit(c, operation.Options{Fingerprint: true}, mediaJSON, offers...)
		if problem != nil {
			s.refuse(c, problem)
			return
		}
		if refusal := s.admission.pool.Full(class); refusal != nil { // most of those that are refused need not be read first
			s.refuse(c, s.noSlot(c, refusal))
			return
		}
		slot := s.admission.hold(class)
		defer s.admission.put(class, slot)
		// A client that closed its own direction looks like one gone. Only long solves are worth ending for that: a short one's answer is there at once.
		patience := context.Background()
		if op.Long {
			patience = c.Request.Context()
		}
		options.Begin = checkpoints(patience, s.config.TimeLimit, func(int) *admit.Hold { return slot })
		if len(c.Request.TransferEncoding) > 0 {
			// net/http hides a Content-Length beside chunks. A proxy that went by it would see other requests on
			// this connection than we do, so there must be no further ones (RFC 9112, 6.3).
			closeConnection(c)
		}
		body, problem := s.bodies.read(c.Request, limit)
		if problem != nil {
			if problem.Status == http.StatusServiceUnavailable {
				s.metrics.turnedAway.WithLabelValues(awayBodies).Inc()
			}
			closeConnection(c) // what is left of the body is not worth reading
			s.writeProblem(c, problem)
			return
		}
		defer body.release()
		buffer := s.answers.get()
		defer s.answers.put(buffer)
		answer, media, problem := s.solve(c, patience, slot, func() ([]byte, []string, *wire.Problem) {
			return answerAs(op, forms, accepted, (*buffer)[:0], body.bytes, options)
		})
		*buffer = answer
		if problem != nil {
			s.writeProblem(c, problem)
			return
		}
		for i := range forms {
			if forms[i].MediaType == accepted && forms[i].Policy != "" {
				c.Writer.Header()["Content-Security-Policy"] = []string{forms[i].Policy}
			}
		}
		s.send(c, media, answer)
	}
}

// solve has a request solved when there is a slot, which it gives back, after a panic too. It waits for one until patience ends.
func (s *Server) solve(c *gin.Context, patience context.Context, slot *admit.Hold, solve func() ([]byte, []string, *wire.Problem)) ([]byte, []string, *wire.Problem) {
	began := time.Now()
	if err := slot.Acquire(patience); err != nil {
		return nil, nil, s.noSlot(c, err)
	}
	defer slot.Release()
	s.metrics.queueWait.Observe(time.Since(began).Seconds())
	answer, media, problem := solve()
	if problem == nil && slot.Spent() > s.config.TimeLimit {
		problem = lateAnswer(s.config.TimeLimit)
	}
	return answer, media, problem
}

var jsonType = []string{mediaJSON}

// answerAs solves a request and appends its answer in the form accepted; media is its Content-Type.
func answerAs(op *operation.Operation, forms []format.Rendering, accepted string, dst, body []byte, options operation.Options) (answer []byte, media []string, problem *wire.Problem) {
	solved, problem := op.Solve(body, options)
	if problem != nil {
		return dst, nil, problem
	}
	for i := range forms {
		if forms[i].MediaType == accepted {
			answer, problem = forms[i].Append(dst, &solved)
			return answer, []string{forms[i].ContentType}, problem
		}
	}
	return solved.AppendJSON(dst, true), jsonType, nil
}

// admit checks all that a POST says before its body: query, media type, and which of the offered media types it accepts.
// defaults are the options where the query says nothing of them.
func (s *Server) admit(c *gin.Context, defaults operation.Options, media string, offers ...string) (options operation.Options, accepted string, problem *wire.Problem) {
	said, problem := readQuery(c.Request.URL.RawQuery, parameters, call{Options: defaults})
	options = said.Options
	options.Limits = &s.limits
	if problem == nil {
		_, problem = checkMedia(c.Request.Header, c.Writer.Header(), media)
	}
	if problem == nil {
		var found bool
		if accepted, found = negotiate(c.Request.Header, offers...); !found {
			problem = notAcceptable(offers...)
		}
	}
	return options, accepted, problem
}

// refuse answers with a problem before the body was read. It drops what the client is sending all the same, up to a bound, so
// that one that sends first and reads afterwards finds the problem and no broken connection.
func (s *Server) refuse(c *gin.Context, problem *wire.Problem) {
	s.refuseWithin(c, problem, skippedBytes)
}

// refuseWithin is refuse with a bound of its own for what is dropped.
func (s *Server) refuseWithin(c *gin.Context, problem *wire.Problem, most int64) {
	if !skipWithin(c.Request, most) {
		closeConnection(c)
	}
	s.writeProblem(c, problem)
}

// closeConnection has an HTTP/1.1 connection closed after the answer; it must be called before the answer's header is sent. HTTP/2 has
// no need of it, since there a body ends with its own stream.
func closeConnection(c *gin.Context) {
	if c.Request.ProtoMajor == 1 {
		c.Writer.Header()["Connection"] = []string{"close"}
	}
}
