package admit

import "sync/atomic"

// Places are a number of things that may be there at once.
type Places struct {
	most  int64
	taken atomic.Int64
}

// NewPlaces returns so many free places.
func NewPlaces(most int) *Places { return &Places{most: int64(most)} }

// Take takes a place, if there is one.
func (p *Places) Take() bool {
	if p.taken.Add(1) > p.most {
		p.taken.Add(-1)
		return false
	}
	return true
}

// Leave gives a place back.
func (p *Places) Leave() { p.taken.Add(-1) }

// Taken is how many places are taken.
func (p *Places) Taken() int { return int(p.taken.Load()) }
