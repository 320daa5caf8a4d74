package serve

import (
	"bytes"
	"net/http"
	"strconv"
	"strings"
	"sync"

	"github.com/gin-gonic/gin"
	"github.com/klauspost/compress/gzip"
	"github.com/klauspost/compress/zstd"
)

// A coding is a content coding of answers (RFC 9110, 8.4.1). The empty one is none.
type coding string

const (
	identity   coding = ""
	gzipCoding coding = "gzip"
	zstdCoding coding = "zstd"
)

// leastCoded is the size from which an answer is worth coding: a shorter one fits one packet anyway.
const leastCoded = 1 << 10

// chooseCoding chooses by the Accept-Encoding header (RFC 9110, 12.5.3): the coding of greatest quality, of equals zstd. Nothing is coded
// unasked, and a refusal of codings that leaves none is not taken at its word.
func chooseCoding(h http.Header) coding {
	values := h["Accept-Encoding"]
	if len(values) == 0 {
		return identity
	}
	zstdQuality, gzipQuality, anyQuality := -1.0, -1.0, 0.0
	for text := range strings.SplitSeq(strings.Join(values, ","), ",") {
		name, weight, weighed := strings.Cut(text, ";")
		quality := 1.0
		if weighed {
			key, value, _ := strings.Cut(strings.TrimSpace(weight), "=")
			q, err := strconv.ParseFloat(strings.TrimSpace(value), 64)
			if err != nil || !(q >= 0 && q <= 1) || !strings.EqualFold(strings.TrimSpace(key), "q") {
				continue
			}
			quality = q
		}
		switch strings.ToLower(strings.TrimSpace(name)) {
		case "zstd":
			zstdQuality = quality
		case "gzip", "x-gzip":
			gzipQuality = quality
		case "*":
			anyQuality = quality
		}
	}
	if zstdQuality < 0 {
		zstdQuality = anyQuality
	}
	if gzipQuality < 0 {
		gzipQuality = anyQuality
	}
	switch {
	case zstdQuality > 0 && zstdQuality >= gzipQuality:
		return zstdCoding
	case gzipQuality > 0:
		return gzipCoding
	}
	return identity
}

var gzipWriters = sync.Pool{New: func() any {
	w, err := gzip.NewWriterLevel(nil, gzip.BestSpeed)
	if err != nil {
		panic(err) // impossible: the level is one of the package's own
	}
	return w
}}

// zstdEncoder codes whole answers, from many goroutines at once. Its window is small: answers repeat their member names all the time, and a
// reader needs as much memory as the window.
var zstdEncoder = sync.OnceValue(func() *zstd.Encoder {
	e, err := zstd.NewWriter(nil, zstd.WithEncoderLevel(zstd.SpeedFastest), zstd.WithWindowSize(256<<10), zstd.WithLowerEncoderMem(true))
	if err != nil {
		panic(err) // impossible: the options are constants
	}
	return e
})

// encode appends the coded body.
func (c coding) encode(dst, body []byte) []byte {
	switch c {
	case zstdCoding:
		return zstdEncoder().EncodeAll(body, dst)
	case gzipCoding:
		w := gzipWriters.Get().(*gzip.Writer)
		defer gzipWriters.Put(w)
		out := bytes.NewBuffer(dst)
		w.Reset(out)
		w.Write(body) // a buffer takes everything
		w.Close()
		return out.Bytes()
	}
	return append(dst, body...)
}

// send answers 200 with a whole body, coded where the request asks for it and it is worth it; 503 where too many large ones wait for their readers.
func (s *Server) send(c *gin.Context, media []string, body []byte) {
	if size := int64(len(body)); size >= largeAnswer {
		if !s.shelf.take(size) {
			s.writeProblem(c, fullShelf())
			return
		}
		defer s.shelf.give(size)
	}
	h := c.Writer.Header()
	h["Content-Type"] = media
	if len(body) >= leastCoded {
		addVary(h, "Accept-Encoding")
		if chosen := chooseCoding(c.Request.Header); chosen != identity {
			buffer := s.answers.get()
			defer s.answers.put(buffer)
			body = chosen.encode((*buffer)[:0], body)
			*buffer = body
			h["Content-Encoding"] = []string{string(chosen)}
		}
	}
	h["Content-Length"] = []string{strconv.Itoa(len(body))}
	c.Writer.WriteHeader(http.StatusOK)
	c.Writer.Write(body)
}
