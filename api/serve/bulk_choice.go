package serve

import (
	"github.com/gin-gonic/gin"

	"leat/api/format"
	"leat/api/operation"
	"leat/api/wire"
)

// bulkTypes are the media types of bulk bodies.
var bulkTypes = func() (types []string) {
	for _, k := range format.Kinds {
		types = append(types, k.MediaType())
	}
	return types
}()

// admitBulk checks all that a stream says before its body: query, media type, and in which of them it takes answers, by default in that of its requests.
func (s *Server) admitBulk(c *gin.Context) (said call, choice format.Choice, problem *wire.Problem) {
	said, problem = readQuery(c.Request.URL.RawQuery, bulkParameters, call{Options: operation.Options{Limits: &s.limits}})
	if problem != nil {
		return said, choice, problem
	}
	media, problem := checkMedia(c.Request.Header, c.Writer.Header(), bulkTypes...)
	if problem != nil {
		return said, choice, problem
	}
	choice = format.Choice{Flat: said.flat, Prefix: said.prefix}
	choice.In, _ = format.KindOf(media)
	offers := []string{media}
	for _, k := range format.Kinds {
		// Only what came with geometries can go back as features.
		if k != choice.In && k != format.GeoJSON {
			offers = append(offers, k.MediaType())
		}
	}
	accepted, found := negotiate(c.Request.Header, offers...)
	if !found {
		return said, choice, notAcceptable(offers...)
	}
	choice.Out, _ = format.KindOf(accepted)
	if choice.Prefix != "" && !choice.Flat && (choice.In == format.NDJSON || choice.In == format.JSONArray) {
		return said, choice, wire.BadParameter(wire.Fault{Parameter: "prefix", Code: "needs_flat", Detail: "A prefix is for flat names: give flat=true beside it, or send text/csv or application/geo+json."})
	}
	return said, choice, nil
}
