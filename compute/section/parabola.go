package section

import "math"

// Parabolic is a parabola with vertical axis, open at the top.
type Parabolic struct{ scale float64 } // top width at unit depth, sqrt(m)

// NewParabolic returns a parabola that has its top_width at its height, both in m; it goes on above.
func NewParabolic(topWidth, height float64) (Section, error) {
	var c check
	c.size("top_width", topWidth)
	c.size("height", height)
	if err := c.err(); err != nil {
		return nil, err
	}
	return &Parabolic{topWidth / math.Sqrt(height)}, nil
}

// At implements Section. The perimeter is the arc length of the parabola, with s the slope of the bank at the surface:
// T/2 * (sqrt(1 + s^2) + asinh(s)/s), s = 4*depth/T.
func (s *Parabolic) At(depth float64) (g Geometry) {
	width := s.scale * math.Sqrt(depth)
	slope := 4 * depth / width
	root := math.Sqrt(1 + slope*slope)
	arc := math.Log(slope + root) // asinh(slope), which cancels where the slope is small
	if slope < 1 {
		arc = math.Log1p(slope + slope*slope/(1+root))
	}
	g.Depth = depth
	g.Area = width * depth * (2.0 / 3)
	g.Perimeter = 0.5 * width * (root + arc/slope)
	g.TopWidth = width
	g.Moment = width * depth * depth * (4.0 / 15)
	g.PerimeterRate = 2 * root / slope
	g.TopWidthRate = 0.5 * width / depth
	return g
}

// Full implements Section.
func (s *Parabolic) Full() Geometry { return Geometry{} }

// Height implements Section.
func (s *Parabolic) Height() float64 { return math.Inf(1) }

// Closed implements Section.
func (s *Parabolic) Closed() bool { return false }

// Bank implements Section.
func (s *Parabolic) Bank() (depth float64, known bool) { return 0, false }

// Breaks implements Section.
func (s *Parabolic) Breaks() []float64 { return nil }

// Form implements Section.
func (s *Parabolic) Form() Form { return Rising }
