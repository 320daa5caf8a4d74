package section

import (
	"math"
	"testing"

	"pgregory.net/rapid"
)

// agree reports whether two values agree to a relative tolerance.
func agree(a, b, tolerance float64) bool {
	return math.Abs(a-b) <= tolerance*math.Max(math.Abs(a), math.Abs(b)) || a == b
}

// sameGeometry compares all members but the depth.
func sameGeometry(t *rapid.T, what string, a, b Geometry, tolerance float64) {
	t.Helper()
	scale := a.TopWidth / a.Depth
	if !agree(a.Area, b.Area, tolerance) || !agree(a.Perimeter, b.Perimeter, tolerance) || !agree(a.TopWidth, b.TopWidth, tolerance) ||
		!agree(a.Moment, b.Moment, tolerance) || !agree(a.PerimeterRate, b.PerimeterRate, tolerance) ||
		!(math.Abs(a.TopWidthRate-b.TopWidthRate) <= tolerance*math.Max(math.Abs(a.TopWidthRate), scale) || a.TopWidthRate == b.TopWidthRate) {
		t.Fatalf("%s:\n%+v\n%+v", what, a, b)
	}
}

// piece returns the smooth piece of a section that holds a depth.
func piece(s Section, depth float64) (lo, hi float64) {
	lo, hi = 0, s.Height()
	for _, b := range s.Breaks() {
		if b < depth {
			lo = b
		} else {
			hi = math.Min(hi, b)
		}
	}
	return lo, hi
}

// The derivatives are those of the curves: by central differences inside a piece, extrapolated to fourth order.
func TestDerivatives(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		s := anySection(t)
		depth := reach(s) * rapid.Float64Range(0.01, 0.99).Draw(t, "depth")
		lo, hi := piece(s, depth)
		step := 0.004 * math.Min(depth-lo, math.Min(hi-depth, depth))
		if step < 1e-5*depth {
			return
		}
		g := s.At(depth)
		slope := func(f func(Geometry) float64) float64 {
			d := func(h float64) float64 { return (f(s.At(depth+h)) - f(s.At(depth-h))) / (2 * h) }
			return (4*d(step/2) - d(step)) / 3
		}
		noise := 1e-12 * depth / step
		for _, c := range []struct {
			name      string
			got, want float64
			scale     float64
		}{
			{"dA/dy = T", slope(func(g Geometry) float64 { return g.Area }), g.TopWidth, g.Area / depth},
			{"dM/dy = A", slope(func(g Geometry) float64 { return g.Moment }), g.Area, g.Moment / depth},
			{"dP/dy", slope(func(g Geometry) float64 { return g.Perimeter }), g.PerimeterRate, g.Perimeter / depth},
			{"dT/dy", slope(func(g Geometry) float64 { return g.TopWidth }), g.TopWidthRate, g.TopWidth / depth},
		} {
			if !(math.Abs(c.got-c.want) <= 1e-5*math.Abs(c.want)+noise*c.scale+1e-6*c.scale) {
				t.Fatalf("%T at %v: %s is %v by differences, %v", s, depth, c.name, c.got, c.want)
			}
		}
	})
}

// Area, perimeter and moment never fall with depth and the width of an open section that comes from a line never does.
func TestMonotone(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		s := anySection(t)
		last := Geometry{}
		for i := range 200 {
			depth := reach(s) * float64(i+1) / 200
			g := s.At(depth)
			if !(g.Area > last.Area && g.Moment > last.Moment && g.Perimeter >= last.Perimeter*(1-1e-15) && g.TopWidth >= 0) {
				t.Fatalf("%T: %+v after %+v", s, g, last)
			}
			if !(g.Perimeter >= g.TopWidth) && i < 199 {
				if _, table := s.(*Tabulated); !table {
					t.Fatalf("%T: perimeter shorter than the surface: %+v", s, g)
				}
			}
			last = g
		}
	})
}

// Nothing but a rate jumps at a break, save where a bench or a ledge is level.
func TestContinuityAtBreaks(t *testing.T) {
	for _, c := range samples {
		for _, b := range c.section.Breaks() {
			below, above := c.section.At(b), c.section.At(math.Nextafter(b, 9))
			if !agree(below.Area, above.Area, 1e-14) || !agree(below.Moment, above.Moment, 1e-14) {
				t.Errorf("%s at %v: %+v, %+v", c.name, b, below, above)
			}
			if c.name != "two_stage" && c.name != "surveyed" && (!agree(below.Perimeter, above.Perimeter, 1e-14) || !agree(below.TopWidth, above.TopWidth, 1e-14)) {
				t.Errorf("%s at %v: %+v, %+v", c.name, b, below, above)
			}
		}
	}
}

