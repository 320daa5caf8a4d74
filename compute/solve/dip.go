package solve

// dipSteps bounds Dip; each golden section leaves 0.62 of the stretch.
const dipSteps = 60

// Dip looks between a and d, from b, for where a function that falls and then rises is least, and returns that place, or the first one met at which the
// function is not positive (golden sections: J. Kiefer 1953). It does not allocate.
func Dip(f func(x float64) float64, a, b, d float64) float64 {
	const golden = 0.3819660112501051
	least := f(b)
	for range dipSteps {
		if least <= 0 {
			return b
		}
		x := b + golden*(d-b)
		if b-a > d-b {
			x = b - golden*(b-a)
		}
		v := f(x)
		switch {
		case v < least && x > b:
			a, b, least = b, x, v
		case v < least:
			d, b, least = b, x, v
		case x > b:
			d = x
		default:
			a = x
		}
	}
	return b
}
