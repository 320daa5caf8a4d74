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

// routes are those that one listener serves.
type routes []route

// plan lays out the public routes. With an admin listener the metrics are on that one alone.
func (s *Server) plan(documents []route) routes {
	var routes routes
	for _, plain := range s.operations {
		op := s.counted(plain)
		routes = append(routes,
			route{method: http.MethodPost, path: "/v1/" + op.Name, handle: s.unary(op)},
			route{method: http.MethodPost, path: "/v1/bulk/" + op.Name, handle: s.bulk(op)},
		)
	}
	routes = append(append(routes, documents...), s.probes()...)
	if s.config.AdminListen == "" {
		routes = append(routes, s.metricsRoute())
	}
	return routes
}

// probes are the routes that need no key, on every listener.
func (s *Server) probes() routes {
	return routes{
		{method: http.MethodGet, path: livezPath, silent: true, handle: s.livez},
		{method: http.MethodGet, path: readyzPath, silent: true, handle: s.readyz},
	}
}

func (s *Server) metricsRoute() route {
	return route{method: http.MethodGet, path: "/metrics", silent: true, handle: s.exposition()}
}

const (
	livezPath  = "/livez"
	readyzPath = "/readyz"
)

// router puts routes and the middleware into gin. The order of the middleware is: observe (which sees every outcome), recover, then
// what the listener adds.
func (s *Server) router(table routes, more ...gin.HandlerFunc) http.Handler {
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
	for _, r := range table {
		silent[r.path] = r.silent
	}
	engine.Use(s.observe(silent), s.recover)
	engine.Use(more...)
	engine.NoRoute(func(c *gin.Context) {
		if c.Request.Method == http.MethodOptions && c.Request.URL.Path == "*" {
			tellMethods(c, "GET, HEAD, OPTIONS, POST")
			return
		}
		s.writeProblem(c, noRoute(c.Request.URL.Path, table))
	})
	engine.NoMethod(func(c *gin.Context) {
		allow := table.allowed(c.Request.URL.Path)
		if c.Request.Method == http.MethodOptions {
			tellMethods(c, allow)
			return
		}
		c.Writer.Header()["Allow"] = []string{allow}
		s.writeProblem(c, noMethod(allow))
	})
	for _, r := range table {
		engine.Handle(r.method, r.path, r.handle)
		if r.method == http.MethodGet {
			engine.Handle(http.MethodHead, r.path, r.handle)
		}
	}
	return engine
}

// tellMethods answers OPTIONS.
func tellMethods(c *gin.Context, allow string) {
	exchangeOf(c).route = optionsRoute
	h := c.Writer.Header()
	h["Allow"] = []string{allow}
	h["Cache-Control"] = noStore
	c.Writer.WriteHeader(http.StatusNoContent)
	c.Writer.WriteHeaderNow()
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
func (table routes) allowed(path string) string {
	names := []string{http.MethodOptions}
	for _, r := range table {
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
