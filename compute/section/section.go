// Package section answers the geometry of cross-sections at a depth, exactly and without allocation.
//
// The geometric elements of the simple shapes are those of every textbook (V. T. Chow, Open-Channel Hydraulics, 1959, tables 2-1 and
// 2-2, from memory); where a shape has a source or a derivation of its own, it stands beside it.
//
// Depths are in metres above the lowest point of the section, measured normal to the bed.
package section

// Geometry is what the wetted part of one cross-section has at a depth, with the derivatives that solvers need.
// dArea/ddepth is TopWidth and dMoment/ddepth is Area, on every piece.
type Geometry struct {
	Depth         float64 // m
	Area          float64 // m2
	Perimeter     float64 // wetted perimeter, m
	TopWidth      float64 // m
	Moment        float64 // first moment of the area about the water surface, m3: Area times the depth of its centroid
	PerimeterRate float64 // dPerimeter/ddepth on the piece that holds the depth
	TopWidthRate  float64 // dTopWidth/ddepth on that piece
}

// Radius returns the hydraulic radius Area/Perimeter in m.
func (g Geometry) Radius() float64 { return g.Area / g.Perimeter }

// A Section is one compiled cross-section. It is immutable and safe for concurrent use; its methods do not allocate.
type Section interface {
	// At returns the geometry at a depth, 0 < depth <= Height(). At a depth where something jumps (a level bench)
	// it is the value just below; at the height of a closed section it is the limit from below (a box's roof is dry,
	// the rates of a round crown are infinite).
	At(depth float64) Geometry

	// Full returns the geometry of a closed section filled exactly: roof wetted, TopWidth 0, rates 0.
	// For open sections it returns At(Height()) where that is finite, else the zero Geometry.
	Full() Geometry

	// Height returns the greatest depth the section is defined for: the crown of a closed one, the last row of a
	// tabulated one, +Inf for the rest.
	Height() float64

	// Closed reports whether the section has a crown.
	Closed() bool

	// Bank returns the depth at which the section overtops (a closed one's height) and whether it is known.
	Bank() (depth float64, known bool)

	// Breaks returns the depths strictly between 0 and Height() at which the area, perimeter or width or one of
	// their derivatives may jump, strictly rising. Between two of them, and below the first and above the last,
	// everything is smooth. The slice is the section's own: callers must not change it.
	Breaks() []float64

	// Form says what is known of the section's curves, so that solvers need not search where there is nothing to find.
	Form() Form
}

// Form classifies how a section's curves run; it is a promise on which solvers build.
type Form uint8

const (
	// Irregular promises nothing beyond smooth pieces.
	Irregular Form = iota
	// Banded promises that on every piece the area is a quadratic and the perimeter a linear function of depth. Between pieces width and
	// perimeter may jump upwards; the width falls with depth only in a closed section (a box with haunches).
	Banded
	// Rising promises that the hydraulic radius and A^3/T rise continuously with depth without end, so that there is exactly
	// one normal and one critical depth; derivatives may break at Breaks() (rectangle, trapezoid, triangle, parabola, u shape).
	Rising
	// Arched promises a closed smooth curve whose conveyance by Manning or Chezy rises to one maximum below the crown and then
	// falls, whose A^3/T rises throughout and whose top width falls to zero at the crown (circle, ellipse, egg, horseshoe).
	Arched
)

// Ends reports how far a wetted surface lies beyond or between the surveyed points of a section at a depth: what answers must warn of.
type Ends struct {
	AboveLeft, AboveRight bool // the water stands above that end of the surveyed line
	Troughs               int  // number of separate water surfaces
}

// Surveyed is a Section that comes from points and can tell what answers must warn of.
type Surveyed interface {
	Section
	Ends(depth float64) Ends
}

// Zoned is a Section that can be parted at offsets (m, rising; left negative for two_stage) into sections of its own,
// each measured from the lowest point of the whole: a zone may be dry up to some depth, where its Geometry is zero; that depth
// is then the first of its Breaks.
// The internal lines between zones add no perimeter. A wall that stands at an offset belongs to the zone whose water wets it.
type Zoned interface {
	Section
	// Part returns len(offsets)+1 sections. It fails with compute.Faults whose Member is the index of the
	// offending offset, where an offset lies outside the section's points or offsets do not rise.
	Part(offsets []float64) ([]Section, error)
}

// Bedded is a Section with a distinct bed.
type Bedded interface {
	Section
	// BedWidth returns the length of the bed in m; all other perimeter is sides.
	BedWidth() float64
}
