package solve

import (
	"math"
	"math/big"
	"testing"

	"pgregory.net/rapid"
)

func exact(p Pair) *big.Float {
	return new(big.Float).SetPrec(400).Add(big.NewFloat(p.High).SetPrec(400), big.NewFloat(p.Low).SetPrec(400))
}

// Pairs agree with math/big to 2^-100 of the operands (sums and differences of numbers and products exactly).
func TestPairs(t *testing.T) {
	number := func(t *rapid.T, name string) float64 {
		return math.Ldexp(rapid.Float64Range(1, 2).Draw(t, name), rapid.IntRange(-40, 40).Draw(t, name+" binade")) * float64(1-2*rapid.IntRange(0, 1).Draw(t, name+" sign"))
	}
	rapid.Check(t, func(t *rapid.T) {
		a, b, c, d := number(t, "a"), number(t, "b"), number(t, "c"), number(t, "d")
		wide := func() *big.Float { return new(big.Float).SetPrec(400) }
		p, q := Sum(a, b), Sum(c, d)
		if exact(p).Cmp(wide().Add(big.NewFloat(a), big.NewFloat(b))) != 0 || p.Value() != a+b {
			t.Fatalf("%v + %v = %v", a, b, p)
		}
		if exact(Difference(a, b)).Cmp(wide().Sub(big.NewFloat(a), big.NewFloat(b))) != 0 {
			t.Fatalf("%v - %v = %v", a, b, Difference(a, b))
		}
		if exact(Product(a, b)).Cmp(wide().Mul(big.NewFloat(a), big.NewFloat(b))) != 0 {
			t.Fatalf("%v * %v = %v", a, b, Product(a, b))
		}
		near := func(name string, got Pair, want *big.Float, scale float64) {
			off, _ := wide().Sub(exact(got), want).Float64()
			if !(math.Abs(off) <= 0x1p-100*math.Abs(scale)) {
				t.Fatalf("%s of %v and %v: %v is off by %v", name, p, q, got, off)
			}
		}
		if p.High == 0 || q.High == 0 {
			return
		}
		size := math.Abs(p.High) + math.Abs(q.High)
		near("sum", p.Add(q), wide().Add(exact(p), exact(q)), size)
		near("difference", p.Subtract(q), wide().Sub(exact(p), exact(q)), size)
		near("sum with a number", p.Plus(c), wide().Add(exact(p), big.NewFloat(c)), math.Abs(p.High)+math.Abs(c))
		near("product with a number", p.Times(c), wide().Mul(exact(p), big.NewFloat(c)), p.High*c)
		near("quotient", p.Divide(q), wide().Quo(exact(p), exact(q)), p.High/q.High)
		if p.Less(q) != (exact(p).Cmp(exact(q)) < 0) || p.Less(p) {
			t.Fatalf("%v < %v", p, q)
		}
	})
}
