package stream

import (
	"io"
	"sync/atomic"
	"time"
)

// Activity remembers when something last moved in either direction of a stream. Its methods may be called at any time
// from any goroutine.
type Activity struct {
	start    time.Time
	received atomic.Int64 // nanoseconds after start
	sent     atomic.Int64
}

// NewActivity starts with something having moved just now.
func NewActivity() *Activity { return &Activity{start: time.Now()} }

// Received notes that something came in.
func (a *Activity) Received() { a.received.Store(int64(time.Since(a.start))) }

// Sent notes that something went out.
func (a *Activity) Sent() { a.sent.Store(int64(time.Since(a.start))) }

// Silence is the time since something last came in.
func (a *Activity) Silence() time.Duration {
	return time.Since(a.start) - time.Duration(a.received.Load())
}

// Quiet is the time since something last moved in either direction.
func (a *Activity) Quiet() time.Duration {
	return time.Since(a.start) - time.Duration(max(a.received.Load(), a.sent.Load()))
}

// Reader returns r with each read that brought bytes noted.
func (a *Activity) Reader(r io.Reader) io.Reader { return activeReader{r, a} }

type activeReader struct {
	r io.Reader
	a *Activity
}

func (r activeReader) Read(p []byte) (int, error) {
	n, err := r.r.Read(p)
	if n > 0 {
		r.a.Received()
	}
	return n, err
}
