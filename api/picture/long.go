package picture

import (
	"cmp"
	"math"
	"slices"

	"leat/api/operation"
	"leat/api/wire"
)

// A long is the drawing of a profile: its two scales, in m, and what it lies in.
type long struct {
	*list
	units   wire.System
	answer  *wire.ProfileAnswer
	courses []operation.Course
	places  []operation.Place
	along   scale
}

// drawProfile draws the long section, with the marks above it and the stretches of curves and reaches below.
func drawProfile(solved *operation.Solved, a *wire.ProfileAnswer, f *operation.Figure) *list {
	l := &long{list: newList("Profile", solved, f.Facts), units: solved.Units, answer: a, courses: f.Long.Courses, places: f.Long.Places}
	left, right := margin+tickRoom+6, paperWide-margin-8
	l.along = scale{0, a.Length, left, right}
	y := l.legend(bodyTop+4, f.Long.Reported)

	flags, used, leftOut := rows(l.flags(), left-30, right+8, 5)
	flagFoot := y + 14*float64(used) + 4
	plot := rectangle{left, flagFoot + 10, right, flagFoot + 10 + 280}
	up := l.heights(plot)
	for _, g := range flags {
		base := flagFoot - 14*float64(g.row) - 3
		l.line(leader, point{g.at, base - 9}, point{g.at, plot.bottom})
		if g.pen.stroke != "" {
			l.line(g.pen, point{g.at, base - 10}, point{g.at, base + 2})
		}
		l.write(ink, point{g.from, base}, start, small, g.text)
	}
	l.longSection(plot, up, f.Long.Reported)
	y = plot.bottom + 36
	if scaled := math.Abs(up.at(up.from+l.deepest()) - up.at(up.from)); scaled < 45 {
		y = l.depthsAlong(rectangle{left, y + 22, right, y + 22 + 120})
	}
	y = l.stretchesOfCurves(y)
	y = l.stretchesOfReaches(y)
	if leftOut > 0 {
		l.leftOut(y, leftOut, "marks")
		y += 20
	}
	l.tell()
	return l.finish(y + 6)
}

// legend names the lines that are drawn.
func (l *long) legend(y float64, reported bool) float64 {
	entries := []struct {
		pen  *pen
		text string
		in   bool
	}{
		{waterLine, "water", true}, {energyLine, "energy", true}, {normalLine, "normal depth", l.anyLevel(func(c *operation.Course) [2]float64 { return c.Normal })},
		{critical, "critical depth", l.anyLevel(func(c *operation.Course) [2]float64 { return c.Critical })}, {bedLine, "bed", true},
		{bankLine, "bank", l.anyTop(false)}, {crownLine, "crown", l.anyTop(true)}, {jumpLine, "jump", len(l.answer.Jumps) > 0}, {station, "reported", reported},
	}
	x := margin
	for _, e := range entries {
		if !e.in {
			continue
		}
		width := 34 + wide(e.text, small) + 12
		if x+width > paperWide-margin {
			x, y = margin, y+16
		}
		if e.pen == station {
			l.dot(point{x + 14, y})
		} else {
			l.line(e.pen, point{x, y}, point{x + 28, y})
		}
		l.write(ink, point{x + 33, y + 4}, start, small, e.text)
		x += width
	}
	return y + 12
}

func (l *long) anyLevel(of func(*operation.Course) [2]float64) bool {
	return slices.ContainsFunc(l.courses, func(c operation.Course) bool { return !math.IsNaN(of(&c)[1]) })
}

func (l *long) anyTop(closed bool) bool {
	return slices.ContainsFunc(l.courses, func(c operation.Course) bool { return c.Closed == closed && !math.IsNaN(c.Top[0]) })
}

