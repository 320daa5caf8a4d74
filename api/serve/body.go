package serve

import (
	"errors"
	"io"
	"net/http"
	"os"
	"sync"
	"sync/atomic"

	"leat/api/wire"
)

// A larder holds the request bodies that are in memory and bounds their sum. Room is taken as bytes arrive, so that a caller who
// announces much and sends little holds little.
type larder struct {
	room    int64
	held    atomic.Int64
	buffers sync.Pool
}

// keptBuffer is the size of a fresh buffer; larger ones are not kept for reuse.
const keptBuffer = 16 << 10

func newLarder(room int64) *larder {
	return &larder{room: room, buffers: sync.Pool{New: func() any { return new([keptBuffer]byte) }}}
}

func (l *larder) take(n int64) bool {
	if l.held.Add(n) > l.room {
		l.held.Add(-n)
		return false
	}
	return true
}

// A body is a request body in memory. Release it when it is done with.
type body struct {
	bytes  []byte
	larder *larder
	held   int64
	pooled *[keptBuffer]byte
}

func (b *body) release() {
	b.larder.held.Add(-b.held)
	b.held = 0
	b.bytes = nil
	if b.pooled != nil {
		b.larder.buffers.Put(b.pooled)
		b.pooled = nil
	}
}

// A bodyLimit is the most bytes that a request body may have, and the name of that limit in GET /v1/limits.
type bodyLimit struct {
	name  string
	bytes int64
}

// read reads a request's body of at most limit bytes; one of exactly the limit passes. With a problem nothing is held. A client
// that has gone gets its problem too: it may have closed its own direction only.
func (l *larder) read(r *http.Request, limit bodyLimit) (b body, problem *wire.Problem) {
	if r.ContentLength > limit.bytes {
		skip(r)
		return body{}, tooLarge(limit)
	}
	b = body{larder: l}
	defer func() {
		if problem != nil {
			b.release()
		}
	}()
	if !l.take(keptBuffer) {
		skip(r)
		return b, fullHouse()
	}
	b.held = keptBuffer
	b.pooled = l.buffers.Get().(*[keptBuffer]byte)
	b.bytes = b.pooled[:0]
	for {
		if len(b.bytes) == cap(b.bytes) {
			size := min(2*int64(cap(b.bytes)), limit.bytes+1) // the byte beyond the limit tells exactly full from too much
			if size > int64(cap(b.bytes)) {
				if !l.take(size - b.held) {
					b.release()
					skip(r)
					return b, fullHouse()
				}
				b.held = size
				grown := make([]byte, len(b.bytes), size)
				copy(grown, b.bytes)
				b.bytes = grown
			}
		}
		n, err := r.Body.Read(b.bytes[len(b.bytes):cap(b.bytes)])
		b.bytes = b.bytes[:len(b.bytes)+n]
		if int64(len(b.bytes)) > limit.bytes {
			skip(r)
			return b, tooLarge(limit)
		}
		switch {
		case err == nil:
		case err == io.EOF:
			return b, nil
		case errors.Is(err, os.ErrDeadlineExceeded):
			return b, slowBody()
		default:
			return b, brokenBody()
		}
	}
}

// skippedBytes is how much of a refused body is read and dropped.
const skippedBytes = 64 << 20

// skip reads and drops what is left of a body that is refused, up to a bound, so that a client that sends first and reads
// afterwards finds its answer instead of a broken connection. One that waits for leave to send is not given it. It reports whether the
// body was read to its end.
func skip(r *http.Request) bool { return skipWithin(r, skippedBytes) }

func skipWithin(r *http.Request, most int64) bool {
	if r.Header.Get("Expect") != "" {
		return false
	}
	_, err := io.CopyN(io.Discard, r.Body, most)
	return err == io.EOF
}
