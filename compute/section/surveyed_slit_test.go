package section

import (
	"errors"
	"testing"

	"leat/compute"
)

// An end of the line that is its lowest point, with a wall going up from it, encloses nothing beside the wall: water there would have depth but no area.
func TestSurveyRefusesAWallUpFromItsEnd(t *testing.T) {
	for _, points := range [][][2]float64{
		{{0, 10}, {0, 11}, {3, 12}},
		{{0, 12}, {3, 11}, {3, 10}},
	} {
		_, err := NewSurveyed(points)
		var faults compute.Faults
		if !errors.As(err, &faults) || faults[0].Code != "no_width" {
			t.Errorf("%v: %v", points, err)
		}
	}
	if _, err := NewSurveyed([][2]float64{{0, 1}, {0, 0}, {2, 0}, {2, 1}}); err != nil {
		t.Errorf("a rectangle: %v", err)
	}
}
