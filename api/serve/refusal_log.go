package serve

import (
	"context"
	"log/slog"
	"net/http"
	"sync"
	"time"
)

// refusalLines is how many requests that are refused since there is too much to do have a line of their own in the log in one second. In a storm of them
// writing the lines would take more than refusing; the metrics count all.
const refusalLines = 20

// isRefusal reports whether a status says that there is too much to do, and nothing else.
func isRefusal(status int) bool {
	return status == http.StatusServiceUnavailable || status == http.StatusTooManyRequests
}

// A refusalLog says which refusals are logged.
type refusalLog struct {
	mutex   sync.Mutex
	second  time.Duration // when the second that is counted began
	written int
	leftOut int64
}

// took counts a request that is over at a time since the start. It reports whether the request is to be logged, and how many refusals of seconds before were
// left out and not told yet.
func (l *refusalLog) took(at time.Duration, refused bool) (write bool, leftOut int64) {
	l.mutex.Lock()
	defer l.mutex.Unlock()
	if at-l.second >= time.Second {
		leftOut, l.leftOut = l.leftOut, 0
		l.second, l.written = at, 0
	}
	switch {
	case !refused:
		return true, leftOut
	case l.written < refusalLines:
		l.written++
		return true, leftOut
	}
	l.leftOut++
	return false, leftOut
}

// rest returns how many refusals were left out and not told yet.
func (l *refusalLog) rest() int64 {
	l.mutex.Lock()
	defer l.mutex.Unlock()
	leftOut := l.leftOut
	l.leftOut = 0
	return leftOut
}

// logLeftOut tells how many refusals have no line.
func (s *Server) logLeftOut(n int64) {
	if n > 0 {
		s.log.LogAttrs(context.Background(), slog.LevelWarn, "refusals were left out of the log", slog.Int64("lines_left_out", n))
	}
}
