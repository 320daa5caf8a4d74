package serve

import (
	"net/http"
	"strings"

	"github.com/gin-gonic/gin"
)

// What the header WWW-Authenticate says (RFC 6750, section 3) to a request without a key, and to one with a key that is not known.
var (
	wantsKey     = []string{`Bearer realm="leat"`}
	wantsBetter  = []string{`Bearer realm="leat", error="invalid_token"`}
	strangerSkip = int64(1 << 20) // what is read of the body of a caller without a key
)

// authorize lets pass who may call and names the caller. Probes need no key, nor does OPTIONS, which browsers send without one.
func (s *Server) authorize(c *gin.Context) {
	e := exchangeOf(c)
	if state := c.Request.TLS; state != nil && len(state.VerifiedChains) > 0 {
		e.caller = subjectOf(state.VerifiedChains[0][0])
	}
	ring := s.keys.Load()
	if ring == nil || c.Request.Method == http.MethodOptions || c.FullPath() == livezPath || c.FullPath() == readyzPath {
		return
	}
	h := c.Writer.Header()
	key, given := bearer(c.Request.Header)
	if !given {
		h["Www-Authenticate"] = wantsKey
		s.refuseWithin(c, noKey(), strangerSkip)
		return
	}
	caller, known := ring.caller(key)
	if !known {
		h["Www-Authenticate"] = wantsBetter
		s.refuseWithin(c, wrongKey(), strangerSkip)
		return
	}
	e.caller = caller
}

// bearer returns the key of an Authorization header. Two headers, or another scheme, are none.
func bearer(h http.Header) (key string, given bool) {
	values := h["Authorization"]
	if len(values) != 1 {
		return "", false
	}
	scheme, key, found := strings.Cut(values[0], " ")
	key = strings.TrimSpace(key)
	return key, found && key != "" && strings.EqualFold(scheme, "Bearer")
}
