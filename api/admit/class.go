package admit

import "time"

// A Class is a kind of work. Classes share the slots equally.
type Class int

// The classes.
const (
	Short Class = iota // a request that is solved in microseconds to milliseconds
	Long               // one that may take seconds
	Bulk               // a batch of a stream
	classCount
)

// Classes returns all classes, in order.
func Classes() []Class { return []Class{Short, Long, Bulk} }

// String returns the name, for metrics.
func (c Class) String() string { return [...]string{"short", "long", "bulk"}[c] }

// A share is what a pool knows of one class.
type share struct {
	line line
	held int // slots held

	// used is the time held, in which classes are compared. One that wants nothing saves nothing up: when it comes back it
	// begins where the others are.
	used time.Duration
	// mean is how long lately a solve of this class held its slot, from beginning to end.
	mean time.Duration
}

// wanted reports whether the class holds or wants slots.
func (s *share) wanted() bool { return s.held > 0 || s.line.length > 0 }

// finished takes in how long a solve held its slot.
func (s *share) finished(spent time.Duration) {
	if s.mean == 0 {
		s.mean = spent
		return
	}
	s.mean += (spent - s.mean) / 8
}

// A line is the holds that wait for slots, the next one first. It is doubly linked, since those that give up leave from its middle.
type line struct {
	first, last *Hold
	length      int
}

func (l *line) pushBack(h *Hold) {
	h.before, h.after = l.last, nil
	if l.last == nil {
		l.first = h
	} else {
		l.last.after = h
	}
	l.last = h
	l.length++
}

func (l *line) pushFront(h *Hold) {
	h.before, h.after = nil, l.first
	if l.first == nil {
		l.last = h
	} else {
		l.first.before = h
	}
	l.first = h
	l.length++
}

func (l *line) remove(h *Hold) {
	if h.before == nil {
		l.first = h.after
	} else {
		h.before.after = h.after
	}
	if h.after == nil {
		l.last = h.before
	} else {
		h.after.before = h.before
	}
	h.before, h.after = nil, nil
	l.length--
}
