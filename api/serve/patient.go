package serve

import (
	"fmt"
	"io"
	"sync/atomic"
	"time"
)

// logLines is how many lines of the log may wait for whoever takes them; a few megabytes.
const logLines = 8192

// A PatientLog hands lines on to a writer that may stand still, such as a pipe that nobody reads, without having anybody wait: what does not fit is dropped and counted, and the
// next line that fits is preceded by one that says how many are missing.
type PatientLog struct {
	lines   chan []byte
	dropped atomic.Int64
	done    chan struct{} // closed when the writing has ended
}

// NewPatientLog begins to hand lines on to w; each Write must be one or more whole lines.
func NewPatientLog(w io.Writer) *PatientLog {
	l := &PatientLog{lines: make(chan []byte, logLines), done: make(chan struct{})}
	go func() {
		defer close(l.done)
		for {
			line := <-l.lines
			if n := l.dropped.Swap(0); n > 0 {
				fmt.Fprintf(w, "{\"time\":%q,\"level\":\"WARN\",\"message\":\"the log was not taken in time\",\"lines_lost\":%d}\n", time.Now().UTC().Format(time.RFC3339Nano), n)
			}
			if line == nil {
				return
			}
			w.Write(line) // a log that cannot be written is no reason to stop
		}
	}()
	return l
}

// Write takes over a copy of the lines; it never waits and never fails.
func (l *PatientLog) Write(lines []byte) (int, error) {
	select {
	case l.lines <- append([]byte(nil), lines...):
	default:
		l.dropped.Add(1)
	}
	return len(lines), nil
}

// Close waits until all lines so far are written, at most for a limit. What is written after it is lost.
func (l *PatientLog) Close(limit time.Duration) {
	timer := time.NewTimer(limit)
	defer timer.Stop()
	select {
	case l.lines <- nil:
	case <-timer.C:
		return
	}
	select {
	case <-l.done:
	case <-timer.C:
	}
}
