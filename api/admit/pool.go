package admit

import (
	"sync"
	"sync/atomic"
	"time"
)

// turn is how long a solve holds its slot at least before it gives way to another class, and what a class is charged with in advance.
const turn = time.Millisecond

// usualWait is the part of the greatest wait that one may be expected to wait. Means are not promises, least of all where other programs want the same
// processors: so nearly all that are let in get a slot before the greatest wait is over, instead of a late refusal.
const usualWait = 4

// Settings are what a Pool is told.
type Settings struct {
	Slots int           // how many solve at once
	Queue int           // how many of a class, Bulk excepted, may wait for a slot
	Wait  time.Duration // how long they may wait at most
}

// A Pool is the slots for solving. Its methods may be called from any goroutine at any time.
type Pool struct {
	settings Settings
	start    time.Time
	waiting  atomic.Int64 // holds in line, over all classes

	mutex   sync.Mutex
	free    int
	shares  [classCount]share
	running []*Hold // those that hold slots
}

// New returns a pool whose slots are free.
func New(settings Settings) *Pool {
	return &Pool{settings: settings, start: time.Now(), free: settings.Slots, running: make([]*Hold, 0, settings.Slots)}
}

// Hold returns a claim of a class, which holds no slot yet.
func (p *Pool) Hold(class Class) *Hold {
	return &Hold{pool: p, class: class, place: -1, ready: make(chan struct{}, 1)}
}

// Full returns the refusal that work of a class would get at this moment, or nil. It is for deciding before a body is read.
func (p *Pool) Full(class Class) *Refusal {
	if p.waiting.Load() == 0 {
		return nil
	}
	p.mutex.Lock()
	defer p.mutex.Unlock()
	if p.free > 0 {
		return nil
	}
	return p.refusal(class)
}

// Slots is how many slots there are.
func (p *Pool) Slots() int { return p.settings.Slots }

// Held is how many slots a class holds.
func (p *Pool) Held(class Class) int {
	p.mutex.Lock()
	defer p.mutex.Unlock()
	return p.shares[class].held
}

// Waiting is how many of a class wait for slots.
func (p *Pool) Waiting(class Class) int {
	p.mutex.Lock()
	defer p.mutex.Unlock()
	return p.shares[class].line.length
}

// Silence is the longest time for which a slot is held now without a sign of life; 0 where none is held.
func (p *Pool) Silence() (longest time.Duration) {
	p.mutex.Lock()
	defer p.mutex.Unlock()
	now := p.now()
	for _, h := range p.running {
		longest = max(longest, now-time.Duration(h.seen.Load()))
	}
	return longest
}

func (p *Pool) now() time.Duration { return time.Since(p.start) }

// refusal returns why one more of a class cannot wait, or nil where it can.
func (p *Pool) refusal(class Class) *Refusal {
	s := &p.shares[class]
	n := s.line.length
	if class == Bulk || n < p.settings.Slots {
		return nil
	}
	expected := p.expected(class)
	switch {
	case n >= p.settings.Queue:
		return &Refusal{LineFull, n, expected}
	case expected > p.settings.Wait/usualWait:
		return &Refusal{LongWait, n, expected}
	}
	return nil
}

// expected is how long one more of a class would wait: until those before it have had their time on the class's share of the slots.
func (p *Pool) expected(class Class) time.Duration {
	wanting := 0
	for c := range p.shares {
		if Class(c) == class || p.shares[c].wanted() {
			wanting++
		}
	}
	s := &p.shares[class]
	return s.mean * time.Duration((s.line.length+1)*wanting) / time.Duration(p.settings.Slots)
}

// awake notes that a class wants something. If it comes back, it begins where the one is that had least of those that are there, or else
// where the one was that had most: nothing is saved up while others work, and nobody is blamed for having worked alone.
func (p *Pool) awake(class Class, now time.Duration) {
	if p.shares[class].wanted() {
		return
	}
	var least, most time.Duration
	found := false
	for c := range p.shares {
		used := p.used(Class(c), now)
		most = max(most, used)
		if p.shares[c].wanted() && (!found || used < least) {
			least, found = used, true
		}
	}
	if !found {
		least = most
	}
	p.shares[class].used = max(p.shares[class].used, least)
}

// used is the time that a class has held slots until now, each of them for a turn at least.
func (p *Pool) used(class Class, now time.Duration) time.Duration {
	used := p.shares[class].used
	for _, h := range p.running {
		if h.class == class {
			used += max(0, now-h.since-turn)
		}
	}
	return used
}

// give makes a hold hold a slot.
func (p *Pool) give(h *Hold, now time.Duration) {
	s := &p.shares[h.class]
	s.used += turn
	s.held++
	h.since = now
	h.seen.Store(int64(now))
	h.place = len(p.running)
	p.running = append(p.running, h)
}

// take ends a hold's holding; the slot is for the caller to pass on.
func (p *Pool) take(h *Hold, now time.Duration) {
	s := &p.shares[h.class]
	s.used += now - h.since - turn
	s.held--
	h.spent += now - h.since
	last := len(p.running) - 1
	p.running[h.place] = p.running[last]
	p.running[h.place].place = h.place
	p.running = p.running[:last]
	h.place = -1
}

// choose returns the class whose turn it is among those that wait, one apart (none, where that is classCount).
func (p *Pool) choose(apart Class, now time.Duration) (class Class, found bool) {
	var least time.Duration
	for c := range p.shares {
		if Class(c) == apart || p.shares[c].line.length == 0 {
			continue
		}
		if used := p.used(Class(c), now); !found || used < least {
			class, least, found = Class(c), used, true
		}
	}
	return class, found
}

// next passes a slot on to whose turn it is, or leaves it free.
func (p *Pool) next(now time.Duration) {
	class, found := p.choose(classCount, now)
	if !found {
		p.free++
		return
	}
	p.hand(class, now)
}

// hand gives a slot to the first in line of a class.
func (p *Pool) hand(class Class, now time.Duration) {
	h := p.shares[class].line.first
	p.shares[class].line.remove(h)
	p.waiting.Add(-1)
	p.give(h, now)
	h.ready <- struct{}{}
}

// leave takes a hold out of its line, and returns why; where it was given a slot meanwhile, a refusal is void, and for any other cause the slot is given back.
func (p *Pool) leave(h *Hold, cause error) error {
	p.mutex.Lock()
	defer p.mutex.Unlock()
	if h.place < 0 {
		s := &p.shares[h.class]
		if refusal, is := cause.(*Refusal); is {
			refusal.Waiting = s.line.length
		}
		s.line.remove(h)
		p.waiting.Add(-1)
		return cause
	}
	<-h.ready
	if _, is := cause.(*Refusal); is {
		return nil
	}
	now := p.now()
	p.take(h, now)
	p.next(now)
	return cause
}
