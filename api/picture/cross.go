package picture

import (
	"math"

	"leat/api/operation"
	"leat/api/wire"
)

// A rectangle is a place for a drawing.
type rectangle struct{ left, top, right, bottom float64 }

// A level is a depth to be drawn across a section, with its label.
type level struct {
	pen   *pen
	name  string
	value string  // told after the name, which is shortened where both have no room
	depth float64 // m
	mark  *pen    // the sign of a judgement that stands before the label in place of a sample of the line; nil for none
}

// The room beside a plot: left for the ticks and right for labels.
const (
	tickRoom  = 46.0
	labelRoom = 196.0
	paperWide = 640.0
	margin    = 14.0
)

// stretches are by how much heights may be drawn larger than widths.
var stretches = []float64{1, 1.5, 2, 3, 4, 5, 6, 8, 10, 15, 20, 30, 40, 50, 100, 200, 500, 1000}

// cross draws a section with water up to a depth (NaN for none), levels across it, and their labels to its right. r is the place that it may take; it returns
// where it ends.
func (l *list) cross(c *operation.Cross, units wire.System, r rectangle, waterDepth float64, levels []level) (bottom float64) {
	left, right, top := math.Inf(1), math.Inf(-1), 0.0
	for _, p := range c.Outline {
		left, right, top = min(left, p.X), max(right, p.X), max(top, p.Y)
	}
	for _, v := range levels {
		top = max(top, v.depth)
	}
	plot := rectangle{r.left + tickRoom, r.top + 20, r.right - labelRoom, r.bottom - 38}
	// Equal scales where they fit, else heights drawn larger by a round number.
	const brim, below = 24.0, 12.0
	width, height := plot.right-plot.left-2*brim, plot.bottom-plot.top-below-8
	perWidth, perHeight := width/(right-left), height/top
	stretch := 1.0
	for _, s := range stretches {
		if s <= perHeight/perWidth && !c.Closed {
			stretch = s
		}
	}
	per := min(perWidth, perHeight/stretch)
	plot.bottom = plot.top + max(8+top*per*stretch+below, pitch*float64(len(levels)))
	bottom = plot.bottom + 38
	middleX := 0.5 * (plot.left + plot.right)
	half := 0.5 * (right - left) * per
	across := scale{left, right, middleX - half, middleX + half}
	up := scale{0, top, plot.bottom - below, plot.bottom - below - top*per*stretch}
	at := func(p operation.Point2) point { return point{across.at(p.X), up.at(p.Y)} }

	tickScale := up
	tickScale.to = units.FromSI(wire.QuantityLength, top)
	l.write(soft, point{r.left, up.last - 14}, start, small, "depth ("+unitText(units, wire.QuantityLength)+")")
	l.axisLeft(tickScale, plot.left, plot.right, int(math.Abs(up.last-up.first)/24)+1)

	wall := make([]point, len(c.Outline))
	for i, p := range c.Outline {
		wall[i] = at(p)
	}
	first, last := wall[0], wall[len(wall)-1]
	switch {
	case c.Closed:
		if !math.IsNaN(waterDepth) {
			l.area(water, wetted(c.Outline, waterDepth, at)...)
		}
		ring := append(append([]point(nil), wall...), first)
		l.line(lining, ring...)
	default:
		// Ground below the wall; level beside it where it ends at the bank. Elsewhere it goes on upwards.
		from, to := first.x, last.x
		if ends := c.Outline; ends[0].Y <= c.Bank*(1+1e-9) {
			from = max(plot.left, from-brim)
		}
		if ends := c.Outline; ends[len(ends)-1].Y <= c.Bank*(1+1e-9) {
			to = min(plot.right, to+brim)
		}
		earth := append([]point{{from, plot.bottom}, {from, first.y}}, wall...)
		earth = append(earth, point{to, last.y}, point{to, plot.bottom})
		l.area(ground, earth...)
		if !math.IsNaN(waterDepth) {
			l.area(water, wetted(c.Outline, waterDepth, at)...)
		}
		l.line(bedLine, earth[1:len(earth)-1]...)
	}
	l.zones(c, across, up, plot.top)
	l.levels(c, across, up, plot, levels)

	offsets := scale{units.FromSI(wire.QuantityLength, left), units.FromSI(wire.QuantityLength, right), across.first, across.last}
	if right > left {
		l.axisBelow(offsets, plot.bottom, plot.bottom, 8)
	}
	caption := "offset (" + unitText(units, wire.QuantityLength) + ")"
	if stretch > 1 {
		caption += ", heights drawn " + number(stretch) + " times as large"
	}
	if !c.Exact {
		caption += ", shape from widths alone"
	}
	l.write(soft, point{plot.left, bottom - 4}, start, small, caption)
	return bottom
}

