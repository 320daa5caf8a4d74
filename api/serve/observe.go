package serve

import (
	"context"
	"errors"
	"log/slog"
	"net"
	"net/http"
	"runtime/debug"
	"time"

	"github.com/gin-gonic/gin"
)

// Headers that every answer bears. The slices are shared and never written to.
var (
	noSniff    = []string{"nosniff"}
	noContent  = []string{"default-src 'none'; frame-ancestors 'none'; base-uri 'none'; form-action 'none'"}
	noReferrer = []string{"no-referrer"}
	noStore    = []string{"no-store"} // of what holds for one moment or one caller only
)

// observe is the outermost middleware: it names the request, sets the headers of every answer, and afterwards counts and logs it,
// however it ended. A panic passes through it on its way to net/http.
func (s *Server) observe(silent map[string]bool) gin.HandlerFunc {
	return func(c *gin.Context) {
		began := time.Now()
		e := &exchange{requestID: requestID(c.Request.Header), traceID: traceID(c.Request.Header), route: c.FullPath()}
		e.caller, _, _ = net.SplitHostPort(c.Request.RemoteAddr)
		c.Set(exchangeKey{}, e)
		if c.Request.Body != nil && c.Request.Body != http.NoBody {
			e.bytesIn.ReadCloser = c.Request.Body
			c.Request.Body = &e.bytesIn
		} else {
			e.bytesIn.ended.Store(true)
		}
		h := c.Writer.Header()
		h["Request-Id"] = []string{e.requestID}
		h["X-Content-Type-Options"] = noSniff
		h["Content-Security-Policy"] = noContent
		h["Referrer-Policy"] = noReferrer
		if s.unready.Load() {
			// The next request had better go elsewhere. In HTTP/2 net/http turns this into a GOAWAY.
			h["Connection"] = []string{"close"}
		}

		s.origins.answer(c.Request, h)

		if silent[e.route] {
			c.Next()
			return
		}
		if e.route == "" {
			e.route = unmatched
		}
		defer func() {
			elapsed := time.Since(began)
			s.metrics.observe(e.route, c.Request.Method, c.Writer.Status(), elapsed)
			s.logAccess(c, e, elapsed)
		}()
		c.Next()
	}
}

// logAccess writes the one line of a request, but not of each refusal in a storm of them.
func (s *Server) logAccess(c *gin.Context, e *exchange, elapsed time.Duration) {
	level, status := slog.LevelInfo, c.Writer.Status()
	write, leftOut := s.refusals.took(time.Since(s.began), isRefusal(status) && e.cut == "" && e.early == "")
	s.logLeftOut(leftOut)
	if !write {
		return
	}
	switch {
	case isRefusal(status): // the service does as it should; alerts go by the metrics
		level = slog.LevelWarn
	case status >= 500:
		level = slog.LevelError
	case status >= 400 || e.cut != "":
		level = slog.LevelWarn
	}
	message := "request answered"
	switch {
	case e.cut != "":
		message = "answer broken off: " + e.cut
	case e.early != "":
		message = "stream ended early: " + e.early
	}
	s.log.LogAttrs(context.Background(), level, message,
		slog.String("request_id", e.requestID),
		slog.String("trace_id", e.traceID),
		slog.String("caller", e.caller),
		slog.String("route", e.route),
		slog.Int("status", status),
		slog.Float64("duration_seconds", elapsed.Seconds()),
		slog.Int64("bytes_in", e.bytesIn.n),
		slog.Int("bytes_out", max(0, c.Writer.Size())),
		slog.Int64("lines", e.lines),
		slog.Int64("problems", e.problems),
	)
}

// recover turns a panic into a problem while nothing is sent, and into a broken connection afterwards, so that no client takes half
// an answer for a whole one. net/http keeps quiet about http.ErrAbortHandler; gin's own recovery would swallow it.
func (s *Server) recover(c *gin.Context) {
	defer func() {
		cause := recover()
		if cause == nil {
			return
		}
		e := exchangeOf(c)
		abort := false
		if err, is := cause.(error); is {
			abort = errors.Is(err, http.ErrAbortHandler)
		}
		if !abort {
			s.logPanic(e, cause, debug.Stack())
			if !c.Writer.Written() {
				s.writeProblem(c, internalFault())
				return
			}
			e.cut = "panic"
		}
		panic(http.ErrAbortHandler)
	}()
	c.Next()
}
