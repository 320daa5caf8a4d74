package run

import (
	"cmp"
	"fmt"
	"math"
	"slices"
	"strings"

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
	// Measure is how far it is beyond what is allowed: more than 1 is too much.
	Measure float64
	Text    string // for people
}

func (w *worst) reset() { w.assets = w.assets[:0] }

// consider takes in an answer. By an appraisal the governing value counts against its limit, otherwise the discharge against the capacity.
func (w *worst) consider(p *plan, asset row.Value, answer *wire.FlatAnswer) {
	at, measure, text := p.measure(answer)
	if !at || len(w.assets) == kept && measure <= w.assets[kept-1].Measure {
		return
	}
	w.add(Worst{asset.String(), measure, text()})
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

// measure says how bad an answer is.
func (p *plan) measure(answer *wire.FlatAnswer) (known bool, measure float64, text func() string) {
	number := func(name string) (float64, bool) {
		i, found := p.table.Find(name)
		if !found {
			return 0, false
		}
		v := p.table.Value(answer, i)
		return v.Number, v.Given
	}
	if value, given := number("governing_value"); given {
		limit, _ := number("governing_limit")
		i, _ := p.table.Find("governing_criterion")
		criterion := p.table.Value(answer, i).Text
		measure = value / limit
		if strings.HasPrefix(criterion, "least_") || criterion == "freeboard_rule" {
			measure = limit / value
			if value <= 0 {
				measure = math.Inf(1) // nothing is left of what must be there
			}
		}
		return limit != 0 || value != 0, measure, func() string {
			return fmt.Sprintf("%s %.4g, limit %.4g", criterion, value, limit)
		}
	}
	ratio, given := number("capacity_ratio")
	return given, ratio, func() string { return fmt.Sprintf("carries %.4g times its capacity", ratio) }
}
