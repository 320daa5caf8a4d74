package profile_test

import (
	"slices"
	"testing"

	"leat/compute/profile"
)

// TestChainagesAreAsAsked: a station stands at the very chainage that the report asks for, not one rounding away.
func TestChainagesAreAsAsked(t *testing.T) {
	each(t, func(t *testing.T, _ *reference, run *profile.Run, answer *profile.Answer) {
		for _, x := range run.Report.At {
			if !slices.ContainsFunc(answer.Stations, func(p profile.Point) bool { return p.Chainage == x }) {
				t.Errorf("no station at %.17g", x)
			}
		}
	})
}
