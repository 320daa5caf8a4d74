package picture

import (
	"math"
	"strconv"

	"leat/api/operation"
	"leat/api/wire"
)

// markPens are the pens of the marks of depths.
var markPens = map[string]*pen{"normal": normalLine, "critical": critical, "given": givenLine, "alternate": alternate, "sequent": sequent}

// crossHigh is the height of a section's drawing, chartHigh that of charts.
const (
	crossHigh = 268.0
	chartHigh = 262.0
)

// bankLevel returns the line of a bank or a crown, if it is known.
func bankLevel(c *operation.Cross, units wire.System) []level {
	switch {
	case math.IsNaN(c.Bank):
		return nil
	case c.Closed:
		return []level{{crownLine, "crown", told(units, wire.QuantityLength, c.Bank), c.Bank, nil}}
	}
	return []level{{bankLine, "bank", told(units, wire.QuantityLength, c.Bank), c.Bank, nil}}
}

// drawDepths draws the section with its characteristic depths, and where they stand on the curves of energy and force.
func drawDepths(solved *operation.Solved, a *wire.DepthsAnswer, f *operation.Figure) *list {
	units := solved.Units
	l := newList("Depths", solved, barrelled(f.Facts, f.Cross))
	levels := bankLevel(f.Cross, units)
	waterDepth := a.NormalDepth
	if a.Given.Present {
		waterDepth = a.Given.State.Depth
	}
	if math.IsNaN(waterDepth) && a.Closed && a.Surcharged {
		waterDepth = f.Cross.Bank
	}
	for _, m := range f.Marks {
		levels = append(levels, level{markPens[m.Name], m.Name, told(units, wire.QuantityLength, m.Depth), m.Depth, nil})
		l.describe(m.Name + " depth " + told(units, wire.QuantityLength, m.Depth) + ".")
	}
	foot := l.cross(f.Cross, units, rectangle{margin, bodyTop, paperWide - margin, bodyTop + crossHigh}, waterDepth, levels)
	if a.SlopeClass != "" {
		l.describe("The slope is " + a.SlopeClass + ".")
	}
	for _, absent := range []struct{ depth, why string }{{"normal", a.NormalAbsent}, {"critical", a.CriticalAbsent}} {
		if absent.why == "" {
			continue
		}
		text := "There is no " + absent.depth + " depth: " + absent.why
		l.describe(text)
		for _, line := range lines(text, common, paperWide-2*margin) {
			foot += 17
			l.write(ink, point{margin, foot}, start, common, line)
		}
		foot += 4
	}
	if len(f.Energy) == 0 {
		return l.finish(foot + margin)
	}

	top := foot + 38
	bottom := top + chartHigh - 44
	left, right := margin+tickRoom, paperWide-margin-labelRoom
	half := 0.5 * (right - left - 22)
	deepest := f.Energy[len(f.Energy)-1].Y
	up := scale{0, deepest, bottom, top}
	shown := up
	shown.to = units.FromSI(wire.QuantityLength, deepest)
	l.write(soft, point{margin, top - 14}, start, small, "depth ("+unitText(units, wire.QuantityLength)+")")
	l.axisLeft(shown, left, left, 8)
	var pens []*pen
	var energies, forces []operation.Point2
	var wanted []float64
	for _, m := range f.Marks {
		pens = append(pens, markPens[m.Name])
		energies, forces = append(energies, operation.Point2{X: m.Energy, Y: m.Depth}), append(forces, operation.Point2{X: m.Force, Y: m.Depth})
		wanted = append(wanted, up.at(m.Depth))
	}
	// Hair lines of each depth through both charts to its label.
	places := spread(wanted, top+4, bottom)
	for i, m := range f.Marks {
		l.label(soft, m.Name, "", point{left, wanted[i]}, right, places[i])
		l.marker(pens[i], point{right + 26, places[i]})
	}
	l.chart(f.Energy, energies, pens, wire.QuantityLength, "specific energy", units, rectangle{left, top, left + half, bottom}, up)
	l.chart(f.Force, forces, pens, wire.QuantityVolume, "specific force", units, rectangle{right - half, top, right, bottom}, up)
	return l.finish(bottom + 44 + margin)
}

// mostLevels is how many depths a section is drawn with: what there is room for.
const mostLevels = 12

// drawSection draws the section with water at its depths.
func drawSection(solved *operation.Solved, a *wire.SectionAnswer, f *operation.Figure) *list {
	units := solved.Units
	l := newList("Section", solved, barrelled(f.Facts, f.Cross))
	levels := bankLevel(f.Cross, units)
	waterDepth := math.NaN()
	chosen := few(len(a.States), mostLevels)
	for _, i := range chosen {
		s := &a.States[i]
		name, depth := "depth", told(units, wire.QuantityLength, s.Depth)
		if s.Regime != "" {
			name = s.Regime
		}
		text := name + " " + depth
		levels = append(levels, level{waterLine, name, depth, s.Depth, nil})
		l.describe(text + ": area " + told(units, wire.QuantityArea, s.Area) + ", top width " + told(units, wire.QuantityLength, s.TopWidth) + ".")
		if !(s.Depth <= waterDepth) {
			waterDepth = s.Depth
		}
	}
	foot := l.cross(f.Cross, units, rectangle{margin, bodyTop, paperWide - margin, bodyTop + crossHigh}, waterDepth, levels)
	if left := len(a.States) - len(chosen); left > 0 {
		l.leftOut(foot, left, "depths")
		return l.finish(foot + 24)
	}
	return l.finish(foot + margin)
}

