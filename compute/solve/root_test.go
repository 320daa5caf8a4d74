package solve

import (
	"math"
	"testing"

	"pgregory.net/rapid"
)

// A power of x has a root that is known exactly; the search must end within a unit in the last place of it over many decades.
func TestRootsOfPowers(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		root := math.Ldexp(1+rapid.Float64Range(0, 1).Draw(t, "mantissa"), rapid.IntRange(-60, 60).Draw(t, "binade"))
		cube := root * root * root
		f := func(x float64) float64 { return (x - root) * (x*x + x*root + root*root) / cube }
		x, n, ok := RootSlopeless(f, root*1e-12, root*1e12)
		if !ok || !(math.Abs(x-root) <= root*0x1p-52) || n > 140 {
			t.Fatalf("%v for %v after %d, %v", x, root, n, ok)
		}
	})
}

// Kepler's equation E - 0.5 sin E = 1 has E = 1.4987011335178482 (by the Bessel series to 30 digits).
func TestRootOfKepler(t *testing.T) {
	const want = 1.4987011335178482
	x, n, ok := RootSlopeless(func(x float64) float64 { return x - 0.5*math.Sin(x) - 1 }, 0, 3)
	if !ok || !(math.Abs(x-want) <= 4e-16) || n > 16 {
		t.Errorf("%v after %d, %v", x, n, ok)
	}
}

func TestRootRefusals(t *testing.T) {
	square := func(x float64) float64 { return x*x + 1 }
	broken := func(x float64) float64 {
		if x > 0.3 && x < 0.7 {
			return math.NaN()
		}
		return x - 0.5
	}
	for name, f := range map[string]func(float64) float64{"no change of sign": square, "not a number": broken} {
		if _, _, ok := RootSlopeless(f, 0, 1); ok {
			t.Errorf("it took %s", name)
		}
	}
	if _, _, ok := RootSlopeless(func(x float64) float64 { return x - 0.5 }, 1, 0); ok {
		t.Error("it took an empty bracket")
	}
}

// A jump must not keep the search from closing in.
func TestRootAtAJump(t *testing.T) {
	x, _, ok := RootSlopeless(func(x float64) float64 {
		if x < 1 {
			return -1
		}
		return 2
	}, 0, 5)
	if !ok || !(math.Abs(x-1) <= 0x1p-52) {
		t.Errorf("jump: %v, %v", x, ok)
	}
}

func TestRootsDoNotAllocate(t *testing.T) {
	c := 2.0
	if n := testing.AllocsPerRun(100, func() {
		y, _, _ := RootSlopeless(func(x float64) float64 { return x*x - c }, 0, 5)
		c = 2 + 0.1*(1.4-y)
	}); n != 0 {
		t.Errorf("%v allocations", n)
	}
}

func BenchmarkRootSlopeless(b *testing.B) {
	c := 2.0
	for b.Loop() {
		RootSlopeless(func(x float64) float64 { return x*x*x - c }, 0.1, 5)
	}
}
