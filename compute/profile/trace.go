package profile

import (
	"slices"
	"sort"
)

// A trace is what a sweep has found along one stretch: the depth over the chainage from the stretch's upstream end.
type trace struct {
	panels []panel
	up     bool    // swept upstream: the panels' chainages fall
	end    float64 // chainage at which the sweep ended: the far end of the stretch if it came through
	whole  bool    // it came through
	last   float64 // depth there
}

// grow adds a panel at the end and returns it. It holds what it held before.
func (t *trace) grow() *panel {
	n := len(t.panels)
	if n == cap(t.panels) {
		t.panels = slices.Grow(t.panels, max(4, n))
	}
	t.panels = t.panels[:n+1]
	return &t.panels[n]
}

// shrink takes the last panel away.
func (t *trace) shrink() { t.panels = t.panels[:len(t.panels)-1] }

// covers reports whether the trace has a depth at a chainage.
func (t *trace) covers(x float64) bool {
	if len(t.panels) == 0 {
		return false
	}
	if t.up {
		return x >= t.end && x <= t.panels[0].x0
	}
	return x <= t.end && x >= t.panels[0].x0
}

// at returns the panel that holds a chainage; at a discontinuity the one that ends there.
func (t *trace) at(x float64) *panel {
	n := sort.Search(len(t.panels), func(i int) bool { return t.ends(&t.panels[i], x) })
	return &t.panels[min(n, len(t.panels)-1)]
}

// depth returns the depth at a chainage that the trace covers.
func (t *trace) depth(x float64) float64 { return t.at(x).depth(x) }

// A panel is a piece of a trace on which the flow is smooth.
type panel struct {
	x0, x1 float64 // chainage at its start and its end, in the direction of the sweep
	y0, y1 float64 // depth there
	form   form
	held   bool // the depth stands at a break where the conveyance jumps: friction below it would take less than the bed gives, above it more
	chart  chart
	u0, u1 float64
	s      antiderivative // of the chainage (overDepth) or of the depth (overChainage); its t runs from -1 at the start to 1 at the end
}

// form says which function a panel holds.
type form uint8

const (
	straight     form = iota // the depth is linear in the chainage
	overDepth                // the chainage is a function of the variable of a chart of the depth
	overChainage             // the depth is a function of the chainage
)

// variable returns the t at which a panel over depth has a chainage.
func (p *panel) variable(x float64) float64 {
	switch x {
	case p.x0:
		return -1
	case p.x1:
		return 1
	}
	return p.invert(x)
}

func (p *panel) invert(x float64) float64 {
	want, whole := x-p.x0, p.x1-p.x0
	return p.s.invert(want, whole, 2*want/whole-1)
}

// depthAt returns the depth at a t of a panel over depth.
func (p *panel) depthAt(t float64) float64 {
	y, _, _ := p.chart.depth(p.u0 + (p.u1-p.u0)*(t+1)/2)
	return y
}

// depth returns the depth at a chainage of the panel.
func (p *panel) depth(x float64) float64 {
	switch {
	case x == p.x0 || p.y0 == p.y1 && p.form == straight:
		return p.y0
	case x == p.x1:
		return p.y1
	}
	switch p.form {
	case overDepth:
		return p.depthAt(p.invert(x))
	case overChainage:
		rise, _ := p.s.at(2*(x-p.x0)/(p.x1-p.x0) - 1)
		return p.y0 + rise
	}
	return p.y0 + (p.y1-p.y0)*((x-p.x0)/(p.x1-p.x0))
}

// chainage returns the chainage at which the panel has a depth between those at its ends.
func (p *panel) chainage(depth float64) float64 {
	switch {
	case depth == p.y0:
		return p.x0
	case depth == p.y1:
		return p.x1
	}
	switch p.form {
	case overDepth:
		run, _ := p.s.at(2*(p.chart.of(depth)-p.u0)/(p.u1-p.u0) - 1)
		return p.x0 + run
	case overChainage:
		t := p.s.invert(depth-p.y0, p.y1-p.y0, 2*(depth-p.y0)/(p.y1-p.y0)-1)
		return p.x0 + (p.x1-p.x0)*(t+1)/2
	}
	return p.x0 + (p.x1-p.x0)*((depth-p.y0)/(p.y1-p.y0))
}

// A reader reads the depths of a trace at chainages that follow each other: the search for one begins where that for the one before ended. Its depths are those
// of trace.depth but for their last places.
type reader struct {
	trace *trace
	panel int
	known bool    // the panel has been read, over depth, at:
	at    footing // and its third derivative about there is
	third float64
}

// depth returns the depth at a chainage that the trace covers.
func (r *reader) depth(x float64) float64 {
	p := r.find(x)
	if p.form != overDepth || x == p.x0 || x == p.x1 {
		return p.depth(x)
	}
	want := x - p.x0
	guess := 2*want/(p.x1-p.x0) - 1
	if r.known {
		guess = r.at.guess(want, r.third)
	}
	t, at, ok := p.s.follow(want, guess)
	if !ok {
		r.known = false
		return p.depthAt(p.s.invert(want, p.x1-p.x0, 2*want/(p.x1-p.x0)-1))
	}
	r.third = 0
	if r.known && at.t != r.at.t {
		r.third = (at.bend - r.at.bend) / (at.t - r.at.t)
	}
	r.known, r.at = true, at
	return p.depthAt(t)
}

// find goes to the panel that holds a chainage; at a discontinuity the one that ends there.
func (r *reader) find(x float64) *panel {
	panels := r.trace.panels
	i := r.panel
	for i > 0 && r.trace.ends(&panels[i-1], x) {
		i--
	}
	for i < len(panels)-1 && !r.trace.ends(&panels[i], x) {
		i++
	}
	if i != r.panel {
		r.panel, r.known = i, false
	}
	return &panels[i]
}

// ends reports whether a panel ends at a chainage or beyond it, the way of the sweep.
func (t *trace) ends(p *panel, x float64) bool {
	if t.up {
		return p.x1 <= x
	}
	return p.x1 >= x
}
