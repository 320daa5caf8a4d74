package picture

import (
	"math"

	"leat/api/operation"
	"leat/api/wire"
)

// chart draws a curve of some quantity over depth, with marks on it. Values are in SI; up is the scale of depths in m.
func (l *list) chart(points []operation.Point2, marks []operation.Point2, markPens []*pen, quantity wire.Quantity, name string, units wire.System, r rectangle, up scale) scale {
	most := 0.0
	for _, m := range marks {
		if m.X > most {
			most = m.X
		}
	}
	for i := len(points) - 1; i >= 0; i-- {
		if x := points[i].X; !math.IsNaN(x) {
			most = max(most, x)
			break
		}
	}
	across := scale{0, 1.08 * most, r.left, r.right}
	l.line(frame, point{r.left, r.top}, point{r.left, r.bottom}, point{r.right, r.bottom})
	shown := across
	shown.to = units.FromSI(quantity, across.to)
	l.axisBelow(shown, r.top, r.bottom, 5)
	l.write(soft, point{r.left, r.bottom + 32}, start, small, name+" ("+unitText(units, quantity)+")")
	var piece []point
	flush := func() {
		l.line(curve, piece...)
		piece = nil
	}
	for i, p := range points {
		switch {
		case math.IsNaN(p.X):
			flush()
			continue
		case p.X > across.to:
			if len(piece) > 0 {
				piece = append(piece, clipped(points[i-1], p, across, up))
			}
			flush()
			continue
		case len(piece) == 0 && i > 0 && points[i-1].X > across.to:
			piece = append(piece, clipped(p, points[i-1], across, up))
		}
		piece = append(piece, point{across.at(p.X), up.at(p.Y)})
	}
	flush()
	for i, m := range marks {
		if !math.IsNaN(m.X) {
			l.marker(markPens[i], point{across.at(m.X), up.at(m.Y)})
		}
	}
	return across
}

// clipped returns where a piece of curve from inside leaves the plot at its right.
func clipped(inside, outside operation.Point2, across, up scale) point {
	y := inside.Y + (across.to-inside.X)/(outside.X-inside.X)*(outside.Y-inside.Y)
	return point{across.last, up.at(y)}
}

// marker draws a small sign in the colour of one of marked; each has a shape of its own.
func (l *list) marker(p *pen, at point) {
	const r = 4.5
	var shape []point
	switch p {
	case normalLine:
		shape = []point{{at.x, at.y - r - 1}, {at.x + r + 1, at.y + r - 1}, {at.x - r - 1, at.y + r - 1}}
	case critical:
		shape = []point{{at.x, at.y - r - 1}, {at.x + r + 1, at.y}, {at.x, at.y + r + 1}, {at.x - r - 1, at.y}}
	case alternate:
		shape = []point{{at.x, at.y + r + 1}, {at.x + r + 1, at.y - r + 1}, {at.x - r - 1, at.y - r + 1}}
	case sequent:
		shape = []point{{at.x - r, at.y - r}, {at.x + r, at.y - r}, {at.x + r, at.y + r}, {at.x - r, at.y + r}}
	default:
		for i := range 16 {
			angle := 2 * math.Pi * float64(i) / 16
			shape = append(shape, point{at.x + r*math.Cos(angle), at.y + r*math.Sin(angle)})
		}
	}
	l.area(markers[p], shape...)
}
