package section

// Gutter is a street gutter beside a vertical curb.
type Gutter struct {
	bands
	curb float64
	line []stretch
}

// NewGutter returns a gutter whose depth is measured at the curb: a vertical curb of curb_height that goes on above it, and a street that rises
// from it at cross_slope, or over the first gutter_width at gutter_slope (both 0 for none). Slopes are vertical per horizontal,
// each measured from the level, lengths in m.
func NewGutter(crossSlope, curbHeight, gutterWidth, gutterSlope float64) (Section, error) {
	var c check
	c.gradient("cross_slope", crossSlope)
	c.size("curb_height", curbHeight)
	if gutterWidth != 0 || gutterSlope != 0 {
		switch {
		case gutterWidth == 0:
			c.add("gutter_width", "missing", "A gutter_slope needs the gutter_width over which it holds, greater than 0.")
			c.gradient("gutter_slope", gutterSlope)
		case gutterSlope == 0:
			c.size("gutter_width", gutterWidth)
			c.add("gutter_slope", "missing", "A gutter_width needs the gutter_slope that holds over it, greater than 0.")
		default:
			c.size("gutter_width", gutterWidth)
			c.gradient("gutter_slope", gutterSlope)
		}
	}
	if err := c.err(); err != nil {
		return nil, err
	}
	l := newLine(0, 0).from(0)
	if gutterWidth > 0 {
		l.side(gutterWidth, gutterWidth*gutterSlope, 1/gutterSlope)
	}
	line := l.onward(1 / crossSlope)
	return &Gutter{compile(line), curbHeight, line}, nil
}

// Bank implements Section: the top of the curb.
func (s *Gutter) Bank() (depth float64, known bool) { return s.curb, true }
