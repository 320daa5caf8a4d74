package picture

import (
	"cmp"
	"slices"
)

// pitch is the distance of labels that stand below each other.
const pitch = 16.0

// spread moves places, which need not be in order, as little as it can so that any two are a pitch apart and all lie between top and bottom.
func spread(places []float64, top, bottom float64) []float64 {
	order := make([]int, len(places))
	for i := range order {
		order[i] = i
	}
	slices.SortStableFunc(order, func(a, b int) int { return cmp.Compare(places[a], places[b]) })
	out := slices.Clone(places)
	low := top
	for _, i := range order {
		out[i] = max(out[i], low)
		low = out[i] + pitch
	}
	high := bottom
	for _, i := range slices.Backward(order) {
		out[i] = min(out[i], high)
		high = out[i] - pitch
	}
	return out
}

// A sign is a label above a plot that points down at a place.
type sign struct {
	at   float64 // x of the place
	text string
	pen  *pen
}

// A rowed is a sign with where it stands.
type rowed struct {
	sign
	row      int     // from the lowest
	from, to float64 // of the text
}

// rows gives signs rows above each other so that neither texts nor their leaders touch. Those that find no place in so many rows are left out, and
// counted. Which order and which row to try first depends on where they crowd, so all are tried, and the one that leaves out fewest is taken.
func rows(signs []sign, left, right float64, most int) (placed []rowed, used, leftOut int) {
	leftOut = len(signs) + 1
	reversed := slices.Clone(signs)
	slices.Reverse(reversed)
	for _, ordered := range [][]sign{signs, reversed} {
		for _, fromAbove := range []bool{false, true} {
			p, u, o := rowsInOrder(ordered, left, right, most, fromAbove)
			if o < leftOut || o == leftOut && u < used {
				placed, used, leftOut = p, u, o
			}
		}
	}
	return placed, used, leftOut
}

// rowsInOrder places signs one after the other in the first row that has room, from below or from above.
func rowsInOrder(signs []sign, left, right float64, most int, fromAbove bool) (placed []rowed, used, leftOut int) {
	const gap = 5
	lowest := most
next:
	for _, f := range signs {
		width := wide(f.text, small)
		for row := range most {
			if fromAbove {
				row = most - 1 - row
			}
			for _, from := range []float64{f.at + gap, f.at - gap - width} {
				r := rowed{f, row, from, from + width}
				if r.from < left || r.to > right || slices.ContainsFunc(placed, func(o rowed) bool { return r.touches(o, gap) }) {
					continue
				}
				placed = append(placed, r)
				lowest = min(lowest, row)
				continue next
			}
		}
		leftOut++
	}
	for i := range placed {
		placed[i].row -= lowest
		used = max(used, placed[i].row+1)
	}
	return placed, used, leftOut
}

// touches reports whether two flags touch: their texts, or the leader of the higher one and the text of the lower.
func (r rowed) touches(o rowed, gap float64) bool {
	switch {
	case r.row == o.row:
		return r.from < o.to+gap && o.from < r.to+gap
	case r.row > o.row:
		return r.at > o.from-gap/2 && r.at < o.to+gap/2
	}
	return o.at > r.from-gap/2 && o.at < r.to+gap/2
}
