package flow

import (
	"fmt"
	"hash/fnv"
	"math"
	"math/rand/v2"
	"os"
	"os/exec"
	"strings"
	"testing"

	"leat/compute/friction/frictiontest"
)

// bitsOfMany returns a hash of the bits of the depths of many random channels of every kind and law.
func bitsOfMany() string {
	hash := fnv.New64a()
	add := func(values ...float64) {
		for _, v := range values {
			fmt.Fprintf(hash, "%016x", math.Float64bits(v))
		}
	}
	for seed := range uint64(3000) {
		r := rand.New(rand.NewPCG(seed, 3))
		c, q, err := randomChannel(r, r.IntN(len(frictiontest.Kinds)))
		if err != nil {
			continue
		}
		var room Room
		d := c.Depths(q, &room)
		add(d.Normal...)
		add(d.Critical...)
		add(d.CriticalSlope, d.Capacity.Discharge, d.Capacity.Depth)
		for _, y := range d.Critical {
			alternate, _ := c.Alternate(q, 0.7*y)
			sequent, _ := c.Sequent(q, 0.7*y)
			s := c.State(0.7*y, q)
			add(alternate, sequent, s.FroudeNumber, s.SpecificForce, s.FrictionSlope)
		}
	}
	return fmt.Sprintf("%016x", hash.Sum64())
}

// The same numbers come out bit for bit on a processor without fused or vector instructions beyond the baseline: the test runs itself
// again with them switched off.
func TestBitsDoNotDependOnTheProcessor(t *testing.T) {
	const asked = "FLOW_BITS"
	if os.Getenv(asked) != "" {
		fmt.Println(bitsOfMany())
		return
	}
	self, err := os.Executable()
	if err != nil {
		t.Fatal(err)
	}
	want := bitsOfMany() + "\n"
	for _, setting := range []string{"cpu.fma=off", "cpu.all=off"} {
		c := exec.Command(self, "-test.run=^TestBitsDoNotDependOnTheProcessor$", "-test.count=1")
		c.Env = append(os.Environ(), "GODEBUG="+setting, asked+"=1")
		got, err := c.Output()
		if err != nil {
			t.Fatalf("%s: %v", setting, err)
		}
		if !strings.HasPrefix(string(got), want) {
			t.Errorf("%s: %q, want %q", setting, got, want)
		}
	}
}
