package serve

import (
	"context"
	"testing"
	"time"

	"leat/api/admit"
)

// BenchmarkCheckpoint is what solvers pay at every checkpoint.
func BenchmarkCheckpoint(b *testing.B) {
	ctx, cancel := context.WithCancel(b.Context())
	defer cancel()
	slot := admit.New(admit.Settings{Slots: 1}).Hold(admit.Long)
	if err := slot.Acquire(ctx); err != nil {
		b.Fatal(err)
	}
	checkpoint := checkpoints(ctx, time.Hour, func(int) *admit.Hold { return slot })(0)
	for b.Loop() {
		if checkpoint() != nil {
			b.Fatal("ended")
		}
	}
}
