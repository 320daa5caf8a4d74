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
		guess := root * math.Ldexp(1, rapid.IntRange(-8, 8).Draw(t, "off"))
		cube := root * root * root
		f := func(x float64) (float64, float64) {
			return (x - root) * (x*x + x*root + root*root) / cube, 3 * x * x / cube
		}
		x, n, ok := Root(f, root*1e-12, root*1e12, guess)
		if !ok || !(math.Abs(x-root) <= root*0x1p-52) || n > 40 {
			t.Fatalf("Root: %v for %v after %d, %v", x, root, n, ok)
		}
		g := func(x float64) float64 { v, _ := f(x); return v }
		x, n, ok = RootSlopeless(g, root*1e-12, root*1e12)
		if !ok || !(math.Abs(x-root) <= root*0x1p-52) || n > 140 {
			t.Fatalf("RootSlopeless: %v for %v after %d, %v", x, root, n, ok)
		}
	})
}

// Kepler's equation E - 0.5 sin E = 1 has E = 1.4987011335178482 (by the Bessel series to 30 digits).
func TestRootOfKepler(t *testing.T) {
	const want = 1.4987011335178482
	x, n, ok := Root(func(x float64) (float64, float64) { return x - 0.5*math.Sin(x) - 1, 1 - 0.5*math.Cos(x) }, 0, 3, 1)
	if !ok || !(math.Abs(x-want) <= 4e-16) || n > 10 {
		t.Errorf("Root: %v after %d, %v", x, n, ok)
	}
	x, n, ok = RootSlopeless(func(x float64) float64 { return x - 0.5*math.Sin(x) - 1 }, 0, 3)
	if !ok || !(math.Abs(x-want) <= 4e-16) || n > 16 {
		t.Errorf("RootSlopeless: %v after %d, %v", x, n, ok)
	}
}

func TestRootRefusals(t *testing.T) {
	square := func(x float64) (float64, float64) { return x*x + 1, 2 * x }
	broken := func(x float64) (float64, float64) {
		if x > 0.3 && x < 0.7 {
			return math.NaN(), math.NaN()
		}
		return x - 0.5, 1
	}
	for name, f := range map[string]func(float64) (float64, float64){"no change of sign": square, "not a number": broken} {
		if _, _, ok := Root(f, 0, 1, 0.5); ok {
			t.Errorf("Root took %s", name)
		}
		if _, _, ok := RootSlopeless(func(x float64) float64 { v, _ := f(x); return v }, 0, 1); ok {
			t.Errorf("RootSlopeless took %s", name)
		}
	}
	if _, _, ok := Root(square, 1, 0, 0.5); ok {
		t.Error("Root took an empty bracket")
	}
}

// A wrong slope and a jump must not keep the search from closing in.
func TestRootWithBadSlopesAndJumps(t *testing.T) {
	for _, slope := range []float64{0, math.NaN(), math.Inf(1), -1, 1e-300, 1e300, 0.3} {
		x, n, ok := Root(func(x float64) (float64, float64) { return x*x - 2, slope }, 0, 5, 4)
		if !ok || !(math.Abs(x-math.Sqrt2) <= 4e-16) && !math.IsInf(slope, 0) && slope != 1e300 || n > 200 {
			t.Errorf("slope %v: %v after %d, %v", slope, x, n, ok)
		}
	}
	x, _, ok := Root(func(x float64) (float64, float64) {
		if x < 1 {
			return -1, 0
		}
		return 2, 0
	}, 0, 5, 4)
	if !ok || !(math.Abs(x-1) <= 0x1p-52) {
		t.Errorf("jump: %v, %v", x, ok)
	}
}

func TestRootsDoNotAllocate(t *testing.T) {
	c := 2.0
	if n := testing.AllocsPerRun(100, func() {
		x, _, _ := Root(func(x float64) (float64, float64) { return x*x - c, 2 * x }, 0, 5, 1)
		y, _, _ := RootSlopeless(func(x float64) float64 { return x*x - c }, 0, 5)
		c = 2 + 0.1*(x-y)
	}); n != 0 {
		t.Errorf("%v allocations", n)
	}
}

func BenchmarkRoot(b *testing.B) {
	c := 2.0
	for b.Loop() {
		Root(func(x float64) (float64, float64) { return x*x*x - c, 3 * x * x }, 0.1, 5, 1)
	}
}

func BenchmarkRootSlopeless(b *testing.B) {
	c := 2.0
	for b.Loop() {
		RootSlopeless(func(x float64) float64 { return x*x*x - c }, 0.1, 5)
	}
}
