package serve

import (
	"crypto/sha256"
	"encoding/hex"
	"log/slog"
	"net/http"
	"strconv"
	"strings"
	"sync"

	"github.com/gin-gonic/gin"
	"github.com/go-json-experiment/json"
	"github.com/go-json-experiment/json/jsontext"

	"leat/api/site"
	"leat/api/wire"
)

// A document is one representation of a GET route, made when it is first asked for and never changed: most replicas are never asked, and
// what conversion and compression leave behind would be half of an idle process.
type document struct {
	media   string
	class   string // Cache-Control
	rules   string // Content-Security-Policy, where it is not that of all answers
	content func() (content, error)
}

// content is the bytes of a document.
type content struct {
	body  []byte
	tag   string                   // entity tag, without its quotation marks and what it bears for a coding
	coded map[coding]func() []byte // where it is worth it
}

// How long documents may be kept: those that change with the binary a little while, those that change with the settings not without asking.
const (
	keepAWhile = "public, max-age=300"
	keepAndAsk = "no-cache"
)

func newDocument(media, class string, body []byte) document {
	return lateDocument(media, class, func() ([]byte, error) { return body, nil })
}

// lateDocument is a document whose text is made at the first request.
func lateDocument(media, class string, text func() ([]byte, error)) document {
	return document{media: media, class: class, content: sync.OnceValues(func() (content, error) {
		body, err := text()
		if err != nil {
			return content{}, err
		}
		sum := sha256.Sum256(body)
		made := content{body: body, tag: hex.EncodeToString(sum[:12])}
		if len(body) >= leastCoded {
			made.coded = map[coding]func() []byte{}
			for _, c := range []coding{gzipCoding, zstdCoding} {
				made.coded[c] = sync.OnceValue(func() []byte { return c.encode(nil, body) })
			}
		}
		return made, nil
	})}
}

// documents builds the GET documents.
func (s *Server) documents(contract []byte) ([]route, error) {
	limits, err := encode(s.limitsDocument())
	if err != nil {
		return nil, err
	}
	units := jsontext.Value(wire.AppendUnits(nil))
	if err := units.Indent(jsontext.WithIndent("  ")); err != nil {
		return nil, err
	}
	version, err := encode(s.build.document())
	if err != nil {
		return nil, err
	}
	problems, err := s.problemPages()
	if err != nil {
		return nil, err
	}
	return append([]route{
		s.get("/v1/limits", newDocument(mediaJSON, keepAndAsk, limits)),
		s.get("/v1/units", newDocument(mediaJSON, keepAWhile, append(units, '\n'))),
		s.get("/version", newDocument(mediaJSON, keepAndAsk, version)),
		s.get("/openapi.yaml", newDocument(mediaYAML, keepAWhile, contract)),
		s.get("/openapi.json", lateDocument(mediaJSON, keepAWhile, func() ([]byte, error) { return yamlToJSON(contract) })),
		s.get("/", newPage(site.Page()), newDocument(mediaJSON, keepAWhile, site.Links())),
	}, problems...), nil
}

// newPage is a page for people.
func newPage(text []byte) document {
	d := newDocument(mediaHTML+"; charset=utf-8", keepAWhile, text)
	d.rules = site.ContentSecurityPolicy()
	return d
}

// problemPages are the routes that the types of problems lead to.
func (s *Server) problemPages() ([]route, error) {
	list, each, err := site.Problems()
	if err != nil {
		return nil, err
	}
	shown := make(map[string]gin.HandlerFunc, len(each))
	for name, text := range each {
		shown[name] = s.show(newPage(text))
	}
	return []route{
		s.get("/docs/problems", newPage(list)),
		{method: http.MethodGet, path: "/docs/problems/:name", handle: func(c *gin.Context) {
			show, known := shown[c.Param("name")]
			if !known {
				s.writeProblem(c, wire.NotFound("There is no problem of this name; GET /docs/problems lists those that there are."))
				return
			}
			show(c)
		}},
	}, nil
}

// encode writes a document as indented JSON, since people read it too.
func encode(v any) ([]byte, error) {
	b, err := json.Marshal(v, jsontext.WithIndent("  "))
	return append(b, '\n'), err
}

// get is the route of a document with one or more representations, the preferred one first.
func (s *Server) get(path string, representations ...document) route {
	return route{method: http.MethodGet, path: path, handle: s.show(representations...)}
}

// show answers with one of some representations, the preferred one first.
func (s *Server) show(representations ...document) gin.HandlerFunc {
	offers := make([]string, len(representations))
	for i, d := range representations {
		offers[i], _, _ = strings.Cut(d.media, ";")
	}
	return func(c *gin.Context) {
		h := c.Writer.Header()
		if len(offers) > 1 {
			addVary(h, "Accept")
		}
		chosen, found := negotiate(c.Request.Header, offers...)
		if !found {
			s.writeProblem(c, notAcceptable(offers...))
			return
		}
		for i, d := range representations {
			if offers[i] == chosen {
				s.writeDocument(c, &d)
				return
			}
		}
	}
}

func (s *Server) writeDocument(c *gin.Context, d *document) {
	made, err := d.content()
	if err != nil {
		s.log.Error("a document cannot be made", slog.String("request_id", exchangeOf(c).requestID), slog.String("error", err.Error()))
		s.writeProblem(c, internalFault())
		return
	}
	h := c.Writer.Header()
	body, tag := made.body, `"`+made.tag+`"`
	if made.coded != nil {
		addVary(h, "Accept-Encoding")
		if chosen := chooseCoding(c.Request.Header); chosen != identity {
			body, tag = made.coded[chosen](), `"`+made.tag+"-"+string(chosen)+`"` // other bytes, so another tag
			h["Content-Encoding"] = []string{string(chosen)}
		}
	}
	h["Etag"] = []string{tag}
	h["Cache-Control"] = []string{d.class}
	if d.rules != "" {
		h["Content-Security-Policy"] = []string{d.rules}
	}
	if unchanged(c.Request.Header["If-None-Match"], tag) {
		delete(h, "Content-Encoding")
		c.Writer.WriteHeader(http.StatusNotModified)
		c.Writer.WriteHeaderNow()
		return
	}
	h["Content-Type"] = []string{d.media}
	h["Content-Length"] = []string{strconv.Itoa(len(body))}
	c.Writer.WriteHeader(http.StatusOK)
	c.Writer.Write(body)
}

// unchanged reports whether an If-None-Match header names the tag, by weak comparison (RFC 9110, 13.1.2).
func unchanged(headers []string, tag string) bool {
	for _, header := range headers {
		for candidate := range strings.SplitSeq(header, ",") {
			candidate = strings.TrimSpace(candidate)
			if candidate == "*" || strings.TrimPrefix(candidate, "W/") == tag {
				return true
			}
		}
	}
	return false
}
