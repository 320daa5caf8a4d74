package section

import (
	"math"
	"slices"

	"leat/compute/solve"
)

// A stretch is one straight piece of a section's line, from left to right. Its levels are measured from the section's datum in
// paired precision, so that the difference of two levels keeps all its digits however high above the datum they lie.
type stretch struct {
	left, right           float64    // offsets, m; -Inf and +Inf where the line goes on for ever
	leftLevel, rightLevel solve.Pair // levels of its two ends, m; +Inf where it goes on for ever
	run                   solve.Pair // top width that it gives per unit depth, where it is not level
	length                float64    // perimeter that it gives per unit depth
}

// newStretch returns the stretch between two points, their levels and that of the datum being above one and the same zero.
func newStretch(left, leftLevel, right, rightLevel, datum float64) stretch {
	s := stretch{
		left: left, right: right,
		leftLevel: solve.Difference(leftLevel, datum), rightLevel: solve.Difference(rightLevel, datum),
	}
	if fall := math.Abs(rightLevel - leftLevel); fall > 0 {
		run := right - left
		s.run = solve.Difference(right, left).Divide(solve.Difference(math.Max(leftLevel, rightLevel), math.Min(leftLevel, rightLevel)))
		s.length = math.Sqrt(run*run+fall*fall) / fall
	}
	return s
}

// level reports whether the stretch is level.
func (s *stretch) level() bool { return s.leftLevel == s.rightLevel }

// lower and upper return the levels between which the stretch rises.
func (s *stretch) lower() solve.Pair {
	if s.leftLevel.Less(s.rightLevel) {
		return s.leftLevel
	}
	return s.rightLevel
}

func (s *stretch) upper() solve.Pair {
	if s.leftLevel.Less(s.rightLevel) {
		return s.rightLevel
	}
	return s.leftLevel
}

// cut parts a stretch at an offset strictly inside it.
func (s stretch) cut(offset float64) (left, right stretch) {
	left, right = s, s
	left.right, right.left = offset, offset
	at := s.leftLevel
	switch {
	case s.level():
	case math.IsInf(s.left, -1):
		at = s.rightLevel.Add(solve.Difference(s.right, offset).Divide(s.run))
	case math.IsInf(s.right, 1):
		at = s.leftLevel.Add(solve.Difference(offset, s.left).Divide(s.run))
	default:
		rise := solve.Difference(offset, s.left).Divide(s.run)
		if s.rightLevel.Less(s.leftLevel) {
			rise = solve.Pair{High: -rise.High, Low: -rise.Low}
		}
		at = s.leftLevel.Add(rise)
	}
	left.rightLevel, right.leftLevel = at, at
	return left, right
}

// part parts a line at rising offsets. A wall that stands at an offset goes to the side whose water wets it: one that falls
// from left to right is wetted from the right.
func part(line []stretch, offsets []float64) [][]stretch {
	zones := make([][]stretch, len(offsets)+1)
	zone := 0
	for _, s := range line {
		for zone < len(offsets) && s.left >= offsets[zone] {
			if s.left == s.right && s.left == offsets[zone] && s.leftLevel.Less(s.rightLevel) {
				break // a wall that rises to the right, wetted from the left
			}
			zone++
		}
		for zone < len(offsets) && s.right > offsets[zone] && s.left < offsets[zone] {
			var left stretch
			left, s = s.cut(offsets[zone])
			zones[zone] = append(zones[zone], left)
			zone++
		}
		zones[zone] = append(zones[zone], s)
	}
	return zones
}

// A band lies between two neighbouring levels of a section's line. In it the width and the perimeter are linear.
type band struct {
	level                          solve.Pair // of its base above the datum
	area, perimeter, width, moment float64    // just above its base
	perimeterRate, widthRate       float64
	troughs                        int
}

// bands is a section compiled from straight stretches. Above its last level it goes on with what rises for ever.
type bands struct {
	tops   []float64 // upper level of each band, the last +Inf
	all    []band
	breaks []float64
}

