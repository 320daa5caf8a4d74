package serve

import (
	"fmt"
	"net/http"
	"slices"
	"strconv"
	"strings"
	"time"

	"github.com/gin-gonic/gin"

	"leat/api/admit"
	"leat/api/format"
	"leat/api/stream"
	"leat/api/wire"
)

// The problems of the edge itself. What a request body may do wrong is package wire's to say.

func noRoute(path string, table routes) *wire.Problem {
	if path != "/" {
		for _, r := range table {
			if r.path == strings.TrimRight(path, "/") {
				return wire.NotFound(fmt.Sprintf("There is nothing at this path; without its trailing slash it is %s.", r.path))
			}
		}
	}
	return wire.NotFound("There is nothing at this path; GET / lists what there is.")
}

func noMethod(allow string) *wire.Problem {
	return wire.MethodNotAllowed(fmt.Sprintf("This path does not take the request's method; it takes %s.", allow))
}

func notAcceptable(offers ...string) *wire.Problem {
	return wire.NotAcceptable(fmt.Sprintf("The Accept header refuses all that can be given here: %s. Name it, or leave the header out.", strings.Join(offers, ", ")))
}

func wrongMedia(given string, wanted []string) *wire.Problem {
	said := "The request has no Content-Type header"
	if given != "" {
		said = fmt.Sprintf("The request's Content-Type is %q", clip(given))
	}
	lower := strings.ToLower(given)
	fix := fmt.Sprintf("; send Content-Type: %s.", oneOf(wanted))
	if strings.HasPrefix(lower, "application/x-www-form-urlencoded") {
		fix += fmt.Sprintf(" Some programs send this type unless told otherwise: give Python's urllib headers={\"Content-Type\": %q}, curl -H \"Content-Type: %s\".", wanted[0], wanted[0])
	}
	if _, bulk := format.KindOf(strings.TrimSpace(strings.Split(lower, ";")[0])); bulk && len(wanted) == 1 || strings.Contains(lower, "ndjson") {
		fix += " Many requests at once go to the same operation under /v1/bulk."
	}
	return wire.UnsupportedMediaType(said + fix)
}

// oneOf lists names in a sentence.
func oneOf(names []string) string {
	if len(names) == 1 {
		return names[0]
	}
	return strings.Join(names[:len(names)-1], ", ") + " or " + names[len(names)-1]
}

func wrongCharset(charset string) *wire.Problem {
	return wire.UnsupportedMediaType(fmt.Sprintf("The request's charset is %q; send UTF-8, and leave charset out or say utf-8.", clip(charset)))
}

func wrongCoding(coding string) *wire.Problem {
	return wire.UnsupportedMediaType(fmt.Sprintf("The request's Content-Encoding is %q; send the body as it is, without that header.", clip(coding)))
}

func tooLarge(limit bodyLimit) *wire.Problem {
	return wire.TooLarge(wire.Fault{Code: limit.name, Detail: fmt.Sprintf("The request body is larger than %s, %d bytes; GET /v1/limits shows the limits.", limit.name, limit.bytes)})
}

func slowBody() *wire.Problem {
	return wire.RequestTimeout("The request body did not arrive in time; send it without pauses.")
}

// unfinished is the problem of a stream that ended early before anything of its answer was sent.
func unfinished(reason stream.Reason, limit time.Duration) *wire.Problem {
	switch reason {
	case stream.Draining:
		return aboutToStop()
	case stream.Idle:
		return wire.RequestTimeout(fmt.Sprintf("Nothing more of the request body came for idle_limit_seconds, %v; send it without such pauses, and end it.", limit.Seconds()))
	}
	return wire.Saturated("The answers found no room to wait in; send the request again after the seconds in Retry-After, in smaller parts or as application/x-ndjson.")
}

// tooLongForProtocol is the problem of an answer over HTTP/1.0 that is longer than what can be held: that protocol ends long answers as it breaks them off.
func tooLongForProtocol() *wire.Problem {
	return wire.NotAcceptable("Over HTTP/1.0 an answer of this length and form could not be told from one that was broken off. Use HTTP/1.1 (of a proxy, towards this service), or accept application/x-ndjson, whose last line says whether it is whole.")
}

func brokenBody() *wire.Problem {
	return wire.MalformedJSON(wire.Fault{Code: "incomplete_body", Detail: "The request body could not be read to its end: its length or its chunks are wrong, or the sender stopped."})
}

func fullHouse() *wire.Problem {
	return wire.Saturated("Too many request bodies are held in memory at this moment; send the request again after the seconds in Retry-After.")
}

func tooManyStreams(most int) *wire.Problem {
	return wire.Saturated(fmt.Sprintf("As many bulk streams are open as may be at once, %d, the limit streams; send the request again after the seconds in Retry-After.", most))
}

func fullShelf() *wire.Problem {
	return wire.Saturated("Too many large answers wait in memory for their readers at this moment; send the request again after the seconds in Retry-After, or ask for less at once.")
}

func aboutToStop() *wire.Problem {
	return wire.Draining("The service is about to stop and takes no new bulk streams; send the request again after the seconds in Retry-After.")
}

func lateAnswer(limit time.Duration) *wire.Problem {
	return wire.TimeLimit(fmt.Sprintf("The calculation took longer than time_limit_seconds, %v; ask for less at once.", limit.Seconds()))
}

func noKey() *wire.Problem {
	return wire.Unauthorized("The request bears no key; send the header Authorization: Bearer and the key that the operator of this service gave you.")
}

func wrongKey() *wire.Problem {
	return wire.Unauthorized("The key in the header Authorization is not known here; ask the operator of this service for one.")
}

// goneClient ends a solve; nobody is there to read it.
func goneClient() *wire.Problem {
	return wire.RequestTimeout("The client went away before the answer was there.")
}

func internalFault() *wire.Problem {
	return wire.Internal("The service failed; the fault is ours, and its log holds it under the request id in instance.")
}

// kinds are the values of the problem label.
var kinds = func() (names []string) {
	for _, t := range wire.ProblemTypes() {
		names = append(names, t.Name)
	}
	return append(names, "other")
}()

func kindLabel(p *wire.Problem) string {
	kind := p.Type[strings.LastIndexByte(p.Type, '/')+1:]
	if slices.Contains(kinds, kind) {
		return kind
	}
	return "other"
}

// writeProblem answers with a problem, whatever Accept says.
func (s *Server) writeProblem(c *gin.Context, p *wire.Problem) {
	e := exchangeOf(c)
	e.problems++
	answer := *p
	answer.Instance = "urn:request:" + e.requestID
	body := answer.AppendJSON(nil)
	h := c.Writer.Header()
	h["Content-Type"] = []string{"application/problem+json"}
	h["Cache-Control"] = noStore
	delete(h, "Etag")
	h["Content-Length"] = []string{strconv.Itoa(len(body))}
	if p.Status == http.StatusServiceUnavailable && h["Retry-After"] == nil {
		retryAfter(c, admit.Pause(0))
	}
	s.metrics.refusals.WithLabelValues(kindLabel(p)).Inc()
	c.Writer.WriteHeader(p.Status)
	c.Writer.Write(body)
	c.Abort()
}
