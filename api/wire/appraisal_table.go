package wire

import "strconv"

// An appraisalColumn is a column of the table of findings: text appends the cell of one finding of a flow, nil where the flow has none.
type appraisalColumn struct {
	name string
	text func(dst []byte, system System, f *AppraisedFlow, finding *Finding) []byte
}

// appraisalColumns are what tells of the flow, and then of the finding.
var appraisalColumns = []appraisalColumn{
	{"flow", func(dst []byte, _ System, f *AppraisedFlow, _ *Finding) []byte { return append(dst, f.Name...) }},
	flowColumn(&appraisalDischarge, func(f *AppraisedFlow) float64 { return f.Discharge }),
	flowColumn(&depthsNormalDepth, func(f *AppraisedFlow) float64 { return f.Depths.NormalDepth }),
	flowColumn(&depthsCriticalDepth, func(f *AppraisedFlow) float64 { return f.Depths.CriticalDepth }),
	flowColumn(&depthsNormalVelocity, func(f *AppraisedFlow) float64 { return f.Depths.NormalVelocity }),
	flowColumn(&depthsNormalFroudeNumber, func(f *AppraisedFlow) float64 { return f.Depths.NormalFroudeNumber }),
	flowColumn(&depthsNormalBedShearStress, func(f *AppraisedFlow) float64 { return f.Depths.NormalBedShearStress }),
	flowColumn(&depthsFreeboard, func(f *AppraisedFlow) float64 { return f.Depths.Freeboard }),
	flowColumn(&depthsFill, func(f *AppraisedFlow) float64 { return f.Depths.Fill }),
	findingColumn("criterion", func(dst []byte, _ System, f *Finding) []byte { return append(dst, f.Criterion...) }),
	findingColumn(findingValue.name, func(dst []byte, system System, f *Finding) []byte {
		return appendNumberCell(dst, &member{quantity: f.Criterion.Quantity()}, system, f.Value)
	}),
	findingColumn(findingLimit.name, func(dst []byte, system System, f *Finding) []byte {
		return appendNumberCell(dst, &member{quantity: f.Criterion.Quantity()}, system, f.Limit)
	}),
	findingColumn("unit", func(dst []byte, system System, f *Finding) []byte {
		return append(dst, system.Unit(f.Criterion.Quantity())...)
	}),
	findingColumn("met", func(dst []byte, _ System, f *Finding) []byte {
		if !f.Judged {
			return dst
		}
		return strconv.AppendBool(dst, f.Met)
	}),
	findingColumn("reason", func(dst []byte, _ System, f *Finding) []byte { return append(dst, f.Reason...) }),
	findingColumn("detail", func(dst []byte, _ System, f *Finding) []byte { return append(dst, f.Detail...) }),
}

func flowColumn(m *member, number func(*AppraisedFlow) float64) appraisalColumn {
	return appraisalColumn{m.name, func(dst []byte, system System, f *AppraisedFlow, _ *Finding) []byte {
		return appendNumberCell(dst, m, system, number(f))
	}}
}

func findingColumn(name string, text func([]byte, System, *Finding) []byte) appraisalColumn {
	return appraisalColumn{name, func(dst []byte, system System, _ *AppraisedFlow, finding *Finding) []byte {
		if finding == nil {
			return dst
		}
		return text(dst, system, finding)
	}}
}

// Table has a row for each finding of each flow, and one for a flow that no criterion is about.
func (a *AppraisalAnswer) Table(system System) Table {
	type row struct {
		flow    *AppraisedFlow
		finding *Finding
	}
	var rows []row
	for i := range a.Flows {
		f := &a.Flows[i]
		if len(f.Findings) == 0 {
			rows = append(rows, row{f, nil})
		}
		for j := range f.Findings {
			rows = append(rows, row{f, &f.Findings[j]})
		}
	}
	names := make([]string, len(appraisalColumns))
	for i := range appraisalColumns {
		names[i] = appraisalColumns[i].name
	}
	return Table{names, len(rows), func(dst []byte, i, column int) []byte {
		return appraisalColumns[column].text(dst, system, rows[i].flow, rows[i].finding)
	}}
}