// leftOut says that not everything is drawn.
func (l *list) leftOut(y float64, n int, what string) {
	text := strconv.Itoa(n) + " more " + what + " are not drawn; the answer as JSON has them."
	if n == 1 {
		text = "One more of the " + what + " is not drawn; the answer as JSON has it."
	}
	l.write(soft, point{margin, y + 14}, start, small, text)
	l.describe(text)
}

// few returns at most so many indices below n, evenly, both ends among them.
func few(n, most int) []int {
	var out []int
	count := min(n, most)
	for i := range count {
		if count == 1 {
			return []int{0}
		}
		out = append(out, i*(n-1)/(count-1))
	}
	return out
}

// drawRating draws the depth-discharge curve with the points of the table, and the section between its depths.
func drawRating(solved *operation.Solved, a *wire.RatingAnswer, f *operation.Figure) *list {
	units := solved.Units
	l := newList("Rating", solved, barrelled(f.Facts, f.Cross))
	if len(f.Rating) == 0 {
		l.write(ink, point{margin, bodyTop + 20}, start, common, "None of the discharges has a depth; the warnings say why.")
		l.describe("None of the discharges has a depth.")
		return l.finish(bodyTop + 50)
	}
	top := bodyTop + 20
	bottom := top + 300
	left, right := margin+tickRoom, paperWide-margin-labelRoom
	lowest, deepest := f.Rating[0].Y, f.Rating[len(f.Rating)-1].Y
	highest := deepest
	if bank := f.Cross.Bank; bank > deepest && bank < 1.3*deepest {
		highest = bank
	}
	up := scale{0, 1.04 * highest, bottom, top}
	shown := up
	shown.to = units.FromSI(wire.QuantityLength, up.to)
	l.write(soft, point{margin, top - 14}, start, small, "depth ("+unitText(units, wire.QuantityLength)+")")
	l.axisLeft(shown, left, right, 10)
	var points []operation.Point2
	var pens []*pen
	chosen := few(len(a.States), 40)
	for _, i := range chosen {
		s := &a.States[i]
		if math.IsNaN(s.Depth) || math.IsNaN(s.Discharge) {
			continue
		}
		points, pens = append(points, operation.Point2{X: s.Discharge, Y: s.Depth}), append(pens, curve)
	}
	type note struct {
		pen         *pen
		name, value string
		from        point
	}
	var notes []note
	var wanted []float64
	for _, b := range bankLevel(f.Cross, units) {
		if b.depth <= highest {
			y := up.at(b.depth)
			l.line(b.pen, point{left, y}, point{right, y})
			notes, wanted = append(notes, note{b.pen, b.name, b.value, point{right, y}}), append(wanted, y)
		}
	}
	across := l.chart(f.Rating, points, pens, wire.QuantityDischarge, "discharge", units, rectangle{left, top, right, bottom}, up)
	seen := len(points)
	for _, i := range few(seen, 8) {
		p := points[i]
		at := point{across.at(p.X), up.at(p.Y)}
		notes = append(notes, note{nil, told(units, wire.QuantityDischarge, p.X), "at " + told(units, wire.QuantityLength, p.Y), at})
		wanted = append(wanted, at.y)
	}
	places := spread(wanted, top+4, bottom)
	for i, n := range notes {
		l.label(n.pen, n.name, n.value, n.from, right, places[i])
	}
	l.describe("From " + told(units, wire.QuantityLength, lowest) + " to " + told(units, wire.QuantityLength, deepest) + " deep.")
	for _, i := range few(seen, 8) {
		l.describe("Discharge " + told(units, wire.QuantityDischarge, points[i].X) + " at depth " + told(units, wire.QuantityLength, points[i].Y) + ".")
	}
	next := bottom + 52
	if more := len(a.States) - len(chosen); more > 0 {
		l.leftOut(bottom+34, more, "points")
		next += 12
	}
	levels := append(bankLevel(f.Cross, units), level{waterLine, "deepest", told(units, wire.QuantityLength, deepest), deepest, nil})
	if lowest < deepest {
		levels = append(levels, level{waterLine, "lowest", told(units, wire.QuantityLength, lowest), lowest, nil})
	}
	return l.finish(l.cross(f.Cross, units, rectangle{margin, next, paperWide - margin, next + 220}, deepest, levels) + margin)
}
