package wire

import "math"

// A Table is an answer as rows and columns.
type Table struct {
	Columns []string // names of members
	Rows    int
	// Cell appends the text of one cell, nothing where its value cannot be given.
	Cell func(dst []byte, row, column int) []byte
}

// Tabular answers can be told as a table: of their states, or of stations.
type Tabular interface{ Table(system System) Table }

// A stateColumn is a member of states.
type stateColumn struct {
	name   string
	member *member      // nil for a text
	group  StateMembers // that must be there
	number func(*State) float64
	text   func(*State) string
}

// stateColumns are all members of states, in the order of their JSON.
var stateColumns = []stateColumn{
	numberColumn(&stateDischarge, WithDischarge, func(s *State) float64 { return s.Discharge }),
	numberColumn(&stateDepth, 0, func(s *State) float64 { return s.Depth }),
	numberColumn(&stateArea, 0, func(s *State) float64 { return s.Area }),
	numberColumn(&stateWettedPerimeter, 0, func(s *State) float64 { return s.WettedPerimeter }),
	numberColumn(&stateHydraulicRadius, 0, func(s *State) float64 { return s.HydraulicRadius }),
	numberColumn(&stateTopWidth, 0, func(s *State) float64 { return s.TopWidth }),
	numberColumn(&stateHydraulicDepth, 0, func(s *State) float64 { return s.HydraulicDepth }),
	numberColumn(&stateCentroidDepth, 0, func(s *State) float64 { return s.CentroidDepth }),
	numberColumn(&stateConveyance, WithConveyance, func(s *State) float64 { return s.Conveyance }),
	numberColumn(&stateUniformDischarge, WithUniform, func(s *State) float64 { return s.UniformDischarge }),
	numberColumn(&stateVelocity, WithFlow, func(s *State) float64 { return s.Velocity }),
	numberColumn(&stateVelocityHead, WithFlow, func(s *State) float64 { return s.VelocityHead }),
	numberColumn(&stateFroudeNumber, WithFlow, func(s *State) float64 { return s.FroudeNumber }),
	numberColumn(&stateSpecificEnergy, WithFlow, func(s *State) float64 { return s.SpecificEnergy }),
	numberColumn(&stateSpecificForce, WithFlow, func(s *State) float64 { return s.SpecificForce }),
	{name: "regime", group: WithFlow, text: func(s *State) string { return s.Regime }},
	numberColumn(&stateFrictionSlope, WithFriction, func(s *State) float64 { return s.FrictionSlope }),
	numberColumn(&stateBedShearStress, WithFriction, func(s *State) float64 { return s.BedShearStress }),
	numberColumn(&stateStreamPower, WithFriction, func(s *State) float64 { return s.StreamPower }),
}

func numberColumn(m *member, group StateMembers, number func(*State) float64) stateColumn {
	return stateColumn{name: m.name, member: m, group: group, number: number}
}

// columnNames returns the names of some leading columns and of those of states.
func columnNames(leading ...string) []string {
	for i := range stateColumns {
		leading = append(leading, stateColumns[i].name)
	}
	return leading
}

// appendCell appends a state's value in one of stateColumns.
func (s *State) appendCell(dst []byte, column int, system System) []byte {
	c := &stateColumns[column]
	switch {
	case s.Members&c.group != c.group:
		return dst
	case c.text != nil:
		return append(dst, c.text(s)...)
	}
	return appendNumberCell(dst, c.member, system, c.number(s))
}

// appendNumberCell appends a number in SI as text, nothing where it is not finite.
func appendNumberCell(dst []byte, m *member, system System, value float64) []byte {
	if !(math.Abs(value) <= math.MaxFloat64) {
		return dst
	}
	return appendNumber(dst, system.FromSI(m.quantity, value))
}

// stateTable is a table of states alone.
func stateTable(states []State, system System) Table {
	return Table{columnNames(), len(states), func(dst []byte, row, column int) []byte {
		return states[row].appendCell(dst, column, system)
	}}
}

// Table has a row for each depth.
func (a *SectionAnswer) Table(system System) Table { return stateTable(a.States, system) }

// Table has a row for each depth or discharge.
func (a *RatingAnswer) Table(system System) Table { return stateTable(a.States, system) }

// Table has a row for each normal and each critical depth, and for the depth given; the column `list` says which a row is.
func (a *DepthsAnswer) Table(system System) Table {
	normal, critical := len(a.Normal), len(a.Critical)
	rows := normal + critical
	if a.Given.Present {
		rows++
	}
	return Table{columnNames("list"), rows, func(dst []byte, row, column int) []byte {
		list, state := "given", &a.Given.State
		switch {
		case row < normal:
			list, state = "normal", &a.Normal[row]
		case row < normal+critical:
			list, state = "critical", &a.Critical[row-normal]
		}
		if column == 0 {
			return append(dst, list...)
		}
		return state.appendCell(dst, column-1, system)
	}}
}

// The columns of a profile before those of states.
var stationColumns = []string{profileChainage.name, "reach", profileBedLevel.name, profileWaterLevel.name, profileEnergyLevel.name, "curve"}

// Table has a row for each station.
func (a *ProfileAnswer) Table(system System) Table {
	return Table{columnNames(stationColumns...), len(a.Stations), func(dst []byte, row, column int) []byte {
		s := &a.Stations[row]
		switch column {
		case 0:
			return appendNumberCell(dst, &profileChainage, system, s.Chainage)
		case 1:
			return appendPlain(dst, s.Reach)
		case 2:
			return appendNumberCell(dst, &profileBedLevel, system, s.BedLevel)
		case 3:
			return appendNumberCell(dst, &profileWaterLevel, system, s.WaterLevel)
		case 4:
			return appendNumberCell(dst, &profileEnergyLevel, system, s.EnergyLevel)
		case 5:
			return append(dst, s.Curve...)
		}
		return s.State.appendCell(dst, column-len(stationColumns), system)
	}}
}
