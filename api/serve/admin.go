package serve

import (
	"net/http"
	"net/http/pprof"
	"time"

	"github.com/gin-gonic/gin"
)

// profileTime is the longest that a profile of the process may be taken over.
const profileTime = 5 * time.Minute

// adminConnections bounds the connections on the admin listener. They do not count as the public one's, so that probes and metrics find a place in any crowd.
const adminConnections = 128

// adminPlan lays out the routes of the admin listener: metrics, probes and profiles of the process.
func (s *Server) adminPlan() routes {
	table := append(s.probes(), s.metricsRoute())
	for path, handle := range map[string]http.HandlerFunc{
		"/debug/pprof/": pprof.Index, "/debug/pprof/cmdline": pprof.Cmdline, "/debug/pprof/profile": pprof.Profile, "/debug/pprof/symbol": pprof.Symbol, "/debug/pprof/trace": pprof.Trace,
	} {
		table = append(table, profileRoute(path, handle))
	}
	for _, name := range []string{"allocs", "block", "goroutine", "heap", "mutex", "threadcreate"} {
		table = append(table, profileRoute("/debug/pprof/"+name, pprof.Handler(name).ServeHTTP))
	}
	return table
}

// profileRoute is a route of net/http/pprof, whose own pages have a style and links.
func profileRoute(path string, handle http.HandlerFunc) route {
	return route{method: http.MethodGet, path: path, silent: true, handle: func(c *gin.Context) {
		h := c.Writer.Header()
		delete(h, "Content-Security-Policy")
		h["Cache-Control"] = noStore
		handle(c.Writer, c.Request)
	}}
}
