package run

import (
	"cmp"
	"fmt"
	"math"
	"slices"

	"leat/api/wire"
	"leat/cmd/internal/register/row"
)

// kept is how many of the worst assets a summary names.
const kept = 10

// worst keeps the worst assets of a run.
type worst struct{ assets []Worst }

// A Worst is an asset that stands high in the list of the worst.
type Worst struct {
	Asset string
	// Measure is by what share of its limit an appraisal's governing value is beyond it, less than 0 where it is not; without an appraisal the
	// discharge as a share of the capacity.
	Measure float64
	Text    string // for people
}

func (w *worst) reset() { w.assets = w.assets[:0] }

// consider takes in an answer. By an appraisal the governing value counts against its limit, otherwise the discharge against the capacity.
func (w *worst) consider(p *plan, asset row.Value, answer *wire.FlatAnswer) {
	measure, known := p.measure(answer)
	if !known || len(w.assets) == kept && measure <= w.assets[kept-1].Measure {
		return
	}
	w.add(Worst{asset.String(), measure, p.badness(answer)})
}

func (w *worst) add(a Worst) {
	at, _ := slices.BinarySearchFunc(w.assets, a, func(x, y Worst) int {
		return cmp.Or(cmp.Compare(y.Measure, x.Measure), -1)
	})
	w.assets = slices.Insert(w.assets, at, a)
	if len(w.assets) > kept {
		w.assets = w.assets[:kept]
	}
}

// merge takes in those of another.
func (w *worst) merge(other *worst) {
	for _, a := range other.assets {
		w.add(a)
	}
}

// cell returns one cell of an answer; one that is not given where the answer has none of that name.
func (p *plan) cell(answer *wire.FlatAnswer, name string) wire.FlatValue {
	if i, found := p.table.Find(name); found {
		return p.table.Value(answer, i)
	}
	return wire.FlatValue{}
}

// measure says how bad an answer is.
func (p *plan) measure(answer *wire.FlatAnswer) (measure float64, known bool) {
	verdict := p.cell(answer, "verdict")
	if !verdict.Given {
		ratio := p.cell(answer, "capacity_ratio")
		return ratio.Number, ratio.Given
	}
	value, limit := p.cell(answer, "governing_value"), p.cell(answer, "governing_limit")
	if measure = math.Abs(value.Number-limit.Number) / math.Abs(limit.Number); math.IsNaN(measure) {
		measure = 0
	}
	if verdict.Text != "falls_short" {
		measure = -measure
	}
	return measure, limit.Given
}

// badness says in words what measure says in a number.
func (p *plan) badness(answer *wire.FlatAnswer) string {
	verdict := p.cell(answer, "verdict")
	if !verdict.Given {
		return fmt.Sprintf("carries %.4g times its capacity", p.cell(answer, "capacity_ratio").Number)
	}
	where := p.cell(answer, "governing_criterion").Text
	if flow := p.cell(answer, "governing_flow").Text; flow != "" {
		where += " under " + flow
	}
	return fmt.Sprintf("%s: %s %.4g, limit %.4g %s", verdict.Text, where,
		p.cell(answer, "governing_value").Number, p.cell(answer, "governing_limit").Number, p.cell(answer, "governing_unit").Text)
}
