package drive

import (
	"context"
	"fmt"
	"sync"
	"time"
)

// A watch is what became of the probes of a stage.
type watch struct {
	mutex  sync.Mutex
	took   histogram
	failed int64
	said   []string
}

// probe sends probes until the context ends, each over a connection of its own, as orchestrators do; they are due at fixed times, too.
func (d *drive) probe(ctx context.Context, p *Probes, w *watch) {
	var all sync.WaitGroup
	for _, path := range p.Paths {
		request := get(d.address, path, "Connection: close\r\n")
		all.Go(func() {
			ticker := time.NewTicker(seconds(p.EverySeconds))
			defer ticker.Stop()
			for {
				select {
				case <-ctx.Done():
					return
				case <-ticker.C:
					all.Go(func() { d.probeOnce(path, request, w) })
				}
			}
		})
	}
	all.Wait()
}

func (d *drive) probeOnce(path string, request []byte, w *watch) {
	due := time.Now()
	var r reply
	k, err := d.client.dial(context.Background())
	if err == nil {
		r, _, err = k.exchange(request, due)
		k.Close()
	}
	took := time.Since(due)
	w.mutex.Lock()
	defer w.mutex.Unlock()
	w.took.add(took)
	if err != nil || r.status != 200 {
		w.failed++
		if len(w.said) < 3 {
			w.said = append(w.said, fmt.Sprintf("%s: status %d, %v: %.200s", path, r.status, err, r.body))
		}
	}
}
