package section

// Box is a closed rectangle, with or without 45 degree fillets in its upper corners.
type Box struct {
	width, height, haunch float64
	shoulder              float64 // height at which the fillets begin, or the height
	below                 Geometry
	breaks                []float64
}

// NewBox returns a box culvert from its width, height and haunch (the leg of the fillets in the two upper corners, 0 for none), in m.
func NewBox(width, height, haunch float64) (Section, error) {
	var c check
	wide := c.size("width", width)
	high := c.size("height", height)
	if c.sizeOrZero("haunch", haunch) {
		if wide && haunch > 0.5*width {
			c.add("haunch", "too_large", "The haunches must not overlap: each may be at most half the width.")
		}
		if high && haunch > height {
			c.add("haunch", "too_large", "The haunch must not be larger than the height.")
		}
	}
	if err := c.err(); err != nil {
		return nil, err
	}
	s := &Box{width: width, height: height, haunch: haunch, shoulder: height - haunch}
	s.below = s.At(s.shoulder)
	if s.shoulder > 0 && s.shoulder < height {
		s.breaks = []float64{s.shoulder}
	}
	return s, nil
}

// At implements Section; a depth beyond the height counts as the height.
func (s *Box) At(depth float64) (g Geometry) {
	if depth > s.height {
		depth = s.height
	}
	g.Depth = depth
	if depth <= s.shoulder {
		g.Area = s.width * depth
		g.Perimeter = s.width + 2*depth
		g.TopWidth = s.width
		g.Moment = 0.5 * s.width * depth * depth
		g.PerimeterRate = 2
		return g
	}
	const rate = 2 * 1.41421356237309504880168872420969807856967187537694807317667974
	d := depth - s.shoulder
	top := (s.width - 2*s.haunch) + 2*(s.height-depth)
	g.Area = s.below.Area + d*0.5*(s.width+top)
	g.Perimeter = s.below.Perimeter + rate*d
	g.TopWidth = top
	g.Moment = s.below.Moment + d*(s.below.Area+d*(0.5*s.width-d*(1.0/3)))
	g.PerimeterRate = rate
	g.TopWidthRate = -2
	return g
}

// Full implements Section: the roof is wetted.
func (s *Box) Full() Geometry {
	g := full(s.At(s.height))
	g.Perimeter += s.width - 2*s.haunch
	return g
}

// Height implements Section.
func (s *Box) Height() float64 { return s.height }

// Closed implements Section.
func (s *Box) Closed() bool { return true }

// Bank implements Section.
func (s *Box) Bank() (depth float64, known bool) { return s.height, true }

// Breaks implements Section.
func (s *Box) Breaks() []float64 { return s.breaks }

// Form implements Section.
func (s *Box) Form() Form { return Banded }

// BedWidth implements Bedded.
func (s *Box) BedWidth() float64 { return s.width }