// flags are the jumps and controls, in order downstream.
func (l *long) flags() []sign {
	var out []sign
	for i := range l.answer.Jumps {
		j := &l.answer.Jumps[i]
		out = append(out, sign{l.along.at(j.Chainage), j.Form + " jump", jumpLine})
	}
	for i := range l.answer.Controls {
		c := &l.answer.Controls[i]
		out = append(out, sign{l.along.at(c.Chainage), "control: " + controlText(c.Kind), curve})
	}
	slices.SortStableFunc(out, func(a, b sign) int { return cmp.Compare(a.at, b.at) })
	return out
}

// controlText is what a kind of control is called.
func controlText(kind string) string {
	if kind == "sharp_crested" || kind == "broad_crested" {
		kind += "_weir"
	}
	return spoken(kind)
}

// heights chooses which levels a plot shows: bed, water and energy all, and of the other lines what lies not far above those.
func (l *long) heights(plot rectangle) scale {
	low, high := math.Inf(1), math.Inf(-1)
	for i := range l.places {
		s := &l.places[i]
		low, high = min(low, s.Bed), max(high, s.Water, s.Energy)
	}
	for i := range l.courses {
		low = min(low, l.courses[i].Bed[0], l.courses[i].Bed[1])
	}
	most := high
	for i := range l.courses {
		c := &l.courses[i]
		for _, level := range [...]float64{c.Normal[0], c.Normal[1], c.Critical[0], c.Critical[1], c.Top[0], c.Top[1]} {
			if level > most && level < low+1.6*(high-low) {
				most = level
			}
		}
	}
	span := most - low
	return scale{low - 0.05*span, most + 0.04*span, plot.bottom, plot.top}
}

// deepest returns the greatest depth in m.
func (l *long) deepest() float64 {
	deepest := 0.0
	for i := range l.places {
		deepest = max(deepest, l.places[i].Depth)
	}
	return deepest
}

// longSection draws bed, water and the lines above them.
func (l *long) longSection(plot rectangle, up scale, reported bool) {
	shown := up
	shown.from, shown.to = l.units.FromSI(wire.QuantityLength, up.from), l.units.FromSI(wire.QuantityLength, up.to)
	unit := unitText(l.units, wire.QuantityLength)
	l.write(soft, point{margin, plot.top - 14}, start, small, "level ("+unit+")")
	l.axisLeft(shown, plot.left, plot.right, 8)
	chainages := l.along
	chainages.to = l.units.FromSI(wire.QuantityLength, l.answer.Length)
	l.axisBelow(chainages, plot.top, plot.bottom, 10)
	l.write(soft, point{plot.left, plot.bottom + 31}, start, small, "chainage ("+unit+")")

	var bed []point
	for i := range l.courses {
		c := &l.courses[i]
		bed = append(bed, point{l.along.at(c.From), up.at(c.Bed[0])}, point{l.along.at(c.To), up.at(c.Bed[1])})
	}
	var surface, energy, wet []point
	for i := range l.places {
		s := &l.places[i]
		x := l.along.at(s.Chainage)
		surface, energy, wet = append(surface, point{x, up.at(s.Water)}), append(energy, point{x, up.at(s.Energy)}), append(wet, point{x, up.at(s.Free)})
	}
	for _, s := range slices.Backward(l.places) {
		wet = append(wet, point{l.along.at(s.Chainage), up.at(s.Bed)})
	}
	l.area(water, wet...)
	l.area(ground, append(append([]point{{plot.left, plot.bottom}}, bed...), point{plot.right, plot.bottom})...)
	l.courseLines(bankLine, up, false, func(c *operation.Course) ([2]float64, float64) { return openTop(c, false), c.From })
	l.courseLines(crownLine, up, false, func(c *operation.Course) ([2]float64, float64) { return openTop(c, true), c.From })
	l.courseLines(critical, up, true, func(c *operation.Course) ([2]float64, float64) { return c.Critical, c.CriticalFrom })
	l.courseLines(normalLine, up, true, func(c *operation.Course) ([2]float64, float64) { return c.Normal, c.NormalFrom })
	l.line(bedLine, bed...)
	l.line(energyLine, energy...)
	l.line(waterLine, surface...)
	for i := range l.answer.Jumps {
		l.jump(&l.answer.Jumps[i], up)
	}
	if reported {
		for _, i := range few(len(l.answer.Stations), mostDots) {
			s := &l.answer.Stations[i]
			l.dot(point{l.along.at(s.Chainage), up.at(s.WaterLevel)})
		}
	}
	l.line(frame, point{plot.left, plot.top}, point{plot.left, plot.bottom}, point{plot.right, plot.bottom})
}

