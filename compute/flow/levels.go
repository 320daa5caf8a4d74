package flow

import (
	"math"
)

// EnergyBranches visits the branches of the specific energy over depth, from the bed to the crown or without end: falling ones are
// supercritical, rising ones subcritical.
func (m *Motion) EnergyBranches(visit func(b Branch) bool) {
	if s := m.channel.Section; m.onceCritical() && len(s.Breaks()) == 0 && (m.channel.Law == nil || len(m.channel.Law.Breaks()) == 0) {
		if depth, ok := m.criticalBetween(0, s.Height()); ok {
			if visit(Branch{Hi: depth, First: true}) {
				visit(Branch{Lo: depth, Hi: s.Height(), Rising: true, Last: true})
			}
			return
		}
	}
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
	var room [8]float64
	depths, _, _ := m.critical(room[:0])
	energy = math.Inf(1)
	for _, y := range depths {
		if e := m.Energy(m.channel.Section.At(y)); e < energy {
			depth, energy = y, e
		}
	}
	if len(depths) == 0 && m.channel.Section.Closed() {
		depth = m.channel.Section.Height()
		return depth, m.Energy(m.channel.Geometry(depth)), true
	}
	return depth, energy, len(depths) > 0
}
