package flow

import (
	"math"

	"leat/compute/section"
)

// EnergyBranches visits the branches of the specific energy over depth, from the bed to the crown or without end: falling ones are
// supercritical, rising ones subcritical.
func (m *Motion) EnergyBranches(visit func(b Branch) bool) {
	f := m.hollow(specificEnergy)
	m.channel.branches(&f, visit)
}

// ForceBranches visits the branches of the specific force over depth.
func (m *Motion) ForceBranches(visit func(b Branch) bool) {
	f := m.hollow(specificForce)
	m.channel.branches(&f, visit)
}

// LeastEnergy returns the depth of least specific energy: the critical depth that has it, else exactly full for a closed section. known is false where an open
// section has no critical depth.
func (m *Motion) LeastEnergy() (depth, energy float64, known bool) {
	return m.least(m.critical, m.Energy)
}

func (m *Motion) least(all func([]float64) ([]float64, Absence), value func(section.Geometry) float64) (depth, least float64, known bool) {
	var room [8]float64
	depths, _ := all(room[:0])
	least = math.Inf(1)
	for _, y := range depths {
		if v := value(m.channel.Section.At(y)); v < least {
			depth, least = y, v
		}
	}
	if len(depths) == 0 && m.channel.Section.Closed() {
		depth = m.channel.Section.Height()
		return depth, value(m.channel.Geometry(depth)), true
	}
	return depth, least, len(depths) > 0
}
