package serve

import (
	"net/http"
	"slices"
	"strings"

	"github.com/gin-gonic/gin"
)

// A route is one row of the table that the router, the metrics and the tests are made from.
type route struct {
	method string
	path   string // a last part that begins with a colon stands for any
	silent bool   // no access-log line and no metrics: probes and the metrics themselves
	handle gin.HandlerFunc
}

// plan lays out all routes.
func (s *Server) plan(documents []route) []route {
	var routes []route
	for _, plain := range s.operations {
		op := s.counted(plain)
		routes = append(routes,
			route{method: http.MethodPost, path: "/v1/" + op.Name, handle: s.unary(op)},
			route{method: http.MethodPost, path: "/v1/bulk/" + op.Name, handle: s.bulk(op)},
		)
	}
	routes = append(routes, documents...)
	return append(routes,
		route{method: http.MethodGet, path: "/livez", silent: true, handle: s.livez},
		route{method: http.MethodGet, path: "/readyz", silent: true, handle: s.readyz},
		route{method: http.MethodGet, path: "/metrics", silent: true, handle: s.exposition()},
	)
}

// router puts the routes and the middleware into gin. The order of the middleware is: observe (which sees every outcome), recover.
func (s *Server) router() http.Handler {
	gin.SetMode(gin.ReleaseMode)
	engine := gin.New()
	engine.RedirectTrailingSlash = false
	engine.RedirectFixedPath = false
	engine.HandleMethodNotAllowed = true
	engine.ForwardedByClientIP = false
	if err := engine.SetTrustedProxies(nil); err != nil {
		panic(err) // impossible: nil names no proxy that could be misspelt
	}
	silent := map[string]bool{}
	for _, r := range s.routes {
		silent[r.path] = r.silent
	}
	engine.Use(s.observe(silent), s.recover)
	engine.NoRoute(func(c *gin.Context) { s.writeProblem(c, noRoute(c.Request.URL.Path, s.routes)) })
	engine.NoMethod(func(c *gin.Context) {
		allow := s.allowed(c.Request.URL.Path)
		c.Writer.Header().Set("Allow", allow)
		s.writeProblem(c, noMethod(allow))
	})
	for _, r := range s.routes {
		engine.Handle(r.method, r.path, r.handle)
		if r.method == http.MethodGet {
			engine.Handle(http.MethodHead, r.path, r.handle)
		}
	}
	return engine
}

// leads reports whether a path is one of the route's.
func (r *route) leads(path string) bool {
	head, _, any := strings.Cut(r.path, ":")
	if !any {
		return path == r.path
	}
	rest, found := strings.CutPrefix(path, head)
	return found && rest != "" && !strings.Contains(rest, "/")
}

// allowed lists the methods of a path, in a fixed order.
func (s *Server) allowed(path string) string {
	var names []string
	for _, r := range s.routes {
		if !r.leads(path) {
			continue
		}
		names = append(names, r.method)
		if r.method == http.MethodGet {
			names = append(names, http.MethodHead)
		}
	}
	slices.Sort(names)
	return strings.Join(names, ", ")
}
