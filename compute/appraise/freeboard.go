package appraise

import (
	"math"

	"leat/compute/flow"
)

// foot is the international foot in m.
const foot = 0.3048

// CanalFreeboard returns the freeboard in m for a canal that carries a discharge in m3/s at a depth in m,
//
//	F = sqrt(C*depth) in ft, C from 1.5 at 20 ft3/s to 2.5 at 3,000 ft3/s and more
//
// (US Bureau of Reclamation; V. T. Chow 1959, section 7-5). Between, C is taken linear in the discharge, below 20 ft3/s as 1.5. Practice asks for no less than
// 1 ft; that is for a figure beside the rule.
func CanalFreeboard(discharge, depth float64) float64 {
	cubicFeet := discharge / (foot * foot * foot)
	c := 1.5 + min(1, max(0, (cubicFeet-20)/(3000-20)))
	return foot * math.Sqrt(c*(depth/foot))
}

// ChuteFreeboard returns the freeboard in m for a chute in which water runs at a velocity in m/s and a depth in m,
//
//	F = 2.0 + 0.025 v d^(1/3) in ft
//
// (US Bureau of Reclamation, Design of Small Dams, chapter on spillways).
func ChuteFreeboard(velocity, depth float64) float64 {
	return foot * (2 + 0.025*(velocity/foot)*math.Cbrt(depth/foot))
}

// BendRise returns by how much in m the outer water surface of a bend rises above the mean one,
//
//	C V^2 T/(g r),  C = 0.5 for tranquil flow, 1 for rapid flow, whose cross waves add to it
//
// (US Army Corps of Engineers, EM 1110-2-1601, section 2-5 and table 2-4, simple circular curves of rectangular and trapezoidal channels). Gravity is its part
// normal to the bed, as the depth is. An unknown Froude number counts as rapid.
func BendRise(c *flow.Channel, s *flow.State, radius float64) float64 {
	coefficient := 1.0
	if s.FroudeNumber < 1 && s.Regime == flow.Subcritical {
		coefficient = 0.5
	}
	return coefficient * s.Velocity * s.Velocity * s.Geometry.TopWidth / (c.Gravity * c.Cosine() * radius)
}
