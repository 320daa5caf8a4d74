package picture

import (
	"math"

	"leat/api/operation"
	"leat/api/wire"
)

// judgement draws the sign of a judgement: a tick, a cross or a bar, by its pen.
func (l *list) judgement(p *pen, at point) {
	switch p {
	case meets:
		l.line(p, point{at.x - 5, at.y}, point{at.x - 1.5, at.y + 4}, point{at.x + 5, at.y - 5})
	case fallsShort:
		l.line(p, point{at.x - 4, at.y - 4}, point{at.x + 4, at.y + 4})
		l.line(p, point{at.x - 4, at.y + 4}, point{at.x + 4, at.y - 4})
	default:
		l.line(p, point{at.x - 5, at.y}, point{at.x + 5, at.y})
	}
}

var verdictPens = map[string]*pen{"meets": meets, "falls_short": fallsShort}

func verdictPen(verdict string) *pen {
	if p := verdictPens[verdict]; p != nil {
		return p
	}
	return unjudged
}

func findingPen(f *wire.Finding) *pen {
	switch {
	case !f.Judged:
		return unjudged
	case f.Met:
		return meets
	}
	return fallsShort
}

// flowPen tells what a flow's findings come to.
func flowPen(f *wire.AppraisedFlow) *pen {
	out := meets
	if len(f.Findings) == 0 {
		out = unjudged
	}
	for i := range f.Findings {
		if p := findingPen(&f.Findings[i]); p == fallsShort {
			return p
		} else if p == unjudged && f.Findings[i].Reason != "not_applicable" {
			out = p
		}
	}
	return out
}

// mostFindings is how many findings there is room for.
const mostFindings = 24

// drawAppraisal draws the section with the water of each flow, and every finding with its sign.
func drawAppraisal(solved *operation.Solved, a *wire.AppraisalAnswer, f *operation.Figure) *list {
	units := solved.Units
	l := newList("Appraisal", solved, barrelled(f.Facts, f.Cross))
	y := bodyTop + 10
	l.judgement(verdictPen(a.Verdict), point{margin + 6, y - 4})
	verdict := "Verdict: " + spoken(a.Verdict)
	l.writeBold(ink, point{margin + 20, y}, start, common+1, verdict)
	l.describe(verdict + ".")
	if g := &a.Governing; g.Known {
		q := g.Criterion.Quantity()
		text := "governed by " + spoken(string(g.Criterion)) + " in " + g.Flow + ": " + told(units, q, g.Value) + ", limit " + told(units, q, g.Limit)
		l.write(soft, point{margin + 20, y + 17}, start, common, cut(text, common, paperWide-2*margin-20))
		l.describe(text + ".")
	}
	y += 16
	if a.Governing.Known {
		y += 18
	}
	levels := bankLevel(f.Cross, units)
	deepest := math.NaN()
	drawn := few(len(a.Flows), mostLevels)
	for _, i := range drawn {
		flow := &a.Flows[i]
		depth := flow.Depths.NormalDepth
		text := told(units, wire.QuantityLength, depth)
		if math.IsNaN(depth) && flow.Depths.Surcharged {
			depth, text = f.Cross.Bank, "full"
		}
		if math.IsNaN(depth) {
			continue
		}
		levels = append(levels, level{waterLine, flow.Name, text, depth, flowPen(flow)})
		if !(depth <= deepest) {
			deepest = depth
		}
	}
	y = l.cross(f.Cross, units, rectangle{margin, y, paperWide - margin, y + crossHigh}, deepest, levels) + 22
	return l.finish(l.findings(a, units, y) + margin)
}

// findings draws the table of findings and returns where it ends.
func (l *list) findings(a *wire.AppraisalAnswer, units wire.System, y float64) float64 {
	const flowAt, markAt, criterionAt, valueAt, limitAt = margin, 178.0, 194.0, 372.0, 500.0
	for _, head := range []struct {
		x    float64
		text string
	}{{flowAt, "flow"}, {criterionAt, "criterion"}, {valueAt, "value"}, {limitAt, "limit"}} {
		l.write(soft, point{head.x, y}, start, small, head.text)
	}
	l.line(frame, point{margin, y + 5}, point{paperWide - margin, y + 5})
	count, total := 0, 0
	for i := range a.Flows {
		flow := &a.Flows[i]
		total += len(flow.Findings)
		for j := range flow.Findings {
			if count == mostFindings {
				break
			}
			count++
			y += 18
			finding := &flow.Findings[j]
			if j == 0 {
				text := flow.Name + ", " + told(units, wire.QuantityDischarge, flow.Discharge)
				l.write(ink, point{flowAt, y}, start, common, cut(text, common, markAt-flowAt-10))
			}
			p, q := findingPen(finding), finding.Criterion.Quantity()
			l.judgement(p, point{markAt, y - 4})
			l.write(ink, point{criterionAt, y}, start, common, cut(spoken(string(finding.Criterion)), common, valueAt-criterionAt-6))
			value, limit := told(units, q, finding.Value), told(units, q, finding.Limit)
			if p == unjudged {
				value = cut(spoken(finding.Reason), common, paperWide-margin-valueAt)
			}
			l.write(ink, point{valueAt, y}, start, common, value)
			if p != unjudged && !math.IsNaN(finding.Limit) {
				l.write(ink, point{limitAt, y}, start, common, limit)
			}
			sign := map[*pen]string{meets: "met", fallsShort: "not met", unjudged: "not judged"}[p]
			l.describe(flow.Name + ", " + spoken(string(finding.Criterion)) + ": " + value + ", limit " + limit + ", " + sign + ".")
		}
	}
	if total > count {
		l.leftOut(y+4, total-count, "findings")
		y += 18
	}
	y += 10
	for _, s := range []struct {
		x    float64
		pen  *pen
		text string
	}{{margin, meets, "met"}, {margin + 76, fallsShort, "not met"}, {margin + 176, unjudged, "not judged or not applicable"}} {
		l.judgement(s.pen, point{s.x + 6, y + 6})
		l.write(soft, point{s.x + 18, y + 10}, start, small, s.text)
	}
	l.describe(a.Notice)
	for _, line := range lines(a.Notice, small, paperWide-2*margin) {
		y += 16
		l.write(soft, point{margin, y + 12}, start, small, line)
	}
	return y + 12
}
