package stream

import "sync"

// A stop asks the reader to end early. The first reason given holds.
type stop struct {
	once   sync.Once
	reason Reason        // set before asked is closed
	asked  chan struct{} // closed by the first
}

func (s *stop) ask(reason Reason) {
	s.once.Do(func() {
		s.reason = reason
		close(s.asked)
	})
}

func (s *stop) isAsked() bool {
	select {
	case <-s.asked:
		return true
	default:
		return false
	}
}
