package stream

import (
	"bytes"
	"context"
	"strings"
	"sync"
	"testing"
)

// TestStreamsSideBySide runs many small streams at once, which use each other's pages and batches again.
func TestStreamsSideBySide(t *testing.T) {
	const streams, rounds, size = 8, 20, 400
	body := numbered(size)
	var all sync.WaitGroup
	for range streams {
		all.Go(func() {
			for range rounds {
				var out bytes.Buffer
				summary, err := newPump(strings.NewReader(body), &out).Run(context.Background())
				if err != nil {
					t.Error(err)
					return
				}
				answers := bytes.Split(bytes.TrimSuffix(out.Bytes(), []byte("\n")), []byte("\n"))
				if summary.Lines != size || len(answers) != size+2 || !bytes.Equal(answers[size], []byte("400 text 400")) {
					t.Errorf("%d lines, %d answers, the last %q", summary.Lines, len(answers), answers[len(answers)-2])
					return
				}
			}
		})
	}
	all.Wait()
}
