package profile

import (
	"math"
	"testing"

	"leat/compute/flow"
	"leat/compute/friction"
	"leat/compute/section"
)

func trapezoid(t testing.TB, b, z, n, slope float64) *flow.Channel {
	t.Helper()
	s, err := section.NewTrapezoidal(b, z, z)
	if err != nil {
		t.Fatal(err)
	}
	law, err := friction.NewManning(n)
	if err != nil {
		t.Fatal(err)
	}
	return &flow.Channel{Section: s, Law: law, Slope: slope, Gravity: 9.80665}
}

// stepped integrates ddepth/dx by Runge and Kutta's classical method: slow, but another way.
func stepped(c *flow.Channel, q, y, from, to float64, n int) float64 {
	m := c.Motion(q)
	f := func(y float64) float64 {
		g := c.Section.At(y)
		return (c.Slope - m.FrictionSlope(g)) / m.EnergyRate(g)
	}
	h := (to - from) / float64(n)
	for range n {
		a := f(y)
		b := f(y + h/2*a)
		d := f(y + h/2*b)
		e := f(y + h*d)
		y += h / 6 * (a + 2*b + 2*d + e)
	}
	return y
}

func TestCurvesAgainstRungeKutta(t *testing.T) {
	for _, k := range []struct {
		name        string
		slope       float64
		depth       float64
		direction   float64
		subcritical bool
		length      float64
	}{
		{"M1", 0.001, 2.5, upstream, true, 3000},
		{"M1 long", 0.001, 2.5, upstream, true, 30000},
		{"M1 near normal", 0.001, 1.2459868499195894 * (1 + 1e-9), upstream, true, 300},
		{"M2", 0.001, 0.9, upstream, true, 500},
		{"M3", 0.001, 0.2, downstream, false, 10},
		{"S1", 0.05, 1.2, upstream, true, 5},
		{"S2", 0.05, 0.65, downstream, false, 100},
		{"S3", 0.05, 0.2, downstream, false, 100},
		{"H2", 0, 0.9, upstream, true, 500},
		{"H3", 0, 0.2, downstream, false, 10},
		{"A2", -0.001, 0.9, upstream, true, 500},
		{"A3", -0.001, 0.2, downstream, false, 10},
	} {
		c := trapezoid(t, 2, 1.5, 0.025, k.slope)
		p, err := newPrismatic(c, 5, k.length, nil, new(memory))
		if err != nil {
			t.Fatal(err)
		}
		begin := 0.0
		if k.direction == upstream {
			begin = k.length
		}
		tr, err := p.sweep(begin, k.depth, k.direction, k.subcritical)
		if err != nil {
			t.Fatal(k.name, err)
		}
		far := k.length - begin
		worst := 0.0
		for i := range 5 {
			x := begin + (far-begin)*float64(i+1)/5
			want := stepped(c, 5, k.depth, begin, x, 40000)
			worst = max(worst, math.Abs(tr.depth(x)/want-1))
		}
		t.Logf("%s: %d panels, whole %v, last %v, worst %.1e", k.name, len(tr.panels), tr.whole, tr.last, worst)
		if !(worst < 1e-11) {
			t.Errorf("%s: off by %.1e", k.name, worst)
		}
	}
}

func BenchmarkM1(b *testing.B) {
	c := trapezoid(b, 2, 1.5, 0.025, 0.001)
	b.ReportAllocs()
	for b.Loop() {
		p, _ := newPrismatic(c, 5, 3000, nil, new(memory))
		tr, _ := p.sweep(3000, 2.5, upstream, true)
		for i := range 100 {
			sink += tr.depth(30 * float64(i))
		}
	}
}

var sink float64