// levels draws lines across the section where it is wet and labels to the right of it.
func (l *list) levels(c *operation.Cross, across, up scale, plot rectangle, levels []level) {
	wanted := make([]float64, len(levels))
	for i, v := range levels {
		wanted[i] = up.at(v.depth)
	}
	places := spread(wanted, plot.top+4, plot.bottom)
	for i, v := range levels {
		y := wanted[i]
		end := across.last
		for _, s := range spans(c.Outline, v.depth) {
			a, b := across.at(s[0]), across.at(s[1])
			if b-a < 3 { // a line too short to see
				a, b = a-4, b+4
			}
			l.line(v.pen, point{a, y}, point{b, y})
			end = b
		}
		sample := v.pen
		if v.mark != nil {
			sample = soft
			l.judgement(v.mark, point{plot.right + 28, places[i]})
		}
		l.label(sample, v.name, v.value, point{end, y}, plot.right, places[i])
	}
}

// label writes a text to the right of a plot at a height, with a sample of its line and a leader from what it means. A pen without a stroke leaves the
// place of the sample free for a sign; nil has the text stand there.
func (l *list) label(p *pen, name, value string, from point, right, y float64) {
	l.line(leader, from, point{right + 4, from.y}, point{right + 12, y}, point{right + 14, y})
	x, room := right+43, labelRoom-46
	switch {
	case p == nil:
		x, room = right+18, labelRoom-20
	case p.stroke != "":
		l.line(p, point{right + 14, y}, point{right + 38, y})
	}
	if value != "" {
		name = cut(name, common, room-wide(" "+value, common)) + " " + value
	}
	l.write(ink, point{x, y + 4}, start, common, cut(name, common, room))
}

// zones draws where zones of roughness part, and what each has.
func (l *list) zones(c *operation.Cross, across, up scale, top float64) {
	from, drawn := across.from, math.Inf(-1)
	for _, z := range c.Dividers {
		until := z.Until
		if math.IsNaN(until) || until > across.to {
			until = across.to
		}
		if until <= from {
			continue
		}
		a, b := across.at(from), across.at(until)
		text := "n " + number(z.Manning)
		if width := wide(text, small); 0.5*(a+b-width) > drawn {
			l.write(soft, point{0.5 * (a + b), top - 4}, middle, small, text)
			drawn = 0.5*(a+b+width) + 6
		}
		if until < across.to {
			l.line(divide, point{b, top - 12}, point{b, up.at(heightAt(c.Outline, until))})
		}
		from = until
	}
}

// heightAt returns the height of a wall at an offset within it.
func heightAt(outline []operation.Point2, offset float64) float64 {
	for i := 1; i < len(outline); i++ {
		if a, b := outline[i-1], outline[i]; offset <= b.X {
			if a.X == b.X {
				return b.Y
			}
			return a.Y + (offset-a.X)/(b.X-a.X)*(b.Y-a.Y)
		}
	}
	return outline[len(outline)-1].Y
}

// spans returns from which offset to which the water of a depth reaches, trough by trough.
func spans(outline []operation.Point2, depth float64) [][2]float64 {
	var out [][2]float64
	begun, wet := 0.0, false
	for i, p := range outline {
		below := p.Y < depth
		if i == 0 {
			if begun, wet = p.X, below; wet {
				continue
			}
		}
		if i == 0 || below == wet {
			continue
		}
		x := crossing(outline[i-1], p, depth)
		if below {
			begun = x
		} else {
			out = append(out, [2]float64{begun, x})
		}
		wet = below
	}
	if wet {
		out = append(out, [2]float64{begun, outline[len(outline)-1].X})
	}
	return out
}

// crossing returns the offset at which a piece of wall passes a height.
func crossing(a, b operation.Point2, height float64) float64 {
	if a.Y == b.Y {
		return b.X
	}
	return a.X + (height-a.Y)/(b.Y-a.Y)*(b.X-a.X)
}

// wetted returns the outline of the water of a depth.
func wetted(outline []operation.Point2, depth float64, at func(operation.Point2) point) []point {
	var out []point
	for i, p := range outline {
		if i > 0 && (outline[i-1].Y < depth) != (p.Y < depth) {
			out = append(out, at(operation.Point2{X: crossing(outline[i-1], p, depth), Y: depth}))
		}
		out = append(out, at(operation.Point2{X: p.X, Y: min(p.Y, depth)}))
	}
	return out
}
