package section

import "math"

// A Sided is a Section that knows how steep its wetted sides are, as their stability asks.
type Sided interface {
	Section
	// Steepest returns the slope of the steepest part of the perimeter below a depth, horizontal per unit vertical: 0 for a vertical wall.
	Steepest(depth float64) float64
}

// Steepest implements Sided.
func (s *sides) Steepest(float64) float64 { return min(s.left, s.right) }

// Steepest implements Sided: a parabola is steepest at the surface.
func (s *Parabolic) Steepest(depth float64) float64 { return s.scale / (4 * math.Sqrt(depth)) }

// Steepest implements Sided: a half circle is as steep as the tangent at the surface, a wall from there on.
func (s *UShaped) Steepest(depth float64) float64 {
	if depth >= s.radius {
		return 0
	}
	rest := s.radius - depth
	return rest / math.Sqrt(depth*(s.radius+rest))
}

// Steepest implements Sided.
func (s *Benched) Steepest(depth float64) float64 { return steepest(s.line, depth) }

// Steepest implements Sided. The walls that stand above the ends of the survey are no part of the perimeter.
func (s *SurveyedLine) Steepest(depth float64) float64 { return steepest(s.line, depth) }

// steepest returns the slope of the steepest stretch of a line that is wetted at a depth; +Inf where all are level.
func steepest(line []stretch, depth float64) float64 {
	least := math.Inf(1)
	for i := range line {
		if s := &line[i]; !s.level() && s.lower().High < depth {
			least = min(least, s.run.High)
		}
	}
	return least
}
