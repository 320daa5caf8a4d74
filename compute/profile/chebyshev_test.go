package profile

import (
	"math"
	"testing"
)

// e^(2t) and its integral from -1, which the series resolves to the last places.
func TestAntiderivative(t *testing.T) {
	f := func(x float64) float64 { return math.Exp(2 * x) }
	integral := func(x float64) float64 { return (math.Exp(2*x) - math.Exp(-2)) / 2 }
	var values [terms]float64
	for j, x := range points {
		values[j] = f(x)
	}
	var a antiderivative
	if tail := a.integrate(&values); !(tail < 1e-12 && tail > 0) {
		t.Errorf("tail %.1e", tail)
	}
	if got := a.whole(); !(math.Abs(got-integral(1)) <= 2e-13) {
		t.Errorf("whole %v, want %v", got, integral(1))
	}
	for i := range 201 {
		x := -1 + float64(i)/100
		value, slope := a.at(x)
		if !(math.Abs(value-integral(x)) <= 2e-13) || !(math.Abs(slope-f(x)) <= 2e-11) {
			t.Errorf("at %v: %v, %v, want %v, %v", x, value, slope, integral(x), f(x))
		}
		if v, r, bend := a.bent(x); !(math.Abs(v-value) <= 1e-14) || !(math.Abs(r-slope) <= 1e-12) || !(math.Abs(bend-2*f(x)) <= 1e-8) {
			t.Errorf("at %v: %v, %v, %v, want %v, %v, %v", x, v, r, bend, value, slope, 2*f(x))
		}
		for _, guess := range [4]float64{x, x - 1e-3, x + 1e-3, x - 3e-3} {
			if i == 0 || i == 200 {
				continue // the root may lie beyond by the last places
			}
			if root, _, ok := a.follow(value, guess); ok == (guess < -1 || guess > 1) || ok && !(math.Abs(root-x) <= 1e-14) {
				t.Errorf("followed from %v: %v, want %v", guess, root, x)
			}
		}
		for _, guess := range [4]float64{-1, x, 0.3, 1} {
			if root := a.invert(value, a.whole(), guess); !(math.Abs(root-x) <= 1e-14) {
				t.Errorf("from %v: %v, want %v", guess, root, x)
			}
		}
	}
}

// Next to an end where the function stands still its slope tells nothing: the steps there must not be trusted.
func TestInvertWhereNothingMoves(t *testing.T) {
	var values [terms]float64
	for j, x := range points {
		values[j] = -600 * (x + 1)
	}
	var a antiderivative
	a.integrate(&values)
	whole := a.whole()
	for k := range 400 {
		want := whole * math.Ldexp(1, -k/4)
		got := a.invert(want, whole, 2*want/whole-1)
		if off := 300 * (got + 1) * (got + 1) / -want; !(math.Abs(300*(got+1)*(got+1)+want) <= 1e-12) {
			t.Errorf("%v: %v, %v of it", want, got, off)
		}
	}
}

// A Legendre series and what is made of it are one function.
func TestLegendreInChebyshev(t *testing.T) {
	s := series{1, -0.5, 0.25, 3, -2, 0.125, 0.7, 0.6, -0.3, 0.2, 0.1, -0.9}
	a := s.antiderivative()
	for i := range 21 {
		x := -1 + float64(i)/10
		want, rate := s.integral(x)
		if value, slope := a.at(x); !(math.Abs(value-want) <= 1e-14) || !(math.Abs(slope-rate) <= 1e-12) {
			t.Errorf("at %v: %v, %v, want %v, %v", x, value, slope, want, rate)
		}
	}
}
