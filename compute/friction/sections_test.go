package friction_test

import (
	"errors"
	"math"
	"testing"

	"leat/compute"
	"leat/compute/friction"
	"leat/compute/section"
)

func twoStage(t *testing.T) section.Section {
	t.Helper()
	s, err := section.NewTwoStage(section.TwoStage{BottomWidth: 3, LeftSideSlope: 1, RightSideSlope: 1.5, BenchHeight: 1.2, LeftBenchWidth: 4, RightBenchWidth: 9, UpperSideSlope: 2})
	if err != nil {
		t.Fatal(err)
	}
	return s
}

func valley(t *testing.T) section.Section {
	t.Helper()
	// Two troughs, a wall at -5 and one at 20.
	s, err := section.NewSurveyed([][2]float64{{-20, 5}, {-12, 2.5}, {-5, 2.2}, {-5, 0}, {3, 0.2}, {8, 2}, {14, 1.1}, {20, 2.4}, {20, 3}, {35, 6}})
	if err != nil {
		t.Fatal(err)
	}
	return s
}

// TestZonesOfRealSections parts two_stage and surveyed sections and checks sums, derivatives and coefficients against their definitions.
func TestZonesOfRealSections(t *testing.T) {
	for _, row := range []struct {
		name    string
		section section.Section
		untils  []float64
		n       []float64
	}{
		{"two_stage at the toes of its benches", twoStage(t), []float64{-2.7, 3.3}, []float64{0.06, 0.03, 0.08}},
		{"two_stage at the middle", twoStage(t), []float64{0}, []float64{0.03, 0.05}},
		{"surveyed at its walls", valley(t), []float64{-5, 8, 20}, []float64{0.08, 0.03, 0.05, 0.1}},
		{"surveyed within", valley(t), []float64{-8, -1, 14}, []float64{0.08, 0.03, 0.05, 0.1}},
	} {
		t.Run(row.name, func(t *testing.T) {
			zoned := row.section.(section.Zoned)
			parts, err := zoned.Part(row.untils)
			if err != nil {
				t.Fatal(err)
			}
			for _, how := range []friction.Combination{friction.Divided, friction.HortonEinstein, friction.Pavlovskii} {
				law := must(friction.NewZones(zoned, row.untils, row.n, how)).(*friction.Zones)
				for depth := 0.013; depth < 7; depth *= 1.07 {
					g := row.section.At(depth)
					// The definitions, straight from the parts.
					var area, perimeter, k, first, second, horton, pavlovskii float64
					for i, part := range parts {
						z := part.At(depth)
						area, perimeter = area+z.Area, perimeter+z.Perimeter
						horton += z.Perimeter * math.Pow(row.n[i], 1.5)
						pavlovskii += z.Perimeter * row.n[i] * row.n[i]
						if z.Area > 0 {
							ki := z.Area * math.Pow(z.Area/z.Perimeter, 2./3) / row.n[i]
							k, first, second = k+ki, first+ki*ki/z.Area, second+ki*ki*ki/(z.Area*z.Area)
						}
					}
					near(t, "area of the parts", area, g.Area, 1e-13, 0)
					near(t, "perimeter of the parts", perimeter, g.Perimeter, 1e-13, 0)
					got, coefficients := law.At(g)
					whole := g.Area * math.Pow(g.Area/g.Perimeter, 2./3)
					switch how {
					case friction.Divided:
						near(t, "K", got.K, k, 1e-13, 0)
						near(t, "alpha", coefficients.Energy, second*area*area/(k*k*k), 1e-12, 0)
						near(t, "beta", coefficients.Momentum, first*area/(k*k), 1e-12, 0)
					case friction.HortonEinstein:
						near(t, "K", got.K, whole/math.Pow(horton/g.Perimeter, 2./3), 1e-13, 0)
					case friction.Pavlovskii:
						near(t, "K", got.K, whole/math.Sqrt(pavlovskii/g.Perimeter), 1e-13, 0)
					}
					if broken(depth, 1e-3*depth, row.section.Breaks(), law.Breaks()) {
						continue
					}
					h := 1e-4 * depth
					near(t, "dK/dy", got.Rate, slope5(func(y float64) float64 { return law.AtSlope(row.section.At(y), 0.1).K }, depth, h), 1e-8, got.K/depth)
					near(t, "dalpha/dy", coefficients.EnergyRate, slope5(func(y float64) float64 { return law.Coefficients(row.section.At(y)).Energy }, depth, h), 1e-7, coefficients.Energy/depth)
					near(t, "dbeta/dy", coefficients.MomentumRate, slope5(func(y float64) float64 { return law.Coefficients(row.section.At(y)).Momentum }, depth, h), 1e-7, coefficients.Momentum/depth)
				}
			}
		})
	}
}

// broken reports whether a break lies near a depth.
func broken(depth, distance float64, breaks ...[]float64) bool {
	for _, list := range breaks {
		for _, b := range list {
			if math.Abs(depth-b) <= distance {
				return true
			}
		}
	}
	return false
}

// TestZonesOutsideTheSection checks that a refused offset is named in the request's own way.
func TestZonesOutsideTheSection(t *testing.T) {
	_, err := friction.NewZones(valley(t).(section.Zoned), []float64{-5, 99}, []float64{0.03, -1, 0.05}, friction.Divided)
	var faults compute.Faults
	if !errors.As(err, &faults) {
		t.Fatalf("error %v", err)
	}
	members := map[string]bool{}
	for _, fault := range faults {
		members[fault.Member] = true
	}
	if len(faults) != 2 || !members["zones/1/manning"] || !members["zones/1/until"] {
		t.Errorf("faults %v", faults)
	}
}

// TestRoofBelongsToTheSides fills a box: bed as long as its width, all the rest is sides.
func TestRoofBelongsToTheSides(t *testing.T) {
	box, err := section.NewBox(2, 1.5, 0)
	if err != nil {
		t.Fatal(err)
	}
	law := must(friction.NewBedAndSides(box.(section.Bedded), 0.03, 0.012, friction.HortonEinstein))
	below, full := box.At(1.5), box.Full()
	for _, row := range []struct {
		g     section.Geometry
		sides float64
	}{{below, 3}, {full, 5}} {
		n := math.Pow((2*math.Pow(0.03, 1.5)+row.sides*math.Pow(0.012, 1.5))/(2+row.sides), 2./3)
		near(t, "K", law.AtSlope(row.g, 0.01).K, 3*math.Pow(3/(2+row.sides), 2./3)/n, 1e-14, 0)
	}
	if rate := law.AtSlope(full, 0.01).Rate; rate != 0 {
		t.Errorf("a full section's conveyance changes by %g", rate)
	}
}