// compile makes bands of a line. Each stretch counts in the bands between the levels of its two ends; a level one counts
// from its own level upwards. All sums are of positive terms, those from band to band in paired precision.
func compile(line []stretch) bands {
	levels := make([]solve.Pair, 0, 2*len(line))
	for i := range line {
		for _, l := range [...]solve.Pair{line[i].leftLevel, line[i].rightLevel} {
			if !math.IsInf(l.High, 1) {
				levels = append(levels, l)
			}
		}
	}
	order := func(a, b solve.Pair) int {
		switch {
		case a.Less(b):
			return -1
		case b.Less(a):
			return 1
		}
		return 0
	}
	slices.SortFunc(levels, order)
	levels = slices.Compact(levels)
	n := len(levels)
	at := func(l solve.Pair) int {
		if math.IsInf(l.High, 1) {
			return n
		}
		i, _ := slices.BinarySearchFunc(levels, l, order)
		return i
	}

	// rates is a tree over the bands: a stretch is added to the few nodes that cover its bands, and what a band has is
	// the sum on the way down to it. Nothing is ever subtracted again, so that a nearly level stretch leaves no trace above it.
	rates := make([]struct{ width, perimeter float64 }, 2*n)
	flats := make([]float64, n)
	falling := make([]int, n+1)
	for i := range line {
		s := &line[i]
		if s.level() {
			flats[at(s.leftLevel)] += s.right - s.left
			continue
		}
		from, to := at(s.lower()), at(s.upper())
		for l, r := from+n, to+n; l < r; l, r = l>>1, r>>1 {
			if l&1 == 1 {
				rates[l].width += s.run.High
				rates[l].perimeter += s.length
				l++
			}
			if r&1 == 1 {
				r--
				rates[r].width += s.run.High
				rates[r].perimeter += s.length
			}
		}
		if s.rightLevel.Less(s.leftLevel) {
			falling[from]++
			falling[to]--
		}
	}
	for i := 2; i < 2*n; i++ {
		rates[i].width += rates[i/2].width
		rates[i].perimeter += rates[i/2].perimeter
	}
	if n > 0 && !math.IsInf(line[0].leftLevel.High, 1) {
		falling[at(line[0].leftLevel)]++ // water above the left end begins there
	}

	b := bands{tops: make([]float64, n), all: make([]band, n), breaks: make([]float64, 0, n)}
	var area, perimeter, width, moment solve.Pair
	troughs := 0
	for i := range n {
		width, perimeter = width.Plus(flats[i]), perimeter.Plus(flats[i])
		troughs += falling[i]
		now := band{
			level: levels[i], area: area.Value(), perimeter: perimeter.Value(), width: width.Value(), moment: moment.Value(),
			perimeterRate: rates[i+n].perimeter, widthRate: rates[i+n].width, troughs: troughs,
		}
		b.all[i] = now
		if i == n-1 {
			b.tops[i] = math.Inf(1)
			break
		}
		b.tops[i] = levels[i+1].Value()
		d := levels[i+1].Subtract(levels[i]).Value()
		moment = moment.Plus(d * (now.area + d*(0.5*now.width+d*now.widthRate*(1.0/6))))
		area = area.Plus(d * (now.width + 0.5*d*now.widthRate))
		width = width.Plus(d * now.widthRate)
		perimeter = perimeter.Plus(d * now.perimeterRate)
	}
	for i := range n {
		if l := levels[i].Value(); l > 0 && (len(b.breaks) == 0 || l > b.breaks[len(b.breaks)-1]) {
			b.breaks = append(b.breaks, l)
		}
	}
	return b
}

// find returns the band that holds a depth, the lower one at a level between two; -1 below the first.
func (b *bands) find(depth float64) int {
	if len(b.all) == 0 || depth <= b.all[0].level.High {
		return -1
	}
	lo, hi := 0, len(b.tops)-1
	for lo < hi {
		mid := int(uint(lo+hi) >> 1)
		if b.tops[mid] < depth {
			lo = mid + 1
		} else {
			hi = mid
		}
	}
	return lo
}

// At implements Section; below the lowest level of a zone it returns the zero Geometry.
func (b *bands) At(depth float64) (g Geometry) {
	i := b.find(depth)
	if i < 0 {
		return g
	}
	w := &b.all[i]
	d := (depth - w.level.High) - w.level.Low
	run := w.widthRate * d
	g.Depth = depth
	g.Area = w.area + d*(w.width+0.5*run)
	g.Perimeter = w.perimeter + w.perimeterRate*d
	g.TopWidth = w.width + run
	g.Moment = w.moment + d*(w.area+d*(0.5*w.width+run*(1.0/6)))
	g.PerimeterRate = w.perimeterRate
	g.TopWidthRate = w.widthRate
	return g
}

// Full implements Section.
func (b *bands) Full() Geometry { return Geometry{} }

// Height implements Section.
func (b *bands) Height() float64 { return math.Inf(1) }

// Closed implements Section.
func (b *bands) Closed() bool { return false }

// Bank implements Section.
func (b *bands) Bank() (depth float64, known bool) { return 0, false }

// Breaks implements Section.
func (b *bands) Breaks() []float64 { return b.breaks }

// Form implements Section.
func (b *bands) Form() Form { return Banded }

// zones compiles the parts of a line.
func zones(line []stretch, offsets []float64) []Section {
	parts := part(line, offsets)
	sections := make([]Section, len(parts))
	for i, p := range parts {
		b := compile(p)
		sections[i] = &b
	}
	return sections
}
