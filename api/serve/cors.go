package serve

import (
	"errors"
	"net/http"
	"net/url"
	"slices"
	"strings"
)

// origins are the web origins whose pages may read answers (the CORS protocol of the Fetch standard). The zero value lets none.
type origins struct {
	any  bool
	list []string
}

var errNoOrigin = errors.New("no origin")

// parseOrigins reads a list with commas between; "*" alone stands for all. An origin is a scheme, a host and perhaps a port, as
// browsers write it: in lower case, without a path, without the scheme's own port.
func parseOrigins(text string) (origins, error) {
	var o origins
	for part := range strings.SplitSeq(text, ",") {
		part = strings.TrimSpace(part)
		switch u, err := url.Parse(part); {
		case part == "":
		case part == "*":
			o.any = true
		case err != nil || u.Host == "" || u.Scheme != "http" && u.Scheme != "https" || part != u.Scheme+"://"+u.Host || part != strings.ToLower(part),
			u.Scheme == "http" && u.Port() == "80", u.Scheme == "https" && u.Port() == "443":
			return origins{}, errNoOrigin
		default:
			o.list = append(o.list, part)
		}
	}
	if o.any && len(o.list) > 0 {
		return origins{}, errNoOrigin
	}
	return o, nil
}

// What pages may send and read beside what every page may.
var (
	corsMethods = []string{"GET, HEAD, POST"}
	corsHeaders = []string{"Accept, Authorization, Content-Type, If-None-Match, Request-Id, Traceparent"}
	corsExposed = []string{strings.Join([]string{"Allow", "Etag", headerLines, headerProblems, headerHash, "Request-Id", "Retry-After", "Www-Authenticate"}, ", ")}
	corsMaxAge  = []string{"600"}
	corsAny     = []string{"*"}
)

// answer sets the headers that let a page read the answer, and on a preflight those that let it ask at all. Where there is a list the
// answer depends on the origin, allowed or not, and caches must know.
func (o *origins) answer(r *http.Request, h http.Header) {
	if !o.any && len(o.list) == 0 {
		return
	}
	preflight := r.Method == http.MethodOptions && len(r.Header["Access-Control-Request-Method"]) > 0
	if !o.any {
		addVary(h, "Origin")
	}
	if preflight {
		addVary(h, "Access-Control-Request-Method, Access-Control-Request-Headers")
	}
	from := r.Header["Origin"]
	switch {
	case len(from) != 1:
		return
	case o.any:
		h["Access-Control-Allow-Origin"] = corsAny
	case slices.Contains(o.list, from[0]):
		h["Access-Control-Allow-Origin"] = from
	default:
		return
	}
	if preflight {
		h["Access-Control-Allow-Methods"] = corsMethods
		h["Access-Control-Allow-Headers"] = corsHeaders
		h["Access-Control-Max-Age"] = corsMaxAge
		return
	}
	h["Access-Control-Expose-Headers"] = corsExposed
}

// addVary says that an answer depends on one more header of the request.
func addVary(h http.Header, name string) {
	if before := h["Vary"]; len(before) > 0 {
		name = before[0] + ", " + name
	}
	h["Vary"] = []string{name}
}
