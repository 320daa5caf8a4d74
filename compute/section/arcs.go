package section

import "math"

// Arcs is a closed section that is symmetrical and bounded by circular arcs: an invert arc about a centre above the lowest point,
// side arcs about centres beyond the middle, and a crown arc.
type Arcs struct {
	height float64
	invert circle // of the lowest arc
	upper  [2]arc // the side arc, the crown arc
	breaks []float64
}

// arc is a pair of arcs, left and right, from a level upwards, with what the section has below that level.
type arc struct {
	from   float64 // level at which it begins
	centre float64 // level of its centre
	inset  float64 // distance of its centre beyond the middle of the section; half the width is sqrt(radius^2 - v^2) - inset
	radius float64
	start  float64 // sqrt(radius^2 - v^2) at its beginning, v = level - centre
	below  Geometry
}

// NewEgg returns the standard ovoid of that height in m: with r = height/3 a crown arc of radius r, side arcs of 3r and an invert
// arc of r/2; inverted, the blunt end lies below. The arcs pass into one another smoothly: the side arcs' centres lie at
// the level of the crown's, 2r beyond the middle, so that the distance from there to the invert's centre is
// sqrt(4 + 9/4)r = 2.5r = 3r - r/2, and side and invert arcs touch at r/5 above the lowest point.
func NewEgg(height float64, inverted bool) (Section, error) {
	var c check
	c.size("height", height)
	if err := c.err(); err != nil {
		return nil, err
	}
	r := height / 3
	if inverted {
		return newArcs(height, r, arc{from: r, centre: r, inset: 2 * r, radius: 3 * r, start: 3 * r},
			arc{from: height * (14.0 / 15), centre: height - 0.5*r, radius: 0.5 * r, start: 0.4 * r}), nil
	}
	return newArcs(height, 0.5*r, arc{from: 0.2 * r, centre: 2 * r, inset: 2 * r, radius: 3 * r, start: 2.4 * r},
		arc{from: 2 * r, centre: 2 * r, radius: r, start: r}), nil
}

// NewHorseshoe returns a horseshoe of that height in m, which is its width: with r = height/2 a half circle of radius r as crown, side
// arcs of 2r about the opposite springing points, and an invert arc of 2r about the crown's highest point. Side and
// invert meet where (x + r)^2 + (y - r)^2 = 4r^2 = x^2 + (y - 2r)^2: x = r - y, y = r(3 - sqrt(7))/2.
func NewHorseshoe(height float64) (Section, error) {
	var c check
	c.size("height", height)
	if err := c.err(); err != nil {
		return nil, err
	}
	r := 0.5 * height
	const root7 = 2.6457513110645905905016157536392604257102591830824501803683
	return newArcs(height, 2*r, arc{from: r * ((3 - root7) / 2), centre: r, inset: r, radius: 2 * r, start: r * ((root7 + 1) / 2)},
		arc{from: r, centre: r, radius: r, start: r}), nil
}

func newArcs(height, invert float64, side, crown arc) *Arcs {
	s := &Arcs{height: height, invert: newCircle(invert), breaks: []float64{side.from, crown.from}}
	s.invert.put(&side.below, side.from, 2*invert-side.from)
	side.put(&crown.below, crown.from, height-crown.from)
	s.upper = [2]arc{side, crown}
	return s
}

// put writes the geometry at a depth on the arc that stays a distance above below the crown of the section. With v the level above the arc's centre, w = sqrt(radius^2 - v^2),
// and h half the angle between the arc's beginning and the surface about m, the middle between them, the
// part under the arc that lies above its beginning, measured from the arc's own vertical axis, has
//
//	area      radius^2 * (2h + cos(2m)*sin(2h))/2
//	moment    radius^3 * (cos(m)*(sin(h)*(h + cos(2m)*sin(h)*cos(h)) + 2/3*sin(2m)*sin(h)^3)
//	                      - sin(m)*(sin(h) - h*cos(h) + cos(2m)/3*sin(h)^3))
//
// the latter from the integral of radius^3*(sin(m+h) - sin(t))*cos(t)^2 over t from m-h to m+h. Nothing in it cancels near the beginning.
func (a *arc) put(g *Geometry, depth, above float64) {
	rise := depth - a.from
	v, first := depth-a.centre, a.from-a.centre
	var w float64
	if a.inset == 0 { // a crown arc, whose highest point is that of the section
		w = math.Sqrt(above * (2*a.radius - above))
	} else {
		w = math.Sqrt((a.radius - v) * (a.radius + v))
	}
	// The sum of the vectors to the two ends points at the middle between them and is 2*radius*cos(h) long.
	sumX, sumY := w+a.start, v+first
	length := math.Sqrt(sumX*sumX + sumY*sumY)
	cosM, sinM := sumX/length, sumY/length
	half := 0.5 / a.radius
	sinH, cosH := rise*half/cosM, length*half
	h := math.Atan2(sinH, cosH)
	cos2M, sin2M := (cosM-sinM)*(cosM+sinM), 2*sinM*cosM
	cubeH := sinH * sinH * sinH
	lag := sinH - h*cosH
	if h < 0.35 {
		q := h * h
		lag = h * q * (1.0/3 - q*(1.0/30-q*(1.0/840-q*(1.0/45360-q*(1.0/3991680-q*(1.0/518918400))))))
	}
	area := a.radius * a.radius * (h + cos2M*sinH*cosH)
	moment := a.radius * a.radius * a.radius *
		(cosM*(sinH*(h+cos2M*sinH*cosH)+2.0/3*sin2M*cubeH) - sinM*(lag+cos2M*(1.0/3)*cubeH))
	g.Depth = depth
	g.Area = a.below.Area + 2*(area-a.inset*rise)
	g.Perimeter = a.below.Perimeter + 4*a.radius*h
	g.TopWidth = 2 * (w - a.inset)
	g.Moment = a.below.Moment + rise*a.below.Area + (2*moment - a.inset*rise*rise)
	g.PerimeterRate = 2 * a.radius / w
	g.TopWidthRate = -2 * v / w
}

// At implements Section. At the crown, and for a depth beyond it, the rates are infinite.
func (s *Arcs) At(depth float64) (g Geometry) {
	if depth > s.height {
		depth = s.height
	}
	above := s.height - depth
	switch {
	case depth <= s.upper[0].from:
		s.invert.put(&g, depth, 2*s.invert.radius-depth)
	case depth <= s.upper[1].from:
		s.upper[0].put(&g, depth, above)
	default:
		s.upper[1].put(&g, depth, above)
	}
	return g
}

// Full implements Section.
func (s *Arcs) Full() Geometry { return full(s.At(s.height)) }

// Height implements Section.
func (s *Arcs) Height() float64 { return s.height }

// Closed implements Section.
func (s *Arcs) Closed() bool { return true }

// Bank implements Section.
func (s *Arcs) Bank() (depth float64, known bool) { return s.height, true }

// Breaks implements Section.
func (s *Arcs) Breaks() []float64 { return s.breaks }

// Form implements Section.
func (s *Arcs) Form() Form { return Arched }
