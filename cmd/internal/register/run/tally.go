package run

import (
	"slices"

	"leat/api/wire"
)

// A tally counts the answers of a run by what they say.
type tally struct {
	verdicts map[string]int64 // empty without an appraisal
	warned   map[string]int64 // by the codes of warnings, each once an answer
}

func (t *tally) reset() {
	clear(t.verdicts)
	clear(t.warned)
}

func (t *tally) count(p *plan, answer *wire.FlatAnswer) {
	if t.verdicts == nil {
		t.verdicts, t.warned = map[string]int64{}, map[string]int64{}
	}
	if i, found := p.table.Find("verdict"); found {
		t.verdicts[p.table.Value(answer, i).Text]++
	}
	warnings := p.table.Warnings(answer)
	for i := range warnings {
		code := warnings[i].Code
		if !slices.ContainsFunc(warnings[:i], func(w wire.Warning) bool { return w.Code == code }) {
			t.warned[code]++
		}
	}
}

// merge takes in the counts of another.
func (t *tally) merge(other *tally) {
	if t.verdicts == nil {
		t.verdicts, t.warned = map[string]int64{}, map[string]int64{}
	}
	for verdict, n := range other.verdicts {
		t.verdicts[verdict] += n
	}
	for code, n := range other.warned {
		t.warned[code] += n
	}
}
