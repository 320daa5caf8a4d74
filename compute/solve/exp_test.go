package solve

import (
	"math"
	"math/big"
	"math/rand/v2"
	"testing"
)

// referenceExp is e^x by its Taylor series in 200 bits, after halving x until it is small.
func referenceExp(x float64) *big.Float {
	const halvings = 40
	y := new(big.Float).SetPrec(300).SetFloat64(x)
	y.SetMantExp(y, -halvings)
	sum, term := new(big.Float).SetPrec(300).SetInt64(1), new(big.Float).SetPrec(300).SetInt64(1)
	for k := int64(1); k < 20; k++ {
		term.Mul(term, y)
		term.Quo(term, new(big.Float).SetPrec(300).SetInt64(k))
		sum.Add(sum, term)
	}
	for range halvings {
		sum.Mul(sum, sum)
	}
	return sum
}

func TestExp(t *testing.T) {
	r := rand.New(rand.NewPCG(7, 7))
	worst := 0.0
	for i := range 20000 {
		x := (r.Float64() - 0.5) * math.Ldexp(1, i%11)
		x = max(min(x, 700), -700)
		off := unitsOff(Exp(x), referenceExp(x))
		if !(off <= 1) {
			t.Fatalf("Exp(%v) is %v units off", x, off)
		}
		worst = max(worst, off)
	}
	t.Logf("worst: %.3f units in the last place", worst)
	for _, c := range []struct{ x, want float64 }{{0, 1}, {710, math.Inf(1)}, {-746, 0}, {math.Inf(-1), 0}, {math.Inf(1), math.Inf(1)}, {-745, 0x1p-1074}} {
		if got := Exp(c.x); got != c.want {
			t.Errorf("Exp(%v) = %v, want %v", c.x, got, c.want)
		}
	}
	if got := Exp(math.NaN()); got == got {
		t.Errorf("Exp(NaN) = %v", got)
	}
}

func BenchmarkExp(b *testing.B) {
	x := 0.37
	for b.Loop() {
		x = 0.3 + 0.1*Exp(-x)
	}
}

// The cube of x^(-1/3) times x is 1, in 300 bits.
func TestInverseCubeRoot(t *testing.T) {
	r := rand.New(rand.NewPCG(8, 8))
	worst := 0.0
	for i := range 20000 {
		x := math.Ldexp(1+r.Float64(), r.IntN(80)-40)
		if i%100 == 0 {
			x = math.Ldexp(1+r.Float64(), r.IntN(2000)-1000)
		}
		got := InverseCubeRoot(x)
		one := new(big.Float).SetPrec(300).SetFloat64(got)
		one.Mul(one, new(big.Float).Mul(one, one))
		one.Mul(one, new(big.Float).SetPrec(300).SetFloat64(x))
		off, _ := new(big.Float).Sub(one, new(big.Float).SetInt64(1)).Float64()
		units := math.Abs(off) / 3 * got / (math.Nextafter(got, math.Inf(1)) - got)
		if !(units <= 1.6) {
			t.Fatalf("InverseCubeRoot(%v) = %v is %v units off", x, got, units)
		}
		worst = max(worst, units)
	}
	t.Logf("worst: %.3f units in the last place", worst)
	for _, c := range []struct{ x, want float64 }{{0, math.Inf(1)}, {1, 1}, {8, 0.5}, {1e-300, 1e100}, {math.Inf(1), 0}} {
		if got := InverseCubeRoot(c.x); !(got == c.want || math.Abs(got/c.want-1) <= 5e-16) {
			t.Errorf("InverseCubeRoot(%v) = %v, want %v", c.x, got, c.want)
		}
	}
	if got := InverseCubeRoot(math.NaN()); got == got {
		t.Errorf("InverseCubeRoot(NaN) = %v", got)
	}
}

func BenchmarkInverseCubeRoot(b *testing.B) {
	x := 0.37
	for b.Loop() {
		x = 0.3 + 0.1*InverseCubeRoot(x)
	}
}
