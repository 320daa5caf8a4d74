package section

import "math"

// sides holds what trapezoid, triangle and rectangle share.
type sides struct {
	bottom      float64 // m
	left, right float64 // side slopes, horizontal per unit vertical
	spread      float64 // their sum
	wall        float64 // wetted perimeter of both sides per unit depth
}

func newSides(bottom, left, right float64) sides {
	return sides{bottom, left, right, left + right, math.Sqrt(1+left*left) + math.Sqrt(1+right*right)}
}

// put writes the geometry at a depth. It is written member by member into its place, since the copies that a returned literal
// makes cost more than the arithmetic.
func (s *sides) put(g *Geometry, depth float64) {
	run := s.spread * depth
	g.Depth = depth
	g.Area = depth * (s.bottom + 0.5*run)
	g.Perimeter = s.bottom + s.wall*depth
	g.TopWidth = s.bottom + run
	g.Moment = depth * depth * (0.5*s.bottom + run*(1.0/6))
	g.PerimeterRate = s.wall
	g.TopWidthRate = s.spread
}

// Full implements Section.
func (s *sides) Full() Geometry { return Geometry{} }

// Height implements Section.
func (s *sides) Height() float64 { return math.Inf(1) }

// Closed implements Section.
func (s *sides) Closed() bool { return false }

// Bank implements Section.
func (s *sides) Bank() (depth float64, known bool) { return 0, false }

// Breaks implements Section.
func (s *sides) Breaks() []float64 { return nil }

// Form implements Section.
func (s *sides) Form() Form { return Rising }

// Slopes returns the two side slopes, horizontal per unit vertical.
func (s *sides) Slopes() (left, right float64) { return s.left, s.right }

// Trapezoidal is a trapezoid, or with vertical sides a rectangle.
type Trapezoidal struct{ sides }

// At implements Section.
func (s *Trapezoidal) At(depth float64) (g Geometry) {
	s.put(&g, depth)
	return g
}

// BedWidth implements Bedded.
func (s *Trapezoidal) BedWidth() float64 { return s.bottom }

// Triangular is a V of two sides, of which one may be vertical.
type Triangular struct{ sides }

// At implements Section.
func (s *Triangular) At(depth float64) (g Geometry) {
	s.put(&g, depth)
	return g
}

// NewRectangular returns a rectangle open at the top, its bottom_width in m.
func NewRectangular(bottomWidth float64) (Section, error) { return NewTrapezoidal(bottomWidth, 0, 0) }

// NewTrapezoidal returns a trapezoid from its bottom_width in m, left_side_slope and right_side_slope (horizontal per unit vertical).
func NewTrapezoidal(bottomWidth, left, right float64) (Section, error) {
	var c check
	c.size("bottom_width", bottomWidth)
	c.slope("left_side_slope", left)
	c.slope("right_side_slope", right)
	if err := c.err(); err != nil {
		return nil, err
	}
	return &Trapezoidal{newSides(bottomWidth, left, right)}, nil
}

// NewTriangular returns a triangle from its left_side_slope and right_side_slope (horizontal per unit vertical), not both zero.
func NewTriangular(left, right float64) (Section, error) {
	var c check
	leftSound, rightSound := c.slope("left_side_slope", left), c.slope("right_side_slope", right)
	if leftSound && rightSound && left+right < leastSize {
		c.add("left_side_slope", "no_width", "With two vertical sides a triangle has no width; at least one side slope must be greater than 0.")
	}
	if err := c.err(); err != nil {
		return nil, err
	}
	return &Triangular{newSides(0, left, right)}, nil
}
