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
func (s *Elliptical) At(depth float64) Geometry {
	depth = min(depth, s.height)
	above := s.height - depth
	c := newSegment(depth/s.height, above/s.height)
	a, b := 0.5*s.width, 0.5*s.height
	arc := s.width * solve.SecondKind(c.sine, math.Abs(c.cosine), s.shape)
	if c.cosine < 0 {
		arc = s.half - arc
	}
	return Geometry{
		Depth:         depth,
		Area:          a * b * c.area,
		Perimeter:     arc,
		TopWidth:      s.width * c.sine,
		Moment:        a * b * b * c.moment,
		PerimeterRate: 2 * math.Sqrt(c.cosine*c.cosine/s.shape+c.sine*c.sine) / c.sine,
		TopWidthRate:  2 * a * c.cosine / (b * c.sine),
	}
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