// dot marks a station that the request wants reported.
func (l *list) dot(at point) {
	const r = 2.4
	l.area(station, point{at.x - r, at.y}, point{at.x, at.y - r}, point{at.x + r, at.y}, point{at.x, at.y + r})
}

// openTop returns the levels of a course's bank or crown.
func openTop(c *operation.Course, closed bool) [2]float64 {
	if c.Closed == closed {
		return c.Top
	}
	return [2]float64{math.NaN(), math.NaN()}
}

// courseLines draws a level along all courses, broken where it is not known, where it lies beyond the plot, and between courses that it steps at.
// Levels that are known downstream alone are joined from one course to the next.
func (l *long) courseLines(p *pen, up scale, step bool, of func(*operation.Course) (levels [2]float64, from float64)) {
	var piece []point
	flush := func() {
		l.line(p, piece...)
		piece = nil
	}
	for i := range l.courses {
		c := &l.courses[i]
		levels, from := of(c)
		if !(levels[0] <= up.to && levels[1] <= up.to) {
			flush()
			continue
		}
		if from < c.To {
			if step {
				flush()
			}
			piece = append(piece, point{l.along.at(from), up.at(levels[0])})
		}
		piece = append(piece, point{l.along.at(c.To), up.at(levels[1])})
	}
	flush()
}

// jump draws a jump as a wall of water from its one depth to the other, with the length that it needs.
func (l *long) jump(j *wire.ProfileJump, up scale) {
	i, _ := slices.BinarySearchFunc(l.places, j.Chainage, func(s operation.Place, chainage float64) int { return cmp.Compare(s.Chainage, chainage) })
	below := i
	for below+1 < len(l.places) && l.places[below+1].Chainage == j.Chainage {
		below++
	}
	if below == i || i == len(l.places) {
		return // no places stand at its two sides
	}
	x, y := l.along.at(j.Chainage), up.at(l.places[below].Water)
	l.line(jumpLine, point{x, up.at(l.places[i].Water)}, point{x, y})
	if !(j.Length > 0) {
		return
	}
	if to := l.along.at(min(j.Chainage+j.Length, l.answer.Length)); to-x > 4 {
		l.line(leader, point{x, y - 6}, point{to, y - 6})
		l.line(leader, point{to, y - 9}, point{to, y - 3})
	}
}

// depthsAlong draws the depths above the bed, where the fall of the bed leaves no room to see them in the long section. It returns where it ends.
func (l *long) depthsAlong(plot rectangle) float64 {
	most := l.deepest()
	for i := range l.answer.Reaches {
		for _, depth := range [...]float64{l.answer.Reaches[i].CriticalDepth, l.answer.Reaches[i].NormalDepth} {
			if depth > most && depth < 2*l.deepest() {
				most = depth
			}
		}
	}
	up := scale{0, 1.06 * most, plot.bottom, plot.top}
	shown := up
	shown.to = l.units.FromSI(wire.QuantityLength, up.to)
	l.write(soft, point{margin, plot.top - 14}, start, small, "depth ("+unitText(l.units, wire.QuantityLength)+")")
	l.axisLeft(shown, plot.left, plot.right, 5)
	var surface []point
	for i := range l.places {
		surface = append(surface, point{l.along.at(l.places[i].Chainage), up.at(l.places[i].Depth)})
	}
	if len(surface) == 0 {
		return plot.bottom
	}
	wet := append(append([]point(nil), surface...), point{surface[len(surface)-1].x, plot.bottom}, point{surface[0].x, plot.bottom})
	l.area(water, wet...)
	for i := range l.answer.Reaches {
		r, c := &l.answer.Reaches[i], &l.courses[i]
		if r.CriticalDepth <= up.to {
			l.line(critical, point{l.along.at(c.From), up.at(r.CriticalDepth)}, point{l.along.at(c.To), up.at(r.CriticalDepth)})
		}
		if r.NormalDepth <= up.to {
			l.line(normalLine, point{l.along.at(c.From), up.at(r.NormalDepth)}, point{l.along.at(c.To), up.at(r.NormalDepth)})
		}
	}
	l.line(waterLine, surface...)
	l.line(frame, point{plot.left, plot.top}, point{plot.left, plot.bottom}, point{plot.right, plot.bottom})
	return plot.bottom + 12
}

