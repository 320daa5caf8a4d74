package wire

// appraisalScalars are the columns of what an appraisal says over all flows, in the order of its JSON.
func appraisalScalars() []flatColumn {
	type A = *AppraisalAnswer
	governing := func(name string, value func(*Governing) float64) flatColumn {
		return flatColumn{FlatColumn{Name: name, Type: FlatNumber, Quantity: QuantityTold}, func(r *FlatAnswer) FlatValue {
			a, ok := r.Answer.(A)
			if !ok || !a.Governing.Known {
				return FlatValue{}
			}
			return numberValue(r.Units.FromSI(a.Governing.Criterion.Quantity(), value(&a.Governing)))
		}}
	}
	// A text that is empty is one here: a flow may be called so, and a plain number has no unit.
	told := func(name string, text func(*Governing, System) string) flatColumn {
		return flatColumn{FlatColumn{Name: name, Type: FlatText}, func(r *FlatAnswer) FlatValue {
			a, ok := r.Answer.(A)
			if !ok || !a.Governing.Known {
				return FlatValue{}
			}
			return FlatValue{Given: true, Text: text(&a.Governing, r.Units)}
		}}
	}
	return []flatColumn{
		flatText("verdict", func(a A) string { return a.Verdict }),
		told("governing_flow", func(g *Governing, _ System) string { return g.Flow }),
		flatText("governing_criterion", func(a A) string { return string(a.Governing.Criterion) }),
		governing(appraisalGoverningValue.name, func(g *Governing) float64 { return g.Value }),
		governing(appraisalGoverningLimit.name, func(g *Governing) float64 { return g.Limit }),
		told("governing_unit", func(g *Governing, system System) string { return system.Unit(g.Criterion.Quantity()) }),
		flatText("notice", func(a A) string { return a.Notice }),
	}
}

var appraisalFlatTable = newFlatTable(appraisalScalars(),
	func(a Answer) []Warning { return a.(*AppraisalAnswer).Warnings },
	func(a Answer) string { return a.(*AppraisalAnswer).Fingerprint })

// FlatTable has the verdict and the finding that governs; the flows are left out.
func (*AppraisalAnswer) FlatTable() *FlatTable { return appraisalFlatTable }

// FlatAbsent is empty: every such answer is one row.
func (*AppraisalAnswer) FlatAbsent() string { return "" }