// A section scaled by a length has lengths, areas and moments scaled by its powers; scaled by a power of two, bit for bit.
func TestScaling(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		k := math.Ldexp(1, rapid.IntRange(-6, 6).Draw(t, "binade"))
		w, h := size(t, "width"), size(t, "height")
		z := rapid.Float64Range(0, 3).Draw(t, "slope")
		points := anyPoints(t)
		scaled := make([][2]float64, len(points))
		for i, p := range points {
			scaled[i] = [2]float64{p[0] * k, p[1] * k}
		}
		pairs := map[string][2]Section{
			"trapezoidal": {must(NewTrapezoidal(w, z, 1)), must(NewTrapezoidal(w*k, z, 1))},
			"u_shaped":    {must(NewUShaped(w)), must(NewUShaped(w * k))},
			"circular":    {must(NewCircular(w)), must(NewCircular(w * k))},
			"box":         {must(NewBox(w, h, min(w, h)/4)), must(NewBox(w*k, h*k, min(w, h)/4*k))},
			"elliptical":  {must(NewElliptical(w, h)), must(NewElliptical(w*k, h*k))},
			"egg":         {must(NewEgg(h, false)), must(NewEgg(h*k, false))},
			"horseshoe":   {must(NewHorseshoe(h)), must(NewHorseshoe(h * k))},
			"gutter":      {must(NewGutter(0.03, 0.2, w, 0.1)), must(NewGutter(0.03, 0.2*k, w*k, 0.1))},
			"two_stage":   {must(NewTwoStage(TwoStage{w, z, z, h, 1, 2, z})), must(NewTwoStage(TwoStage{w * k, z, z, h * k, k, 2 * k, z}))},
			"surveyed":    {must(NewSurveyed(points)), must(NewSurveyed(scaled))},
		}
		share := rapid.Float64Range(0.001, 1).Draw(t, "share")
		for name, p := range pairs {
			depth := share * reach(p[0])
			a, b := p[0].At(depth), p[1].At(depth*k)
			b.Depth, b.Area, b.Perimeter, b.TopWidth, b.Moment = b.Depth/k, b.Area/(k*k), b.Perimeter/k, b.TopWidth/k, b.Moment/(k*k*k)
			if a != b {
				t.Fatalf("%s at %v by %v:\n%+v\n%+v", name, depth, k, a, b)
			}
		}
		p, q := must(NewParabolic(w, h)), must(NewParabolic(w*k*k, h*k*k)) // by a square, for the root of the height
		depth := share * h
		a, b := p.At(depth), q.At(depth*k*k)
		if !agree(a.Area*k*k*k*k, b.Area, 1e-15) || !agree(a.Perimeter*k*k, b.Perimeter, 1e-15) {
			t.Fatalf("parabolic: %+v, %+v", a, b)
		}
	})
}

func TestLimitsBetweenKinds(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		w, h := size(t, "width"), size(t, "height")
		left, right := 0.25*float64(rapid.IntRange(0, 12).Draw(t, "left")), rapid.Float64Range(0.1, 3).Draw(t, "right")
		depth := h * rapid.Float64Range(1e-6, 0.999999).Draw(t, "depth")

		box := must(NewBox(w, h, 0)).At(depth)
		sameGeometry(t, "box without haunch to rectangle", box, must(NewRectangular(w)).At(depth), 1e-15)
		sameGeometry(t, "box with a vanishing haunch to box", box, must(NewBox(w, h, 1e-9*h)).At(depth*(1-1e-8)), 1e-7)
		trapezoid := must(NewTrapezoidal(w, left, right)).At(depth)
		sameGeometry(t, "upright trapezoid to rectangle", must(NewTrapezoidal(w, 0, 0)).At(depth), must(NewRectangular(w)).At(depth), 0)
		triangle := must(NewTriangular(left, right)).At(depth)
		narrow := must(NewTrapezoidal(1e-9, left, right)).At(depth)
		if depth > 0.01 {
			sameGeometry(t, "narrow trapezoid to triangle", narrow, triangle, 1e-5)
		}
		sameGeometry(t, "two_stage below its bench to trapezoid",
			must(NewTwoStage(TwoStage{w, left, right, h, 3, 1, 2})).At(depth), trapezoid, 4e-15)
		sameGeometry(t, "two_stage without benches and break to trapezoid",
			must(NewTwoStage(TwoStage{w, right, right, h / 3, 0, 0, right})).At(depth), must(NewTrapezoidal(w, right, right)).At(depth), 4e-15)
		top := 2 * h
		sameGeometry(t, "surveyed to trapezoid",
			must(NewSurveyed([][2]float64{{-left * top, top}, {0, 0}, {w, 0}, {w + right*top, top}})).At(depth), trapezoid, 1e-13)
		sameGeometry(t, "gutter to triangle", must(NewGutter(1/right, h, 0, 0)).At(depth), must(NewTriangular(0, right)).At(depth), 1e-14)
		sameGeometry(t, "gutter of one slope to triangle", must(NewGutter(1/right, h, w, 1/right)).At(depth), must(NewTriangular(0, right)).At(depth), 1e-14)
		sameGeometry(t, "ellipse to circle", must(NewElliptical(h, h)).At(depth), must(NewCircular(h)).At(depth), 4e-15)
		sameGeometry(t, "nearly round ellipse to circle", must(NewElliptical(h*(1+1e-9), h)).At(depth), must(NewCircular(h)).At(depth), 4e-9)
		if depth < h/2 {
			sameGeometry(t, "u_shaped to circle", must(NewUShaped(h)).At(depth), must(NewCircular(h)).At(depth), 0)
		}
		// A parabola narrow against its depth has walls that are nearly upright; its perimeter tends to twice the depth.
		if p := must(NewParabolic(1e-6*h, h)).At(depth); !agree(p.Perimeter, 2*depth, 1e-2*math.Sqrt(h/depth)*1e-3) {
			t.Fatalf("narrow parabola: %+v", p)
		}
	})
}

