package profile

// memory is what a solve needs beside its answer. Nothing in it is read before it is written.
type memory struct {
	legs      []leg
	prismatic []prismatic
	traces    []trace
	panels    []panel
	pieces    []piece
	places    []place
	curves    []CurveSpan
	naming    naming // of a place on a varying leg
}

// keptLegs, keptPanels and keptPlaces bound the memory that is kept: what a longer chain asked for is left to the collector.
const (
	keptLegs   = 256
	keptPanels = 1024
	keptPlaces = 4096
)

// Solver solves runs one after the other in memory that it keeps, so that a solve allocates nothing but its answer. Its zero value is ready; what it solved
// before has no part in an answer. It is not for several goroutines at once.
type Solver struct{ chain chain }

// Solve computes a run, as the function Solve does.
func (s *Solver) Solve(run *Run) (*Answer, error) {
	if faults := check(run); len(faults) > 0 {
		return nil, faults
	}
	s.chain.run = run
	answer, err := s.chain.solve()
	s.chain.forget()
	return answer, err
}

// forget makes a chain ready for another run. It keeps nothing of the caller's.
func (c *chain) forget() {
	m := &c.memory
	if len(c.legs) > keptLegs || cap(m.panels) > keptPanels || cap(m.places) > keptPlaces {
		*c = chain{}
		return
	}
	for i := range m.legs {
		l := &m.legs[i]
		*l = leg{subs: l.subs[:0]}
	}
	for i := range m.prismatic {
		p := &m.prismatic[i]
		*p = prismatic{branches: p.branches[:0]}
	}
	clear(c.segments)
	*c = chain{legs: c.legs[:0], segments: c.segments[:0], jumps: c.jumps[:0], controls: c.controls[:0], turns: c.turns[:0],
		memory: memory{m.legs[:0], m.prismatic[:0], m.traces[:0], m.panels[:0], m.pieces[:0], m.places[:0], m.curves[:0], naming{}}}
}

// leg returns a new leg.
func (m *memory) leg() *leg { return &more(&m.legs)[0] }

// reach returns a new prismatic reach.
func (m *memory) reach() *prismatic { return &more(&m.prismatic)[0] }

// more takes one more of a store. Where it is full, a larger one takes its place; what was given out before stays where it is.
func more[T any](store *[]T) []T {
	n := len(*store)
	if n == cap(*store) {
		*store, n = make([]T, 0, max(4, 2*n)), 0
	}
	*store = (*store)[:n+1]
	return (*store)[n:]
}

// roomForPanels is how many panels a trace finds room for before it has to ask; smooth curves take about five.
const roomForPanels = 32

// trace returns a new trace. What it does not take of its room for panels is taken back by end.
func (m *memory) trace(up bool) *trace {
	t := &more(&m.traces)[0]
	if cap(m.panels)-len(m.panels) < roomForPanels {
		m.panels = make([]panel, 0, max(2*roomForPanels, 2*cap(m.panels)))
	}
	*t = trace{up: up, panels: m.panels[len(m.panels) : len(m.panels) : len(m.panels)+roomForPanels]}
	return t
}

// end takes the rest of the room for panels back from the newest trace.
func (m *memory) end(t *trace) {
	if n := len(t.panels); n <= roomForPanels {
		m.panels = m.panels[:len(m.panels)+n]
		t.panels = t.panels[:n:n]
	}
}

// A piece is what a segment has of one panel.
type piece struct {
	panel    *panel
	from, to float64 // chainages within the leg, rising
}

// cut lists the pieces of a segment, from upstream to downstream.
func (m *memory) cut(g *segment) {
	begin := len(m.pieces)
	panels := g.trace.panels
	for i := range panels {
		p := &panels[i]
		if g.trace.up {
			p = &panels[len(panels)-1-i]
		}
		from, to := max(g.from, min(p.x0, p.x1)), min(g.to, max(p.x0, p.x1))
		if from < to {
			m.pieces = append(m.pieces, piece{p, from, to})
		}
	}
	g.pieces = m.pieces[begin:len(m.pieces):len(m.pieces)]
}

// edges returns the depth at the upstream end of a piece, and at its downstream end.
func (p *piece) edges() (upper, lower float64) { return p.panel.depth(p.from), p.panel.depth(p.to) }
