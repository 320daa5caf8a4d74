package section

import "math"

// segment returns what is wet of a circle of radius 1 filled to a share of its diameter, from the quotient share/(1 - share), the sine
// of half the wetted angle, which is half the surface's width, and the cosine, which is the depth of the surface below the centre: half the
// wetted angle, the area and its moment about the surface.
//
//	area   = angle - sine*cosine
//	moment = sine - sine^3/3 - angle*cosine
//
// Both cancel at small angles, where their Taylor series in the angle stand instead:
//
//	area   = sum of (-1)^(n+1) * 4^n/(2n+1)! * angle^(2n+1), n = 1, 2, ...
//	moment = sum of (-1)^n * (3/4 + 9^n/4 - (2n+1))/(2n+1)! * angle^(2n+1), n = 2, 3, ...
func segment(quotient, sine, cosine float64) (angle, area, moment float64) {
	if quotient <= 1 {
		angle = 2 * math.Atan(math.Sqrt(quotient))
	} else {
		angle = math.Pi - 2*math.Atan(math.Sqrt(1/quotient))
	}
	if angle > 1.2 {
		return angle, angle - sine*cosine, sine*(1-sine*sine*(1.0/3)) - angle*cosine
	}
	// Even and odd terms apart, so that the processor can work on them side by side.
	q := angle * angle
	w := q * q
	area = (4.0/6 + w*(64.0/5040+w*(1024.0/39916800+w*(16384.0/1307674368000+w*(262144.0/121645100408832000+
		w*(4194304.0/25852016738884976640000)))))) -
		q*(16.0/120+w*(256.0/362880+w*(4096.0/6227020800+w*(65536.0/355687428096000+w*(1048576.0/51090942171709440000+
			w*(16777216.0/15511210043330985984000000))))))
	moment = (2.0/15 + w*(17.0/3780+w*(8303.0/389188800+w*(168151.0/5557616064000+w*(7913.0/463788509184000+
		w*(2206480753.0/484725313854093312000000+w*(357449882107.0/552610124608731372158976000000))))))) -
		q*(11.0/315+w*(461.0/1247400+w*(24911.0/27243216000+w*(1513361.0/1900704693888000+w*(98065811.0/323150209236062208000+
			w*(6619442261.0/113425723441857835008000000+w*(8227746647.0/1314392367995192266260480000000)))))))
	cube := angle * q
	return angle, cube * area, cube * q * moment
}

// circle is a circle of a radius in m.
type circle struct{ radius, inverse float64 } // inverse = 1/(2*radius)

func newCircle(radius float64) circle { return circle{radius, 0.5 / radius} }

// put writes the geometry of a circle filled to a depth that stays a distance above = 2*radius - depth below its crown.
func (c *circle) put(g *Geometry, depth, above float64) {
	sine, cosine := 2*math.Sqrt(depth*above)*c.inverse, (above-depth)*c.inverse
	angle, area, moment := segment(depth/above, sine, cosine)
	square := c.radius * c.radius
	rate := 2 / sine
	g.Depth = depth
	g.Area = square * area
	g.Perimeter = 2 * c.radius * angle
	g.TopWidth = 2 * c.radius * sine
	g.Moment = square * c.radius * moment
	g.PerimeterRate = rate
	g.TopWidthRate = rate * cosine
}

// Circular is a circular conduit.
type Circular struct {
	circle
	diameter float64
}

// NewCircular returns a circle from its diameter in m.
func NewCircular(diameter float64) (Section, error) {
	var c check
	c.size("diameter", diameter)
	if err := c.err(); err != nil {
		return nil, err
	}
	return &Circular{newCircle(0.5 * diameter), diameter}, nil
}

// At implements Section. At the crown, and for a depth beyond it, the rates are infinite.
func (s *Circular) At(depth float64) (g Geometry) {
	if depth > s.diameter {
		depth = s.diameter
	}
	s.put(&g, depth, s.diameter-depth)
	return g
}

// Full implements Section.
func (s *Circular) Full() Geometry { return full(s.At(s.diameter)) }

// full makes of the limit at a crown the geometry of the full section.
func full(g Geometry) Geometry {
	g.TopWidth, g.PerimeterRate, g.TopWidthRate = 0, 0, 0
	return g
}

// Height implements Section.
func (s *Circular) Height() float64 { return s.diameter }

// Closed implements Section.
func (s *Circular) Closed() bool { return true }

// Bank implements Section.
func (s *Circular) Bank() (depth float64, known bool) { return s.diameter, true }

// Breaks implements Section.
func (s *Circular) Breaks() []float64 { return nil }

// Form implements Section.
func (s *Circular) Form() Form { return Arched }

// UShaped is a half circle with vertical walls above it, open at the top.
type UShaped struct {
	circle
	breaks []float64
}

// NewUShaped returns a half circle of that width in m with vertical walls above it.
func NewUShaped(width float64) (Section, error) {
	var c check
	c.size("width", width)
	if err := c.err(); err != nil {
		return nil, err
	}
	return &UShaped{newCircle(0.5 * width), []float64{0.5 * width}}, nil
}

// At implements Section.
func (s *UShaped) At(depth float64) (g Geometry) {
	r := s.radius
	if depth <= r {
		s.put(&g, depth, 2*r-depth)
		return g
	}
	d := depth - r
	g.Depth = depth
	g.Area = r * (0.5*math.Pi*r + 2*d)
	g.Perimeter = math.Pi*r + 2*d
	g.TopWidth = 2 * r
	g.Moment = r * (r*r*(2.0/3) + d*(0.5*math.Pi*r+d))
	g.PerimeterRate = 2
	return g
}

// Full implements Section.
func (s *UShaped) Full() Geometry { return Geometry{} }

// Height implements Section.
func (s *UShaped) Height() float64 { return math.Inf(1) }

// Closed implements Section.
func (s *UShaped) Closed() bool { return false }

// Bank implements Section.
func (s *UShaped) Bank() (depth float64, known bool) { return 0, false }

// Breaks implements Section.
func (s *UShaped) Breaks() []float64 { return s.breaks }

// Form implements Section.
func (s *UShaped) Form() Form { return Rising }
