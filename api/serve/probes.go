package serve

import (
	"net/http"
	"strconv"

	"github.com/gin-gonic/gin"
	"github.com/prometheus/client_golang/prometheus/promhttp"

	"leat/api/wire"
)

var (
	aliveBody = []byte(`{"status":"alive"}` + "\n")
	readyBody = []byte(`{"status":"ready"}` + "\n")
)

// livez says that the process answers; load does not matter to it.
func (s *Server) livez(c *gin.Context) { writeProbe(c, aliveBody) }

// readyz says whether to send requests here: not while draining, not while a solve is stuck, and not if the known
// answer comes out wrong. It waits for no slot.
func (s *Server) readyz(c *gin.Context) {
	if s.unready.Load() {
		s.writeProblem(c, wire.NotReady("The service is about to stop; send requests elsewhere."))
		return
	}
	if silence := s.admission.pool.Silence(); silence > s.admission.stuck {
		s.log.Error("a solve does not come to its end", "silent_seconds", silence.Seconds(), "request_id", exchangeOf(c).requestID)
		s.writeProblem(c, wire.NotReady("A solve holds its slot and gives no sign of life; the process must be started anew."))
		return
	}
	if err := s.known(); err != nil {
		s.log.Error("the known answer came out wrong", "error", err.Error(), "request_id", exchangeOf(c).requestID)
		s.writeProblem(c, wire.NotReady("A calculation with a known answer came out wrong; the log says how."))
		return
	}
	writeProbe(c, readyBody)
}

func writeProbe(c *gin.Context, body []byte) {
	h := c.Writer.Header()
	h["Content-Type"] = jsonType
	h["Cache-Control"] = noStore
	h["Content-Length"] = []string{strconv.Itoa(len(body))}
	c.Writer.WriteHeader(http.StatusOK)
	c.Writer.Write(body)
}

// exposition is the handler of /metrics.
func (s *Server) exposition() gin.HandlerFunc {
	handler := promhttp.HandlerFor(s.metrics.registry, promhttp.HandlerOpts{DisableCompression: true})
	return func(c *gin.Context) {
		c.Writer.Header()["Cache-Control"] = noStore
		handler.ServeHTTP(c.Writer, c.Request)
	}
}