// An egg upside down is the inverted egg: what is wet in one is dry in the other.
func TestEggUpsideDown(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		h := size(t, "height")
		egg, inverted := must(NewEgg(h, false)), must(NewEgg(h, true))
		depth := h * rapid.Float64Range(1e-3, 0.999).Draw(t, "depth")
		full := egg.Full()
		wet, dry := inverted.At(depth), egg.At(h-depth)
		if !agree(wet.TopWidth, dry.TopWidth, 1e-12) || !(math.Abs(wet.Area+dry.Area-full.Area) <= 1e-14*full.Area) ||
			!(math.Abs(wet.Perimeter+dry.Perimeter-full.Perimeter) <= 1e-14*full.Perimeter) {
			t.Fatalf("%+v\n%+v\n%+v", wet, dry, full)
		}
	})
}

// The parts of a section add up to it; only the depth at which each begins to be wet is its own.
func TestPartsAddUp(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		var s Zoned
		var lo, hi float64
		if rapid.Bool().Draw(t, "surveyed") {
			points := anyPoints(t)
			s = must(NewSurveyed(points)).(Zoned)
			lo, hi = points[0][0], points[len(points)-1][0]
		} else {
			s = must(NewTwoStage(TwoStage{2, 1.5, 1, 1, rapid.Float64Range(0, 3).Draw(t, "bench"), 2, 1})).(Zoned)
			lo, hi = -9, 9
		}
		var offsets []float64
		for i, n := 0, rapid.IntRange(0, 4).Draw(t, "cuts"); i < n; i++ {
			offset := lo + (hi-lo)*float64(rapid.IntRange(1, 63).Draw(t, "cut"))/64
			if len(offsets) == 0 || offset > offsets[len(offsets)-1] {
				offsets = append(offsets, offset)
			}
		}
		parts, err := s.Part(offsets)
		if err != nil || len(parts) != len(offsets)+1 {
			t.Fatalf("%v, %v", parts, err)
		}
		depth := rapid.Float64Range(0.001, 4).Draw(t, "depth")
		whole := s.At(depth)
		sum := Geometry{Depth: depth}
		for _, p := range parts {
			g := p.At(depth)
			sum.Area += g.Area
			sum.Perimeter += g.Perimeter
			sum.TopWidth += g.TopWidth
			sum.Moment += g.Moment
			sum.PerimeterRate += g.PerimeterRate
			sum.TopWidthRate += g.TopWidthRate
			if b := p.Breaks(); g == (Geometry{}) && !(len(b) > 0 && depth <= b[0]) {
				t.Fatalf("dry at %v, but breaks are %v", depth, b)
			}
		}
		sameGeometry(t, "parts and whole", whole, sum, 1e-13)
	})
}

func TestTurnedSurvey(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		points := anyPoints(t)
		turned := make([][2]float64, len(points))
		for i, p := range points {
			turned[len(points)-1-i] = [2]float64{-p[0], p[1]}
		}
		depth := rapid.Float64Range(0.001, 4).Draw(t, "depth")
		a, b := must(NewSurveyed(points)), must(NewSurveyed(turned))
		sameGeometry(t, "mirrored", a.At(depth), b.At(depth), 1e-14)
		e, f := a.(Surveyed).Ends(depth), b.(Surveyed).Ends(depth)
		if e.AboveLeft != f.AboveRight || e.AboveRight != f.AboveLeft || e.Troughs != f.Troughs {
			t.Fatalf("%+v, %+v", e, f)
		}
		// Troughs, counted along the line.
		water, count, wet := a.(*SurveyedLine).Invert()+depth, 0, false
		for _, p := range points {
			if under := p[1] < water; under != wet {
				wet = under
				if under {
					count++
				}
			}
		}
		if e.Troughs != count {
			t.Fatalf("%d troughs, want %d", e.Troughs, count)
		}
	})
}
