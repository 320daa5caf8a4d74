package section

import (
	"fmt"
	"hash/fnv"
	"math"
	"os"
	"os/exec"
	"strings"
	"testing"
)

// bitsOfMany returns a hash of the bits of many geometries of every kind.
func bitsOfMany() string {
	hash := fnv.New64a()
	for _, s := range samples {
		for i := range 2000 {
			g := s.section.At(reach(s.section) * (float64(i) + 0.5) / 2000)
			for _, v := range [...]float64{g.Area, g.Perimeter, g.TopWidth, g.Moment, g.PerimeterRate, g.TopWidthRate} {
				fmt.Fprintf(hash, "%016x", math.Float64bits(v))
			}
		}
	}
	return fmt.Sprintf("%016x", hash.Sum64())
}

// The same numbers come out bit for bit on a processor that has no fused or vector instructions beyond the baseline: the test
// runs itself again with them switched off.
func TestBitsDoNotDependOnTheProcessor(t *testing.T) {
	const asked = "SECTION_BITS"
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
