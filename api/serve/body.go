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
	room   int64
	held   atomic.Int64
	first  sync.Pool // of buffers of firstBuffer bytes
	second sync.Pool // of keptBuffer
}

// A body begins in a buffer of firstBuffer bytes, which most requests do not fill and which is what one that never comes takes up. One that does goes to
// a buffer of keptBuffer; larger ones are not kept for reuse.
const (
	firstBuffer = 2 << 10
	keptBuffer  = 16 << 10
)

func newLarder(room int64) *larder {
	return &larder{
		room:   room,
		first:  sync.Pool{New: func() any { return new([firstBuffer]byte) }},
		second: sync.Pool{New: func() any { return new([keptBuffer]byte) }},
	}
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
	first  *[firstBuffer]byte // to give back
	second *[keptBuffer]byte  // to give back
}

func (b *body) release() {
	b.larder.held.Add(-b.held)
	b.held = 0
	b.bytes = nil
	if b.first != nil {
		b.larder.first.Put(b.first)
		b.first = nil
	}
	if b.second != nil {
		b.larder.second.Put(b.second)
		b.second = nil
	}
}

// grow moves the body to a larger buffer, of at most about most bytes, and reports whether there was room.
func (b *body) grow(most int64) bool {
	old := b.bytes
	size := int64(keptBuffer)
	if b.first == nil {
		size = min(2*int64(cap(old)), most)
	}
	if size <= int64(cap(old)) {
		return true
	}
	if !b.larder.take(size - b.held) {
		return false
	}
	b.held = size
	if b.first != nil {
		b.second = b.larder.second.Get().(*[keptBuffer]byte)
		b.bytes = append(b.second[:0], old...)
		b.larder.first.Put(b.first)
		b.first = nil
		return true
	}
	b.bytes = append(make([]byte, 0, size), old...)
	if b.second != nil {
		b.larder.second.Put(b.second)
		b.second = nil
	}
	return true
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
	if !l.take(firstBuffer) {
		skip(r)
		return b, fullHouse()
	}
	b.held = firstBuffer
	b.first = l.first.Get().(*[firstBuffer]byte)
	b.bytes = b.first[:0]
	for {
		if len(b.bytes) == cap(b.bytes) && !b.grow(limit.bytes+1) { // the byte beyond the limit tells exactly full from too much
			b.release()
			skip(r)
			return b, fullHouse()
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
