package profile

import (
	"math"

	"leat/compute/solve"
)

// controls returns the places inside the stretch at which F is 1 and the numerator of ddepth/dx passes zero from below to above: there the flow passes from
// subcritical to supercritical by itself, looking at the ends of so many parts.
func (v *varying) controls(parts int) ([]passage, error) {
	var found []passage
	v.corners = nil
	numerator := func(x float64) float64 {
		s := v.side(x)
		depth, _, known := s.motion.LeastEnergy()
		if !known || depth >= v.height {
			return math.NaN()
		}
		n, _ := v.rates(x, depth)
		return n
	}
	before, from := math.NaN(), 0.0
	for i := range parts + 1 {
		x := v.length * float64(i) / float64(parts)
		n := numerator(x)
		if before < 0 && n > 0 {
			at, _, ok := solve.RootSlopeless(numerator, from, x)
			if !ok || !(at > 0 && at < v.length) {
				before, from = n, x
				continue
			}
			if math.Abs(numerator(at)) > 1e-6*(n-before) {
				if p, is := v.corner(numerator, from, x); is {
					found = append(found, p)
					v.corners = append(v.corners, p.x)
				}
			} else {
				s := v.side(at)
				depth, _, _ := s.motion.LeastEnergy()
				if _, through := v.throughCritical(at, depth); through {
					found = append(found, passage{at, depth, depth})
				}
			}
		}
		before, from = n, x
	}
	return found, nil
}

// corner returns the place between two others, the numerator negative at the first and positive at the second, where critical depth jumps because another
// minimum of the energy becomes the least, and the numerator jumps past zero with it. Subcritical flow comes to critical depth there as to any control,
// and supercritical flow leaves it from the other critical depth, at equal energy.
func (v *varying) corner(numerator func(float64) float64, lo, hi float64) (p passage, ok bool) {
	for range 100 {
		middle := lo + (hi-lo)/2
		if middle == lo || middle == hi {
			break
		}
		switch n := numerator(middle); {
		case n < 0:
			lo = middle
		case n > 0:
			hi = middle
		default:
			return p, false
		}
	}
	a, b := v.side(lo), v.side(hi)
	above, e0, known := a.motion.LeastEnergy()
	below, e1, too := b.motion.LeastEnergy()
	if !known || !too || math.Abs(e1-e0) > 1e-9*e0 {
		return p, false // one of them begins or ends at a break
	}
	return passage{lo, above, below}, true
}

// throughCritical returns the slope ddepth/dx with which a flow passes from subcritical to supercritical through a place where numerator and denominator
// of the equation vanish: of the two solutions of the quadratic that de l'Hospital's rule gives, the one along which the denominator falls. ok is false
// where there is none.
func (v *varying) throughCritical(x, depth float64) (slope float64, ok bool) {
	dx, dy := 1e-5*v.length, 1e-5*depth
	dx = min(dx, x/2, (v.length-x)/2)
	n1, d1 := v.rates(x-dx, depth)
	n2, d2 := v.rates(x+dx, depth)
	nx, denominatorX := (n2-n1)/(2*dx), (d2-d1)/(2*dx)
	n1, d1 = v.rates(x, depth-dy)
	n2, d2 = v.rates(x, depth+dy)
	ny, denominatorY := (n2-n1)/(2*dy), (d2-d1)/(2*dy)
	// denominatorY*m^2 + (denominatorX - ny)*m - nx = 0
	b := denominatorX - ny
	square := b*b + 4*denominatorY*nx
	if !(square > 0) || denominatorY == 0 {
		return 0, false
	}
	root := math.Sqrt(square)
	for _, m := range [2]float64{(-b - root) / (2 * denominatorY), (-b + root) / (2 * denominatorY)} {
		if denominatorX+denominatorY*m < 0 {
			return m, true
		}
	}
	return 0, false
}
