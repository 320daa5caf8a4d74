package serve

import (
	"bytes"
	"fmt"
	"io"
	"strings"
	"testing"
	"time"
)

func TestPatientLog(t *testing.T) {
	reader, writer := io.Pipe() // takes nothing until it is read
	l := NewPatientLog(writer)
	const sent = logLines + 500
	for i := range sent {
		if n, err := fmt.Fprintf(l, "line %d\n", i); n == 0 || err != nil {
			t.Fatalf("%d %v", n, err)
		}
	}
	var out bytes.Buffer
	copied := make(chan struct{})
	go func() { io.Copy(&out, reader); close(copied) }()
	l.Close(10 * time.Second)
	writer.Close()
	<-copied
	written := strings.Count(out.String(), "line ")
	var lost int
	for line := range strings.Lines(out.String()) {
		if _, after, found := strings.Cut(line, `"lines_lost":`); found {
			var n int
			fmt.Sscan(strings.TrimRight(after, "}\n"), &n)
			lost += n
		}
	}
	if lost < 400 || written+lost != sent {
		t.Errorf("%d lines written and %d told to be lost, of %d", written, lost, sent)
	}
}

func TestPatientLogEndsInTime(t *testing.T) {
	_, writer := io.Pipe()
	l := NewPatientLog(writer)
	fmt.Fprintln(l, "nobody reads this")
	began := time.Now()
	l.Close(50 * time.Millisecond)
	if waited := time.Since(began); waited > 5*time.Second {
		t.Errorf("closing took %s", waited)
	}
	writer.CloseWithError(io.ErrClosedPipe)
	<-l.done
}
