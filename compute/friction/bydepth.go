package friction

import (
	"math"
	"slices"
	"strconv"

	"leat/compute"
	"leat/compute/section"
)

// ManningByDepth is Manning's law with a coefficient that depends on the depth of flow: linear between the given depths,
// constant below the first and above the last.
type ManningByDepth struct {
	depths, n []float64
	breaks    []float64
}

// NewManningByDepth returns the law of rows of depth in m and Manning's n in s/m^(1/3). It fails with compute.Faults where there is
// no row, depths are negative or do not rise, or an n is not from 1e-6 to 1e3.
func NewManningByDepth(rows [][2]float64) (Law, error) {
	var faults compute.Faults
	if len(rows) == 0 {
		faults = append(faults, compute.Fault{Member: "manning_by_depth", Code: "empty", Detail: "At least one row of depth and Manning coefficient must be given."})
	}
	law := &ManningByDepth{depths: make([]float64, len(rows)), n: make([]float64, len(rows))}
	for i, row := range rows {
		law.depths[i], law.n[i] = row[0], row[1]
		member := "manning_by_depth/" + strconv.Itoa(i)
		switch depth := row[0]; {
		case math.IsNaN(depth) || math.IsInf(depth, 0):
			faults = append(faults, compute.Fault{Member: member + "/0", Code: "not_finite", Detail: "The depth must be a finite number."})
		case depth < 0:
			faults = append(faults, compute.Fault{Member: member + "/0", Code: "negative", Detail: "The depth must be 0 or more."})
		case depth > greatestDepth:
			faults = append(faults, compute.Fault{Member: member + "/0", Code: "out_of_range", Detail: "The depth is greater than any that occurs; check its unit."})
		case i > 0 && !(depth > rows[i-1][0]):
			faults = append(faults, compute.Fault{Member: member + "/0", Code: "not_rising", Detail: "The depth must be greater than that of the row before."})
		}
		faults = withinManning(faults, member+"/1", row[1])
	}
	if len(faults) > 0 {
		return nil, faults
	}
	law.breaks = law.depths
	if law.breaks[0] == 0 {
		law.breaks = law.breaks[1:]
	}
	return law, nil
}

// Coefficient returns Manning's n at a depth and its derivative with depth (at a given depth, that of the piece below).
func (m *ManningByDepth) Coefficient(depth float64) (n, rate float64) {
	i, _ := slices.BinarySearch(m.depths, depth)
	if i == 0 {
		return m.n[0], 0
	}
	if i == len(m.n) {
		return m.n[i-1], 0
	}
	low, high := m.depths[i-1], m.depths[i]
	rate = (m.n[i] - m.n[i-1]) / (high - low)
	// From the nearer end, so that the given values are met exactly.
	if depth-low < high-depth {
		return m.n[i-1] + rate*(depth-low), rate
	}
	return m.n[i] - rate*(high-depth), rate
}

// At returns the conveyance, which is the same at every slope and discharge.
func (m *ManningByDepth) At(g section.Geometry) Conveyance {
	if !(g.Area > 0 && g.Perimeter > 0) {
		return Conveyance{}
	}
	n, rate := m.Coefficient(g.Depth)
	answer := manning(g, 1/n)
	answer.Rate -= answer.K * rate / n
	return answer
}

// AtSlope implements Law.
func (m *ManningByDepth) AtSlope(g section.Geometry, _ float64) Conveyance { return m.At(g) }

// AtDischarge implements Law.
func (m *ManningByDepth) AtDischarge(g section.Geometry, _ float64) Conveyance { return m.At(g) }

// Coefficients implements Law: the section is one, so both are 1.
func (m *ManningByDepth) Coefficients(section.Geometry) Coefficients { return one }

// Breaks implements Law: the given depths.
func (m *ManningByDepth) Breaks() []float64 { return m.breaks }

// Form implements Law.
func (m *ManningByDepth) Form() Form { return General }
