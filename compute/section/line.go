package section

import (
	"math"

	"leat/compute/solve"
)

// A line builds the stretches of a section from left to right, from sides of given slope.
type line struct {
	stretches []stretch
	offset    float64
	level     solve.Pair
}

// newLine begins a line at a point.
func newLine(offset, level float64) *line {
	return &line{offset: offset, level: solve.Pair{High: level}}
}

// add appends a stretch from where the line stands to a point. slope is its run per unit of level.
func (l *line) add(offset float64, level solve.Pair, slope float64) *line {
	l.stretches = append(l.stretches, stretch{
		left: l.offset, right: offset, leftLevel: l.level, rightLevel: level, run: solve.Pair{High: slope}, length: math.Sqrt(1 + slope*slope),
	})
	l.offset, l.level = offset, level
	return l
}

// from appends the side that comes down from without end to where the line stands.
func (l *line) from(slope float64) *line {
	offset, level := l.offset, l.level
	l.level.High = math.Inf(1)
	if slope > 0 {
		l.offset = math.Inf(-1)
	}
	return l.add(offset, level, slope)
}

// flat appends a level stretch to an offset.
func (l *line) flat(offset float64) *line {
	if offset == l.offset {
		return l
	}
	return l.add(offset, l.level, 0)
}

// side appends a side to a point.
func (l *line) side(offset, level, slope float64) *line {
	return l.add(offset, solve.Pair{High: level}, slope)
}

// onward appends the side that goes up without end.
func (l *line) onward(slope float64) []stretch {
	offset := l.offset
	if slope > 0 {
		offset = math.Inf(1)
	}
	return l.add(offset, solve.Pair{High: math.Inf(1)}, slope).stretches
}
