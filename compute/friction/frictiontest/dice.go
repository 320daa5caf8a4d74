// Package frictiontest makes random sections and roughnesses for tests of packages above friction.
package frictiontest

import (
	"math"
	"math/rand/v2"

	"leat/compute/friction"
	"leat/compute/section"
	"leat/compute/solve"
)

// Kinds are all kinds of section, each with dice of its own sizes.
var Kinds = []struct {
	Name string
	Make func(r *rand.Rand) (section.Section, error)
}{
	{"rectangular", func(r *rand.Rand) (section.Section, error) { return section.NewRectangular(size(r)) }},
	{"trapezoidal", func(r *rand.Rand) (section.Section, error) {
		return section.NewTrapezoidal(size(r), side(r), side(r))
	}},
	{"triangular", func(r *rand.Rand) (section.Section, error) { return section.NewTriangular(side(r), 0.1+side(r)) }},
	{"parabolic", func(r *rand.Rand) (section.Section, error) { return section.NewParabolic(size(r), size(r)) }},
	{"u_shaped", func(r *rand.Rand) (section.Section, error) { return section.NewUShaped(size(r)) }},
	{"circular", func(r *rand.Rand) (section.Section, error) { return section.NewCircular(size(r)) }},
	{"box", func(r *rand.Rand) (section.Section, error) {
		w, h := size(r), size(r)
		haunch := 0.0
		if r.IntN(2) == 0 {
			haunch = r.Float64() * min(h, w/2) * 0.99
		}
		return section.NewBox(w, h, haunch)
	}},
	{"elliptical", func(r *rand.Rand) (section.Section, error) { return section.NewElliptical(size(r), size(r)) }},
	{"egg", func(r *rand.Rand) (section.Section, error) { return section.NewEgg(size(r), r.IntN(2) == 0) }},
	{"horseshoe", func(r *rand.Rand) (section.Section, error) { return section.NewHorseshoe(size(r)) }},
	{"gutter", func(r *rand.Rand) (section.Section, error) {
		cross := solve.Exp(-1 - 4*r.Float64())
		if r.IntN(2) == 0 {
			return section.NewGutter(cross, 0.1+0.2*r.Float64(), 0, 0)
		}
		return section.NewGutter(cross, 0.1+0.2*r.Float64(), 0.2+r.Float64(), cross*(1+4*r.Float64()))
	}},
	{"two_stage", func(r *rand.Rand) (section.Section, error) {
		z := side(r)
		return section.NewTwoStage(section.TwoStage{BottomWidth: size(r), LeftSideSlope: z, RightSideSlope: z, BenchHeight: size(r),
			LeftBenchWidth: bench(r), RightBenchWidth: bench(r), UpperSideSlope: side(r)})
	}},
	{"surveyed", func(r *rand.Rand) (section.Section, error) { return section.NewSurveyed(survey(r)) }},
	{"tabulated", func(r *rand.Rand) (section.Section, error) { return section.NewTabulated(table(r)) }},
}

// size returns a length from 0.1 to 50 m.
func size(r *rand.Rand) float64 { return solve.Exp(math.Log(0.1) + r.Float64()*math.Log(500)) }

// side returns a side slope.
func side(r *rand.Rand) float64 {
	if r.IntN(6) == 0 {
		return 0
	}
	return 5 * r.Float64() * r.Float64()
}

// bench returns the width of a bench, sometimes 0.
func bench(r *rand.Rand) float64 {
	if r.IntN(4) == 0 {
		return 0
	}
	return size(r)
}

// survey returns a line with troughs, level stretches and vertical walls.
func survey(r *rand.Rand) [][2]float64 {
	n := 3 + r.IntN(20)
	points := make([][2]float64, n)
	x, base := 0.0, 100*r.Float64()
	for i := range points {
		if i > 0 && r.IntN(5) > 0 {
			x += 3 * r.Float64()
		}
		level := base + 3*r.Float64()
		if r.IntN(4) == 0 {
			level = math.Round(level)
		}
		if i > 1 && points[i-1][0] == x && points[i-2][0] == x { // a wall is two points
			x += 0.5
		}
		points[i] = [2]float64{x, level}
	}
	points[0][1] += 3
	points[n-1][1] += 3
	return points
}

// table returns the rows of a trapezoid, so that they are consistent, at irregular depths.
func table(r *rand.Rand) [][4]float64 {
	b, z := size(r), side(r)
	n := 2 + r.IntN(8)
	rows := make([][4]float64, n)
	y := 0.0
	for i := range rows {
		y += 0.05 + r.Float64()
		rows[i] = [4]float64{y, (b + z*y) * y, b + 2*y*math.Sqrt(1+z*z), b + 2*z*y}
	}
	return rows
}

// Law binds a random law to a section.
func Law(r *rand.Rand, s section.Section) (friction.Law, error) {
	n := func() float64 { return solve.Exp(math.Log(0.008) + r.Float64()*math.Log(20)) }
	rules := []friction.Combination{friction.Divided, friction.HortonEinstein, friction.Lotter, friction.Pavlovskii}
	switch r.IntN(8) {
	case 0:
		return friction.NewStrickler(1 / n())
	case 1:
		return friction.NewChezy(20 + 60*r.Float64())
	case 2:
		return friction.NewSandRoughness(solve.Exp(math.Log(1e-5)+r.Float64()*math.Log(1e4)), 1.14e-6, 9.80665)
	case 3:
		d := 0.1 + r.Float64()
		return friction.NewManningByDepth([][2]float64{{d, n()}, {d + 0.1 + r.Float64(), n()}, {d + 2 + r.Float64(), n()}})
	case 4, 5:
		if zoned, ok := s.(section.Zoned); ok {
			return friction.NewZones(zoned, []float64{-0.1 + r.Float64(), 1 + 4*r.Float64()}, []float64{n(), n(), n()}, rules[r.IntN(4)])
		}
		if bedded, ok := s.(section.Bedded); ok {
			return friction.NewBedAndSides(bedded, n(), n(), rules[1+2*r.IntN(2)])
		}
	}
	return friction.NewManning(n())
}
