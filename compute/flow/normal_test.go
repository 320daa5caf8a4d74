package flow

import (
	"testing"

	"leat/compute/friction"
	"leat/compute/section"
)

// A sand roughness larger than 14.8 times the greatest hydraulic radius of a rectangle (half its width) leaves no conveyance by Colebrook and White's
// formula at any depth.
func TestNoConveyanceAtAnyDepth(t *testing.T) {
	s, err := section.NewRectangular(2)
	s = must(t, s, err)
	law, err := friction.NewSandRoughness(101, 1.14e-6, 9.80665)
	c := Channel{Section: s, Law: must(t, law, err), Slope: 0.004, Gravity: 9.80665, Barrels: 2}
	if depths, absent := c.Normal(0.05, nil); len(depths) != 0 || absent != NoConveyance {
		t.Errorf("normal depths %v, %v", depths, absent)
	}
}
