package flow

import "math"

// SlopeClass is the class of a bed slope at a discharge (Bakhmeteff 1932): the letter of the curves on it.
type SlopeClass uint8

const (
	Unclassed SlopeClass = iota // neither a normal nor a critical depth
	Mild
	Steep
	CriticalSlope
	HorizontalSlope
	AdverseSlope
)

var slopeNames = [...]string{"", "mild", "steep", "critical", "horizontal", "adverse"}

func (s SlopeClass) String() string { return slopeNames[s] }

// Letter returns the letter of the curves on a slope: M, S, C, H or A; 0 for Unclassed.
func (s SlopeClass) Letter() byte { return "\x00MSCHA"[s] }

// same is the relative difference below which two depths, or a Froude number and one, count as the same.
const same = 1e-6

// Class returns the class of the channel's slope at a discharge (total, m3/s) whose normal and critical depths are given, rising.
func (c *Channel) Class(discharge float64, normal, critical []float64) SlopeClass {
	switch {
	case c.Slope == 0:
		return HorizontalSlope
	case c.Slope < 0:
		return AdverseSlope
	case len(normal) == 0 && len(critical) == 0:
		return Unclassed
	case len(normal) == 0:
		return Mild
	case len(critical) > 0 && math.Abs(normal[0]-critical[0]) <= same*critical[0]:
		return CriticalSlope
	}
	m := c.Motion(discharge)
	if m.EnergyRate(c.Section.At(normal[0])) > 0 {
		return Mild
	}
	return Steep
}

// Full reports whether a depth is the crown of a closed section or above it.
func (c *Channel) Full(depth float64) bool {
	return c.Section.Closed() && depth >= c.Section.Height()
}
