package solve

// A Pair is a number in about twice the precision of a float64: the unevaluated sum of two, Low at most half a unit in
// the last place of High (T. J. Dekker, A floating-point technique for extending the available precision,
// Numerische Mathematik 18, 1971).
type Pair struct{ High, Low float64 }

// Value returns the pair rounded to a float64.
func (p Pair) Value() float64 { return p.High + p.Low }

// Sum returns a + b exactly, as long as nothing overflows (D. E. Knuth, The Art of Computer Programming, volume 2, section 4.2.2).
func Sum(a, b float64) Pair {
	s := a + b
	t := s - a
	return Pair{s, (a - (s - t)) + (b - t)}
}

// Difference returns a - b exactly, as long as nothing overflows.
func Difference(a, b float64) Pair { return Sum(a, -b) }

// Product returns a * b exactly, as long as nothing over- or underflows: by splitting both into halves (Dekker 1971).
func Product(a, b float64) Pair {
	const splitter = 1<<27 + 1
	p := a * b
	t := splitter * a
	a1 := t - (t - a)
	a2 := a - a1
	t = splitter * b
	b1 := t - (t - b)
	b2 := b - b1
	return Pair{p, ((a1*b1 - p) + a1*b2 + a2*b1) + a2*b2}
}

// Plus returns p + x.
func (p Pair) Plus(x float64) Pair {
	s := Sum(p.High, x)
	return fast(s.High, s.Low+p.Low)
}

// Add returns p + q.
func (p Pair) Add(q Pair) Pair {
	s := Sum(p.High, q.High)
	t := Sum(p.Low, q.Low)
	s = fast(s.High, s.Low+t.High)
	return fast(s.High, s.Low+t.Low)
}

// Subtract returns p - q.
func (p Pair) Subtract(q Pair) Pair { return p.Add(Pair{-q.High, -q.Low}) }

// Times returns p * x.
func (p Pair) Times(x float64) Pair {
	m := Product(p.High, x)
	return fast(m.High, m.Low+p.Low*x)
}

// Divide returns p / q.
func (p Pair) Divide(q Pair) Pair {
	c := p.High / q.High
	m := q.Times(c)
	rest := ((p.High - m.High) - m.Low) + p.Low
	return fast(c, rest/q.High)
}

// Less reports p < q.
func (p Pair) Less(q Pair) bool { return p.High < q.High || p.High == q.High && p.Low < q.Low }

// fast returns the pair of a + b where the size of a is not below that of b.
func fast(a, b float64) Pair {
	s := a + b
	return Pair{s, b - (s - a)}
}
