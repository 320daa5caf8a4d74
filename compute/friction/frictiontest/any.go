package frictiontest

import "leat/compute/section"

// AnySection builds a section of a kind from any numbers; the error says that they make none.
func AnySection(kind uint8, a, b, c, d float64) (section.Section, error) {
	switch kind % 14 {
	case 0:
		return section.NewRectangular(a)
	case 1:
		return section.NewTrapezoidal(a, b, c)
	case 2:
		return section.NewTriangular(a, b)
	case 3:
		return section.NewParabolic(a, b)
	case 4:
		return section.NewUShaped(a)
	case 5:
		return section.NewCircular(a)
	case 6:
		return section.NewBox(a, b, c)
	case 7:
		return section.NewElliptical(a, b)
	case 8:
		return section.NewEgg(a, b > c)
	case 9:
		return section.NewHorseshoe(a)
	case 10:
		return section.NewGutter(a, b, c, d)
	case 11:
		return section.NewTwoStage(section.TwoStage{BottomWidth: a, LeftSideSlope: b, RightSideSlope: b, BenchHeight: c, LeftBenchWidth: d, RightBenchWidth: a, UpperSideSlope: b})
	case 12:
		return section.NewSurveyed([][2]float64{{0, a}, {b, 0}, {b + c, d}, {b + 2*c, -d}, {b + 3*c, a}})
	}
	return section.NewTabulated([][4]float64{{a, b, c, d}, {2 * a, 2*b + a*d, 2 * c, 1.1 * d}})
}
