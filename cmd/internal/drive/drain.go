package drive

import (
	"context"
	"fmt"
	"slices"
	"strings"
	"time"
)

// drain is a profile of a drain of Ostermere with so many surveyed stations.
func drain(stations int) []byte {
	var b strings.Builder
	b.WriteString(`{"id":"OST-LOAD","discharge":7.57,"downstream":{"control":"normal"},"stations":[`)
	for i := range stations {
		if i > 0 {
			b.WriteByte(',')
		}
		level := 40 - 0.015*float64(i)
		fmt.Fprintf(&b, `{"chainage":%d,"roughness":{"manning":0.03},"section":{"kind":"surveyed","points":[`, 40*i)
		for j := range 15 {
			offset := float64(j) - 7
			fmt.Fprintf(&b, "[%g,%.3f],", offset, level+0.045*offset*offset+0.01*float64((i+3*j)%5))
		}
		fmt.Fprintf(&b, "[8,%.3f]]}}", level+3)
	}
	b.WriteString("]}")
	return []byte(b.String())
}

// aim finds a body whose request takes so long, by the least of some tries, while nothing else is sent.
func (d *drive) aim(ctx context.Context, t *target) error {
	stations := 20
	for range 8 {
		t.bytes = post(d.address, t.Path, drain(stations))
		took, err := d.time(ctx, t, 9)
		if err != nil {
			return err
		}
		ratio := t.TakeSeconds / took[0].Seconds() // the least: what else runs on the machine only adds
		if ratio > 0.93 && ratio < 1.07 {
			return nil
		}
		stations = min(max(2, int(float64(stations)*min(ratio, 8))), 10_000)
	}
	return nil
}

// time sends a request some times, one after another, and returns how long they took, the shortest first. It keeps the answer.
func (d *drive) time(ctx context.Context, t *target, times int) ([]time.Duration, error) {
	var took []time.Duration
	for range times {
		due := time.Now()
		r, err := d.client.send(ctx, t.bytes, due)
		if err != nil {
			return nil, fmt.Errorf("%s: %w", t.Name, err)
		}
		if r.status != 200 {
			return nil, fmt.Errorf("%s: status %d, must be 200 while nothing else is sent: %.300s", t.Name, r.status, r.body)
		}
		t.first = r.body
		took = append(took, time.Since(due))
	}
	slices.Sort(took)
	return took, nil
}
