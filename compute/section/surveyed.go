package section

import (
	"math"
	"strconv"

	"leat/compute"
)

// SurveyedLine is a section from surveyed points. It implements Surveyed and Zoned.
type SurveyedLine struct {
	bands
	line      []stretch
	invert    float64 // level of the lowest point, m
	left      float64 // depth at which water reaches the left end
	right     float64
	bank      float64
	bankKnown bool
}

// NewSurveyed returns the section of surveyed points [offset, level] in m, from left to right. Offsets may repeat (a vertical
// wall) but not fall. Faults name points/INDEX, points/INDEX/0 (offset), points/INDEX/1 (level) and points. The
// value returned is a *SurveyedLine.
func NewSurveyed(points [][2]float64) (Section, error) {
	var c check
	wall := 0.0 // direction of the vertical wall that leads here
	for i, p := range points {
		for j, value := range p {
			if !isOrdinate(value) {
				c.ordinate(pointMember(i)+"/"+strconv.Itoa(j), value)
			}
		}
		if i > 0 && p[0] < points[i-1][0] {
			c.add(pointMember(i)+"/0", "falling_offset", "Offsets must not fall from one point to the next; put the points in order from left to right.")
		}
		// A vertical wall must not turn.
		switch {
		case i == 0 || p[0] != points[i-1][0]:
			wall = 0
		case (p[1]-points[i-1][1])*wall < 0:
			c.add(pointMember(i), "lines_overlap", "This vertical wall folds back over itself; the levels at one offset must run one way only.")
		case p[1] != points[i-1][1]:
			wall = math.Copysign(1, p[1]-points[i-1][1])
		}
	}
	if len(points) < 2 {
		c.add("points", "too_few", "A surveyed section needs at least two points.")
	} else if len(c.faults) == 0 {
		lowest, highest := math.Inf(1), math.Inf(-1)
		for _, p := range points {
			lowest, highest = math.Min(lowest, p[1]), math.Max(highest, p[1])
		}
		if !(highest-lowest >= leastSize) {
			c.add("points", "no_depth", "All points lie at one level; a section needs a bed and at least one bank above it.")
		}
		if !(points[len(points)-1][0]-points[0][0] >= leastSize) {
			c.add("points", "no_width", "All points lie at one offset; a section needs a width.")
		}
	}
	if err := c.err(); err != nil {
		return nil, err
	}

	s := &SurveyedLine{invert: math.Inf(1), line: make([]stretch, 0, len(points)-1)}
	for _, p := range points {
		s.invert = math.Min(s.invert, p[1])
	}
	for i := 1; i < len(points); i++ {
		if a, b := points[i-1], points[i]; a != b {
			s.line = append(s.line, newStretch(a[0], a[1], b[0], b[1], s.invert))
		}
	}
	s.bands = compile(s.line)
	if first := s.all[0]; first.width == 0 && first.widthRate == 0 {
		return nil, compute.Faults{{Member: pointMember(lowestPoint(points)), Code: "no_width",
			Detail: "The lowest point is an end of the line from which a wall goes straight up, so that nothing is enclosed beside it; leave that point out or give the ground beyond it."}}
	}
	s.left, s.right = points[0][1]-s.invert, points[len(points)-1][1]-s.invert
	if s.bank = math.Min(s.left, s.right); s.bank > 0 {
		s.bankKnown = true
	}
	return s, nil
}

// pointMember names a point.
func pointMember(i int) string { return "points/" + strconv.Itoa(i) }

// Invert returns the level of the lowest point in m, from which depths are measured.
func (s *SurveyedLine) Invert() float64 { return s.invert }

// Bank implements Section: the lower end, unless an end is the lowest point.
func (s *SurveyedLine) Bank() (depth float64, known bool) { return s.bank, s.bankKnown }

// Ends implements Surveyed.
func (s *SurveyedLine) Ends(depth float64) Ends {
	e := Ends{AboveLeft: depth > s.left, AboveRight: depth > s.right}
	if i := s.find(depth); i >= 0 {
		e.Troughs = s.all[i].troughs
	}
	return e
}

// Part implements Zoned.
func (s *SurveyedLine) Part(offsets []float64) ([]Section, error) {
	if err := checkOffsets(offsets, s.line); err != nil {
		return nil, err
	}
	return zones(s.line, offsets), nil
}

// lowestPoint returns the index of the first lowest point.
func lowestPoint(points [][2]float64) int {
	lowest := 0
	for i, p := range points {
		if p[1] < points[lowest][1] {
			lowest = i
		}
	}
	return lowest
}
