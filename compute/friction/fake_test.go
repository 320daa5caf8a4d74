package friction_test

import (
	"math"
	"testing"

	"leat/compute/friction"
	"leat/compute/section"
)

// still is a section that has the same geometry at every depth.
type still struct{ g section.Geometry }

func (s still) At(float64) section.Geometry { return s.g }
func (s still) Full() section.Geometry      { return s.g }
func (s still) Height() float64             { return math.Inf(1) }
func (s still) Closed() bool                { return false }
func (s still) Bank() (float64, bool)       { return 0, false }
func (s still) Breaks() []float64           { return nil }
func (s still) Form() section.Form          { return section.Irregular }

// ditch is a trapezoid whose bed stands at a height above the lowest point of a whole, with walls that may be internal (dry).
type ditch struct {
	width, left, right float64 // bottom width and horizontal run per unit rise of the sides
	floor              float64 // height of the bed
	leftDry, rightDry  bool    // a side that is a line between zones, without perimeter
	breaks             []float64
}

func (d ditch) At(depth float64) section.Geometry {
	y := depth - d.floor
	if !(y > 0) {
		return section.Geometry{Depth: depth}
	}
	var lengthening float64
	if !d.leftDry {
		lengthening += math.Sqrt(1 + d.left*d.left)
	}
	if !d.rightDry {
		lengthening += math.Sqrt(1 + d.right*d.right)
	}
	slopes := d.left + d.right
	return section.Geometry{
		Depth:         depth,
		Area:          y * (d.width + slopes*y/2),
		Perimeter:     d.width + lengthening*y,
		TopWidth:      d.width + slopes*y,
		Moment:        y * y * (d.width/2 + slopes*y/6),
		PerimeterRate: lengthening,
		TopWidthRate:  slopes,
	}
}

func (d ditch) Full() section.Geometry { return section.Geometry{} }
func (d ditch) Height() float64        { return math.Inf(1) }
func (d ditch) Closed() bool           { return false }
func (d ditch) Bank() (float64, bool)  { return 0, false }
func (d ditch) Breaks() []float64      { return d.breaks }
func (d ditch) Form() section.Form     { return section.Rising }
func (d ditch) BedWidth() float64      { return d.width }

// whole is a section of several parts side by side.
type whole struct {
	parts   []section.Section
	breaks  []float64
	parting error
	asked   *[]float64
}

func (w whole) At(depth float64) section.Geometry {
	sum := section.Geometry{Depth: depth}
	for _, part := range w.parts {
		g := part.At(depth)
		sum.Area += g.Area
		sum.Perimeter += g.Perimeter
		sum.TopWidth += g.TopWidth
		sum.Moment += g.Moment
		sum.PerimeterRate += g.PerimeterRate
		sum.TopWidthRate += g.TopWidthRate
	}
	return sum
}

func (w whole) Full() section.Geometry { return section.Geometry{} }
func (w whole) Height() float64        { return math.Inf(1) }
func (w whole) Closed() bool           { return false }
func (w whole) Bank() (float64, bool)  { return 0, false }
func (w whole) Breaks() []float64      { return w.breaks }
func (w whole) Form() section.Form     { return section.Irregular }

func (w whole) Part(offsets []float64) ([]section.Section, error) {
	if w.asked != nil {
		*w.asked = offsets
	}
	return w.parts, w.parting
}

// compound is a main ditch with two level flood plains, as three zones.
func compound() whole {
	plain := ditch{width: 12, right: 2, floor: 1.5, leftDry: true, breaks: []float64{1.5}}
	other := ditch{width: 7, left: 2, floor: 1.5, rightDry: true, breaks: []float64{1.5}}
	return whole{parts: []section.Section{other, notched{}, plain}, breaks: []float64{1.5}}
}

// notched is a rectangle 4 m wide with walls 1.5 m high and internal lines above.
type notched struct{ still }

func (notched) At(depth float64) section.Geometry {
	g := section.Geometry{Depth: depth, Area: 4 * depth, TopWidth: 4, Moment: 2 * depth * depth, Perimeter: 4 + 2*depth, PerimeterRate: 2}
	if depth > 1.5 {
		g.Perimeter, g.PerimeterRate = 7, 0
	}
	return g
}
func (notched) Breaks() []float64 { return []float64{1.5} }

// near fails the test unless got is within a relative tolerance of want, or within it of the size of what was subtracted.
func near(t *testing.T, what string, got, want, tolerance, scale float64) {
	t.Helper()
	if !(math.Abs(got-want) <= tolerance*(math.Abs(want)+scale)) {
		t.Errorf("%s = %.17g, want %.17g (off by %.3g)", what, got, want, got-want)
	}
}

// must returns a law that has to exist.
func must(law friction.Law, err error) friction.Law {
	if err != nil {
		panic(err)
	}
	return law
}
