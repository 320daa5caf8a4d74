package solve

import (
	"math"
	"math/big"
	"math/rand/v2"
	"testing"

	"pgregory.net/rapid"
)

// x^(p/2^q) by repeated square roots and products with 200 bits of math/big is exact beyond any float64.
func referencePower(x float64, y float64) *big.Float {
	const precision = 200
	invert := y < 0
	y = math.Abs(y)
	whole := math.Floor(y)
	result := new(big.Float).SetPrec(precision).SetInt64(1)
	base := new(big.Float).SetPrec(precision).SetFloat64(x)
	square := new(big.Float).Copy(base)
	for n := uint64(whole); n > 0; n >>= 1 {
		if n&1 == 1 {
			result.Mul(result, square)
		}
		square.Mul(square, square)
	}
	root := new(big.Float).Copy(base)
	for rest := y - whole; rest > 0; {
		root.Sqrt(root)
		rest *= 2
		if rest >= 1 {
			result.Mul(result, root)
			rest--
		}
	}
	if invert {
		result.Quo(new(big.Float).SetPrec(precision).SetInt64(1), result)
	}
	return result
}

func unitsOff(got float64, want *big.Float) float64 {
	nearest, _ := want.Float64()
	off := new(big.Float).Sub(new(big.Float).SetPrec(200).SetFloat64(got), want)
	units, _ := off.Float64()
	return math.Abs(units) / (math.Nextafter(math.Abs(nearest), math.Inf(1)) - math.Abs(nearest))
}

func TestPowers(t *testing.T) {
	worst := 0.0
	rapid.Check(t, func(t *rapid.T) {
		x := math.Ldexp(1+rapid.Float64Range(0, 1).Draw(t, "mantissa"), rapid.IntRange(-50, 50).Draw(t, "binade"))
		y := rapid.Float64Range(-12, 12).Draw(t, "power")
		want := referencePower(x, y)
		off := unitsOff(Power(x, y), want)
		if !(off <= 1.01) {
			t.Fatalf("Power(%v, %v) is %v units off", x, y, off)
		}
		worst = math.Max(worst, off)
	})
	t.Logf("worst: %.3f units in the last place", worst)
}

// (x^(2/3))^3 is x^2, and the cube triples a relative error: that of TwoThirds in units of its last place, by math/big over all mantissas and thirds of an exponent.
func TestTwoThirds(t *testing.T) {
	exact := func(x float64) *big.Float { return new(big.Float).SetPrec(200).SetFloat64(x) }
	worst := 0.0
	r := rand.New(rand.NewPCG(2, 3))
	for range 50_000 {
		x := math.Ldexp(1+r.Float64(), r.IntN(1900)-950)
		got := TwoThirds(x)
		cube, square := exact(got), exact(x)
		cube.Mul(cube, cube).Mul(cube, exact(got))
		square.Mul(square, square)
		off, _ := cube.Quo(cube.Sub(cube, square), square).Float64()
		worst = max(worst, math.Abs(off/3)*got/(math.Nextafter(got, math.Inf(1))-got))
	}
	if !(worst <= 0.9) {
		t.Errorf("%.3f units in the last place", worst)
	}
	for _, c := range [...][2]float64{{0, 0}, {1, 1}, {8, 4}, {27, 9}, {0.125, 0.25}, {0x1p-1074, 0x1p-716}, {0x1p999, 0x1p666}, {math.Inf(1), math.Inf(1)}} {
		if got := TwoThirds(c[0]); !(got == c[1] || math.Abs(got/c[1]-1) <= 1e-15) {
			t.Errorf("TwoThirds(%v) = %v, want %v", c[0], got, c[1])
		}
	}
}

func TestPowerAtItsEdges(t *testing.T) {
	for _, c := range []struct{ x, y, want float64 }{{1, 1e300, 1}, {7, 0, 1}, {2, 1023, 0x1p1023}, {2, -1074, 0x1p-1074}, {2, 1024, math.Inf(1)}, {2, -1080, 0},
		{0.5, -3, 8}, {4, 0.5, 2}, {1e-300, 1e10, 0}, {math.Nextafter(1, 2), 0x1p52, math.E}} {
		if got := Power(c.x, c.y); !(got == c.want || math.Abs(got/c.want-1) <= 3e-16) {
			t.Errorf("Power(%v, %v) = %v, want %v", c.x, c.y, got, c.want)
		}
	}
	for _, x := range []float64{0, -1, math.NaN(), math.Inf(1)} {
		if got := Power(x, 0.5); got == got {
			t.Errorf("Power(%v, 0.5) = %v", x, got)
		}
	}
}

func BenchmarkPower(b *testing.B) {
	x := 0.37
	for b.Loop() {
		x = 0.3 + 0.1*Power(x, 1.7)
	}
}

func BenchmarkTwoThirds(b *testing.B) {
	x := 0.37
	for b.Loop() {
		x = 0.3 + 0.1*TwoThirds(x)
	}
}
