package flow

import (
	"math/rand/v2"
	"testing"

	"leat/compute/friction/frictiontest"
)

// No solver allocates, whatever the section and the law.
func TestSolversDoNotAllocate(t *testing.T) {
	tried := 0
	for seed := range uint64(200) {
		r := rand.New(rand.NewPCG(seed, 5))
		kind := r.IntN(len(frictiontest.Kinds))
		c, q, err := randomChannel(r, kind)
		if err != nil {
			continue
		}
		tried++
		var room Room
		d := c.Depths(q, &room)
		if len(d.Normal) > len(room.normal) || len(d.Critical) > len(room.critical) {
			continue // more depths than there is room for
		}
		depth := 0.3
		if height := c.Section.Height(); depth > height {
			depth = height / 2
		}
		n := testing.AllocsPerRun(3, func() {
			d := c.Depths(q, &room)
			s := c.State(depth, q)
			alternate, _ := c.Alternate(q, depth)
			sequent, _ := c.Sequent(q, depth)
			sink += d.CriticalSlope + s.Velocity + alternate + sequent
		})
		if n != 0 {
			t.Errorf("seed %d: %s with %T: %v allocations", seed, frictiontest.Kinds[kind].Name, c.Law, n)
		}
	}
	if tried < 150 {
		t.Errorf("%d channels only", tried)
	}
}