// strip draws one stretch of a band below the plot, with its name where there is room.
func (l *long) strip(y, from, to float64, name string) {
	l.line(frame, point{from, y + 3}, point{from, y - 11})
	l.line(frame, point{to, y + 3}, point{to, y - 11})
	if name != "" && wide(name, small)+6 <= to-from {
		l.write(ink, point{0.5 * (from + to), y}, middle, small, name)
	}
}

// stretchesOfCurves names the curves below the plot and returns where it ends.
func (l *long) stretchesOfCurves(y float64) float64 {
	y += 14
	l.write(soft, point{margin, y}, start, small, "curve")
	for i := 0; i < len(l.answer.Curves); {
		c := &l.answer.Curves[i]
		to := c.To
		for i++; i < len(l.answer.Curves) && l.answer.Curves[i].Curve == c.Curve && l.answer.Curves[i].From == to; i++ {
			to = l.answer.Curves[i].To
		}
		name := c.Curve
		if name == "" {
			name = "–"
		}
		l.strip(y, l.along.at(c.From), l.along.at(to), name)
	}
	return y + 6
}

// stretchesOfReaches names the reaches below the plot and returns where it ends.
func (l *long) stretchesOfReaches(y float64) float64 {
	y += 16
	l.write(soft, point{margin, y}, start, small, "reach")
	last := math.Inf(-1)
	for i := range l.courses {
		c := &l.courses[i]
		from, to := l.along.at(c.From), l.along.at(c.To)
		if to-last < 2 && i < len(l.courses)-1 {
			continue // too near to the mark before to be told from it
		}
		last = to
		name := ""
		if to-from > 14 {
			name = cut(c.ID.Text(), small, to-from-8)
		}
		l.strip(y, from, to, name)
	}
	return y + 8
}

// tell describes the run in words.
func (l *long) tell() {
	length := func(x float64) string { return told(l.units, wire.QuantityLength, x) }
	a := l.answer
	l.describe("A run of " + length(a.Length) + ".")
	if n := len(a.Stations); n > 0 {
		l.describe("The water level is " + length(a.Stations[0].WaterLevel) + " at the upstream end and " + length(a.Stations[n-1].WaterLevel) + " at the downstream end.")
	}
	for i := range a.Curves[:min(len(a.Curves), mostTold)] {
		if c := &a.Curves[i]; c.Curve != "" {
			l.describe("Curve " + c.Curve + " from chainage " + length(c.From) + " to " + length(c.To) + ".")
		}
	}
	for i := range a.Jumps[:min(len(a.Jumps), mostTold)] {
		j := &a.Jumps[i]
		l.describe("A jump (" + j.Form + ") at chainage " + length(j.Chainage) + ", from depth " + length(j.UpstreamDepth) + " to " + length(j.DownstreamDepth) + ".")
	}
	for i := range a.Controls[:min(len(a.Controls), mostTold)] {
		c := &a.Controls[i]
		l.describe("A control (" + controlText(c.Kind) + ") at chainage " + length(c.Chainage) + ".")
	}
}

// mostDots is how many reported stations are marked: more would be a band.
const mostDots = 150

// mostTold bounds how many of a kind a description tells.
const mostTold = 20
