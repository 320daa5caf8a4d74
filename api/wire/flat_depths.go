package wire

import "math"

// depthsScalars are the columns of what an answer says of one discharge, in the order of its JSON; state members of the depth given bear given_.
func depthsScalars() []flatColumn {
	type A = *DepthsAnswer
	capacity := func(value func(*Capacity) float64) func(A) float64 {
		return func(a A) float64 {
			if !a.Capacity.Known {
				return math.NaN()
			}
			return value(&a.Capacity)
		}
	}
	given := func(value func(*DepthsGiven) float64) func(A) float64 {
		return func(a A) float64 {
			if !a.Given.Present {
				return math.NaN()
			}
			return value(&a.Given)
		}
	}
	columns := []flatColumn{
		flatNumber(depthsNormalDepth.name, &depthsNormalDepth, func(a A) float64 { return a.NormalDepth }),
		flatNumber(depthsCriticalDepth.name, &depthsCriticalDepth, func(a A) float64 { return a.CriticalDepth }),
		flatText("normal_absent", func(a A) string { return a.NormalAbsent }),
		flatText("critical_absent", func(a A) string { return a.CriticalAbsent }),
		flatNumber(depthsNormalVelocity.name, &depthsNormalVelocity, func(a A) float64 { return a.NormalVelocity }),
		flatNumber(depthsNormalFroudeNumber.name, &depthsNormalFroudeNumber, func(a A) float64 { return a.NormalFroudeNumber }),
		flatNumber(depthsNormalBedShearStress.name, &depthsNormalBedShearStress, func(a A) float64 { return a.NormalBedShearStress }),
		flatNumber(depthsFill.name, &depthsFill, func(a A) float64 { return a.Fill }),
		flatText("slope_class", func(a A) string { return a.SlopeClass }),
		flatNumber(depthsCriticalSlope.name, &depthsCriticalSlope, func(a A) float64 { return a.CriticalSlope }),
		flatNumber("capacity_discharge", &depthsCapacityDischarge, capacity(func(c *Capacity) float64 { return c.Discharge })),
		flatNumber("capacity_depth", &depthsCapacityDepth, capacity(func(c *Capacity) float64 { return c.Depth })),
		flatNumber("capacity_full_discharge", &depthsCapacityFullDischarge, func(a A) float64 {
			if !a.Capacity.Known || !a.Closed {
				return math.NaN()
			}
			return a.Capacity.FullDischarge
		}),
		flatNumber("capacity_ratio", &depthsCapacityRatio, capacity(func(c *Capacity) float64 { return c.Ratio })),
		flatNumber(depthsFreeboard.name, &depthsFreeboard, func(a A) float64 { return a.Freeboard }),
		flatTruth("surcharged", func(a A) (truth, given bool) { return a.Surcharged, a.Closed }),
		flatNumber(depthsFullFrictionSlope.name, &depthsFullFrictionSlope, func(a A) float64 {
			if !a.Closed {
				return math.NaN()
			}
			return a.FullFrictionSlope
		}),
	}
	columns = append(columns, flatStates("given_", func(a A) *State {
		if !a.Given.Present {
			return nil
		}
		return &a.Given.State
	})...)
	return append(columns,
		flatNumber(depthsAlternateDepth.name, &depthsAlternateDepth, given(func(g *DepthsGiven) float64 { return g.AlternateDepth })),
		flatNumber(depthsSequentDepth.name, &depthsSequentDepth, given(func(g *DepthsGiven) float64 { return g.SequentDepth })),
		flatText("curve", func(a A) string { return a.Given.Curve }),
	)
}

var depthsTable = newFlatTable(depthsScalars(),
	func(a Answer) []Warning { return a.(*DepthsAnswer).Warnings },
	func(a Answer) string { return a.(*DepthsAnswer).Fingerprint })

// FlatTable has all scalars of the answer.
func (*DepthsAnswer) FlatTable() *FlatTable { return depthsTable }

// FlatAbsent is empty: every such answer is one row.
func (*DepthsAnswer) FlatAbsent() string { return "" }
