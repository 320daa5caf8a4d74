package picture

import (
	"math"
	"strconv"
)

// A scale maps values, in the units of the request, onto the paper.
type scale struct {
	from, to    float64 // values
	first, last float64 // units of the paper
}

func (s scale) at(value float64) float64 {
	if s.to == s.from {
		return 0.5 * (s.first + s.last)
	}
	return s.first + (value-s.from)/(s.to-s.from)*(s.last-s.first)
}

// A tick is a value of an axis and what it is called.
type tick struct {
	value float64
	text  string
}

// ticks returns round values from one to another, at most so many.
func ticks(from, to float64, most int) []tick {
	if !(to > from) || most < 1 {
		return nil
	}
	step := roundStep((to - from) / float64(most))
	decimals := max(0, int(-math.Floor(math.Log10(step)+1e-9)))
	var out []tick
	for k := math.Ceil(from/step - 1e-9); k*step <= to+1e-9*step && len(out) <= most+1; k++ {
		value := k * step
		text := strconv.FormatFloat(value, 'f', decimals, 64)
		if decimals > 5 || math.Abs(to) >= 1e6 {
			text = strconv.FormatFloat(value, 'g', 4, 64)
		}
		if k == 0 {
			value, text = 0, "0"
		}
		out = append(out, tick{value, text})
	}
	return out
}

// roundStep returns the least of 1, 2, 5 times a power of ten that is not less than a number.
func roundStep(least float64) float64 {
	exponent := math.Floor(math.Log10(least))
	text := "1e" + strconv.Itoa(int(exponent))
	unit, _ := strconv.ParseFloat(text, 64) // to the last place, which powers of 10 by multiplication are not
	for _, digit := range []float64{1, 2, 5, 10} {
		if digit*unit >= least*(1-1e-9) {
			return digit * unit
		}
	}
	return 10 * unit
}

// axisLeft draws the ticks and grid of an upright axis left of a plot from x to right.
func (l *list) axisLeft(s scale, x, right float64, most int) {
	for _, t := range ticks(s.from, s.to, most) {
		y := s.at(t.value)
		l.line(grid, point{x, y}, point{right, y})
		l.line(frame, point{x - 4, y}, point{x, y})
		l.write(soft, point{x - 7, y + 4}, end, small, t.text)
	}
}

// axisBelow draws the ticks, and where top is above them the grid, of a level axis at y.
func (l *list) axisBelow(s scale, top, y float64, most int) {
	most = min(most, max(1, int((s.last-s.first)/50)))
	for _, t := range ticks(s.from, s.to, most) {
		x := s.at(t.value)
		if top < y {
			l.line(grid, point{x, top}, point{x, y})
		}
		l.line(frame, point{x, y}, point{x, y + 4})
		l.write(soft, point{x, y + 16}, middle, small, t.text)
	}
}
