package profile

import "sort"

// A trace is what a sweep has found along one stretch: the depth over the chainage from the stretch's upstream end.
type trace struct {
	panels []panel
	up     bool    // swept upstream: the panels' chainages fall
	end    float64 // chainage at which the sweep ended: the far end of the stretch if it came through
	whole  bool    // it came through
	last   float64 // depth there
}

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
	n := sort.Search(len(t.panels), func(i int) bool {
		if t.up {
			return t.panels[i].x1 <= x
		}
		return t.panels[i].x1 >= x
	})
	return &t.panels[min(n, len(t.panels)-1)]
}

// depth returns the depth at a chainage that the trace covers.
func (t *trace) depth(x float64) float64 { return t.at(x).depth(x) }

// A panel is a piece of a trace on which the flow is smooth.
type panel struct {
	x0, x1 float64 // chainage at its start and its end, in the direction of the sweep
	y0, y1 float64 // depth there
	form   form
	chart  chart
	u0, u1 float64
	s      series // of the derivative, with t, of the chainage (overDepth) or of the depth (overChainage); t runs from -1 at the start to 1 at the end
	held   bool   // the depth stands at a break where the conveyance jumps: friction below it would take less than the bed gives, above it more
}

// form says which function a panel holds.
type form uint8

const (
	straight     form = iota // the depth is linear in the chainage
	overDepth                // the chainage is a series over the variable of a chart of the depth
	overChainage             // the depth is a series over the chainage
)

// variable returns the t at which a panel over depth has a chainage.
func (p *panel) variable(x float64) float64 {
	switch x {
	case p.x0:
		return -1
	case p.x1:
		return 1
	}
	return p.s.invert(x - p.x0)
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
		t := p.s.invert(x - p.x0)
		y, _, _ := p.chart.depth(p.u0 + (p.u1-p.u0)*(t+1)/2)
		return y
	case overChainage:
		rise, _ := p.s.integral(2*(x-p.x0)/(p.x1-p.x0) - 1)
		return p.y0 + rise
	}
	return p.y0 + (p.y1-p.y0)*((x-p.x0)/(p.x1-p.x0))
}
