package serve

import "sync/atomic"

// A shelf bounds the large answers that wait in memory for their readers, who may be slow. One alone always finds room, so that no answer is too large to be given.
type shelf struct {
	room int64
	held atomic.Int64
}

// largeAnswer is the size from which an answer counts. A smaller one is the kernel's as soon as it is written.
const largeAnswer = 64 << 10

// take claims room for so many bytes; what it granted must be given back.
func (s *shelf) take(n int64) bool {
	if total := s.held.Add(n); total > s.room && total > n {
		s.held.Add(-n)
		return false
	}
	return true
}

func (s *shelf) give(n int64) { s.held.Add(-n) }
