package flow

import "math"

// CurveName names the water-surface curve on which a depth lies: M1 to A3, "uniform" within 1e-6 of a normal depth, or "" on an unclassed
// slope or for a full section (Bakhmeteff 1932; Chow 1959, section 9-3). The number is 1 where the bed falls faster than the energy and F < 1, 3 where
// it falls more slowly and F > 1, else 2; 2 too at critical flow.
func (c *Channel) CurveName(s *State, class SlopeClass, normal []float64) string {
	for _, depth := range normal {
		if math.Abs(s.Geometry.Depth-depth) <= same*depth {
			return "uniform"
		}
	}
	if class == Unclassed || s.Regime == FullFlow || math.IsNaN(s.FrictionSlope) {
		return ""
	}
	number := byte('2')
	switch {
	case s.Regime == CriticalFlow:
	case c.Slope > s.FrictionSlope && s.Regime == Subcritical:
		number = '1'
	case c.Slope < s.FrictionSlope && s.Regime == Supercritical:
		number = '3'
	}
	return curveNames[class][number-'1']
}

var curveNames = [...][3]string{
	Mild:            {"M1", "M2", "M3"},
	Steep:           {"S1", "S2", "S3"},
	CriticalSlope:   {"C1", "C2", "C3"},
	HorizontalSlope: {"H1", "H2", "H3"},
	AdverseSlope:    {"A1", "A2", "A3"},
}
