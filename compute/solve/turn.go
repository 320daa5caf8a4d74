package solve

// turnSteps halve a stretch until hardly more than its last places are left.
const turnSteps = 60

// Turn halves the stretch from lo, where a condition holds, to hi, where it does not, and returns the two ends of what is left of it. lo may be greater
// than hi. Where the condition changes more than once, it is one of the changes that is found.
func Turn(holds func(x float64) bool, lo, hi float64) (last, first float64) {
	for range turnSteps {
		if middle := lo + (hi-lo)/2; holds(middle) {
			lo = middle
		} else {
			hi = middle
		}
	}
	return lo, hi
}
