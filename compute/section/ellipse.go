package section

import (
	"math"

	"leat/compute/solve"
)

// Elliptical is a closed ellipse with a vertical and a horizontal axis.
type Elliptical struct {
	width, height float64
	shape         float64 // (height/width)^2
	half          float64 // half the circumference
}

// NewElliptical returns an ellipse from its full width and height in m.
func NewElliptical(width, height float64) (Section, error) {
	var c check
	c.size("width", width)
	c.size("height", height)
	if err := c.err(); err != nil {
		return nil, err
	}
	shape := (height / width) * (height / width)
	return &Elliptical{width, height, shape, 2 * width * solve.SecondKind(1, 0, shape)}, nil
}

// At implements Section. Area, width and moment are those of a circle stretched sideways; the perimeter is width times Legendre's
// integral of the second kind from the lowest point, whose parameter is 1 - (height/width)^2. At the crown, and for a depth beyond it, the rates are infinite.
func (s *Elliptical) At(depth float64) (g Geometry) {
	if depth > s.height {
		depth = s.height
	}
	above := s.height - depth
	a, b := 0.5*s.width, 0.5*s.height
	sine, cosine := math.Sqrt(depth*above)/b, (above-depth)/s.height
	_, area, moment := segment(depth/above, sine, cosine)
	arc := s.width * solve.SecondKind(sine, math.Abs(cosine), s.shape)
	if cosine < 0 {
		arc = s.half - arc
	}
	g.Depth = depth
	g.Area = a * b * area
	g.Perimeter = arc
	g.TopWidth = s.width * sine
	g.Moment = a * b * b * moment
	g.PerimeterRate = 2 * math.Sqrt(cosine*cosine/s.shape+sine*sine) / sine
	g.TopWidthRate = 2 * a * cosine / (b * sine)
	return g
}

// Full implements Section.
func (s *Elliptical) Full() Geometry { return full(s.At(s.height)) }

// Height implements Section.
func (s *Elliptical) Height() float64 { return s.height }

// Closed implements Section.
func (s *Elliptical) Closed() bool { return true }

// Bank implements Section.
func (s *Elliptical) Bank() (depth float64, known bool) { return s.height, true }

// Breaks implements Section.
func (s *Elliptical) Breaks() []float64 { return nil }

// Form implements Section.
func (s *Elliptical) Form() Form { return Arched }
