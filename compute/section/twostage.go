package section

import "strconv"

// TwoStage describes a channel with a low-flow trapezoid between two level benches.
type TwoStage struct {
	BottomWidth                     float64 // m
	LeftSideSlope, RightSideSlope   float64 // of the lower stage, horizontal per unit vertical
	BenchHeight                     float64 // depth at which the benches lie, m
	LeftBenchWidth, RightBenchWidth float64 // m; 0 for none on that side
	UpperSideSlope                  float64 // of both sides above the benches
}

// Benched is a compiled TwoStage. Its offsets run from the middle of the bottom, left negative.
type Benched struct {
	bands
	bed  float64
	line []stretch
}

// NewTwoStage returns a two-stage channel. Faults name bottom_width, left_side_slope, right_side_slope, bench_height, left_bench_width,
// right_bench_width and upper_side_slope.
func NewTwoStage(t TwoStage) (Section, error) {
	var c check
	c.size("bottom_width", t.BottomWidth)
	c.slope("left_side_slope", t.LeftSideSlope)
	c.slope("right_side_slope", t.RightSideSlope)
	c.size("bench_height", t.BenchHeight)
	c.sizeOrZero("left_bench_width", t.LeftBenchWidth)
	c.sizeOrZero("right_bench_width", t.RightBenchWidth)
	c.slope("upper_side_slope", t.UpperSideSlope)
	if err := c.err(); err != nil {
		return nil, err
	}
	// Offsets are reckoned from the middle outwards, so that a wall at half the bottom width stands there to the last digit.
	half, height := 0.5*t.BottomWidth, t.BenchHeight
	left, right := half+t.LeftSideSlope*height, half+t.RightSideSlope*height
	line := newLine(-(left+t.LeftBenchWidth), height).
		from(t.UpperSideSlope).
		flat(-left).
		side(-half, 0, t.LeftSideSlope).
		flat(half).
		side(right, height, t.RightSideSlope).
		flat(right + t.RightBenchWidth).
		onward(t.UpperSideSlope)
	return &Benched{compile(line), t.BottomWidth, line}, nil
}

// BedWidth implements Bedded.
func (s *Benched) BedWidth() float64 { return s.bed }

// Part implements Zoned. Where the upper sides are vertical the offsets must lie between them.
func (s *Benched) Part(offsets []float64) ([]Section, error) {
	if err := checkOffsets(offsets, s.line); err != nil {
		return nil, err
	}
	return zones(s.line, offsets), nil
}

// checkOffsets checks that offsets rise and lie inside a line.
func checkOffsets(offsets []float64, line []stretch) error {
	var c check
	first, last := line[0].left, line[len(line)-1].right
	for i, offset := range offsets {
		switch member := strconv.Itoa(i); {
		case !c.finite(member, offset):
		case !(offset > first && offset < last):
			c.add(member, "outside_section", "This offset must lie between the two ends of the section.")
		case i > 0 && offset <= offsets[i-1]:
			c.add(member, "not_rising", "Each offset must be greater than the one before it.")
		}
	}
	return c.err()
}
