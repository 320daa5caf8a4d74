package flow

import "math"

// CurveName names the water-surface curve on which a depth lies: M1 to A3, "uniform" within 1e-6 of a normal depth, or "" on an unclassed
// slope or for a full section (Bakhmeteff 1932; Chow 1959, section 9-3). The number is 1 where the bed falls faster than the energy and F < 1, 3 where
// it falls more slowly and F > 1, else 2; 2 too at critical flow.
func (c *Channel) CurveName(s *State, class SlopeClass, normal []float64) string {
	return c.curveName(s.Geometry.Depth, s.FrictionSlope, s.Regime, class, normal)
}

// CurveName is Channel.CurveName at a depth, for callers who need nothing else of its state.
func (m *Motion) CurveName(depth float64, class SlopeClass, normal []float64) string {
	g := m.geometry(depth)
	_, regime := m.regime(m.froudeTerm(g), depth >= m.crown)
	slope := m.FrictionSlope(g)
	if math.IsInf(slope, 1) {
		slope = math.NaN() // no conveyance
	}
	return m.channel.curveName(depth, slope, regime, class, normal)
}

func (c *Channel) curveName(depth, friction float64, regime Regime, class SlopeClass, normal []float64) string {
	for _, n := range normal {
		if math.Abs(depth-n) <= same*n {
			return "uniform"
		}
	}
	if class == Unclassed || regime == FullFlow || math.IsNaN(friction) {
		return ""
	}
	number := byte('2')
	switch {
	case regime == CriticalFlow:
	case c.Slope > friction && regime == Subcritical:
		number = '1'
	case c.Slope < friction && regime == Supercritical:
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
