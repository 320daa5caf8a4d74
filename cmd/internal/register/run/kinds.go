package run

import (
	"cmp"
	"maps"
	"slices"

	"leat/cmd/internal/register/store"
)

// A Kind is what problems have in common: their code, and the columns that they come from.
type Kind struct{ Code, Columns string }

// Kinds counts problems by kind.
type Kinds map[Kind]int64

// count counts a problem.
func (k *Kinds) count(p *store.Problem) {
	if *k == nil {
		*k = Kinds{}
	}
	(*k)[Kind{p.Code, p.Column}]++
}

// add adds the counts of others.
func (k Kinds) add(others Kinds) {
	for kind, n := range others {
		k[kind] += n
	}
}

// Most returns the kinds, those with the most problems first.
func (k Kinds) Most() []Kind {
	return slices.SortedFunc(maps.Keys(k), func(a, b Kind) int {
		return cmp.Or(cmp.Compare(k[b], k[a]), cmp.Compare(a.Code, b.Code), cmp.Compare(a.Columns, b.Columns))
	})
}

// Codes returns the counts by code alone.
func (k Kinds) Codes() Kinds {
	codes := Kinds{}
	for kind, n := range k {
		codes[Kind{Code: kind.Code}] += n
	}
	return codes
}
