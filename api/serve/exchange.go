package serve

import (
	"io"
	"sync/atomic"

	"github.com/gin-gonic/gin"
)

// An exchange is what the middleware knows of one request beyond gin's context.
type exchange struct {
	requestID string
	traceID   string
	caller    string // the name of the caller's key or certificate, else the address
	route     string // the label of metrics and log: a template, or unmatched, or optionsRoute
	bytesIn   countingBody
	lines     int64  // bulk lines answered
	problems  int64  // bulk lines answered by a problem, or 1 for a refused request
	early     string // why a bulk stream ended before its body, where it did
	cut       string // why the answer broke off, where it did
}

type exchangeKey struct{}

func exchangeOf(c *gin.Context) *exchange {
	return c.MustGet(exchangeKey{}).(*exchange)
}

// countingBody counts the bytes of a request body as they are read.
type countingBody struct {
	io.ReadCloser
	n     int64
	ended atomic.Bool // read to its end
}

func (b *countingBody) Read(p []byte) (int, error) {
	n, err := b.ReadCloser.Read(p)
	b.n += int64(n)
	if err == io.EOF {
		b.ended.Store(true)
	}
	return n, err
}
