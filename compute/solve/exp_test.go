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
