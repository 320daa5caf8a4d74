package serve

import (
	"encoding/hex"
	"net/http"
	"strconv"
	"strings"
	"sync/atomic"

	"github.com/gin-gonic/gin"

	"leat/api/format"
	"leat/api/stream"
)

// A bulkOutput sends the header just before the first byte of a stream's answer.
type bulkOutput struct {
	c     *gin.Context
	kind  format.Kind
	body  *countingBody
	began atomic.Bool
	told  bool // the account of the stream goes into trailers
}

// The headers, or trailers, that say of an answer whose text cannot: how many records it answers, how many of these with a problem, and the hash of all its bytes.
const (
	headerLines    = "Leat-Lines"
	headerProblems = "Leat-Problems"
	headerHash     = "Leat-Sha256"
)

// hold is told how long the answer is, where all of it is known before any is sent; it declines one that is not complete.
func (o *bulkOutput) hold(whole *stream.Summary, size int64) bool {
	h := o.c.Writer.Header()
	if whole == nil && !o.c.Request.ProtoAtLeast(1, 1) {
		return false // a break could not be told from the end
	}
	if whole == nil {
		h["Trailer"] = []string{strings.Join([]string{headerLines, headerProblems, headerHash}, ", ")}
		o.told = true
		return true
	}
	if !whole.Complete {
		return false
	}
	account(h, *whole)
	h["Content-Length"] = []string{strconv.FormatInt(size, 10)}
	return true
}

// end sets the trailers of an answer that has them.
func (o *bulkOutput) end(summary stream.Summary) {
	if o.told {
		account(o.c.Writer.Header(), summary)
	}
}

func account(h http.Header, s stream.Summary) {
	h[headerLines] = []string{strconv.FormatInt(s.Lines, 10)}
	h[headerProblems] = []string{strconv.FormatInt(s.Problems, 10)}
	h[headerHash] = []string{hex.EncodeToString(s.Whole[:])}
}

func (o *bulkOutput) Write(p []byte) (int, error) {
	if !o.began.Swap(true) {
		h := o.c.Writer.Header()
		h["Content-Type"] = []string{o.kind.ContentType()}
		h["Cache-Control"] = noStore
		if !o.body.ended.Load() || len(o.c.Request.TransferEncoding) > 0 {
			// Whether the body will have been read to its end when the answer is complete is open. If not, the
			// connection cannot be used again: what is left of the body would be taken for the next request. Chunks: see unary.
			closeConnection(o.c)
		}
		o.c.Writer.WriteHeader(http.StatusOK)
	}
	return o.c.Writer.Write(p)
}
