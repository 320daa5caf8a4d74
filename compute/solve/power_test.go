package solve

import (
	"math"
	"math/big"
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
		third, _ := referencePower(x, 1).Float64()
		cube := big.NewFloat(third)
		cube.SetPrec(200).Mul(cube, cube)
		r := TwoThirds(x)
		back := new(big.Float).SetPrec(200).SetFloat64(r)
		back.Mul(back, new(big.Float).Mul(back, back))
		// (x^(2/3))^3 = x^2, and a relative error is tripled by the cube.
		ratio, _ := new(big.Float).Quo(back, cube).Float64()
		if !(math.Abs(ratio-1) <= 3*5e-16) {
			t.Fatalf("TwoThirds(%v) = %v", x, r)
		}
	})
	t.Logf("worst: %.3f units in the last place", worst)
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
