package profile

import (
	"flag"
	"math"
	"math/rand/v2"
	"testing"
)

var judgedChains = flag.Int("judged", 600, "how many random chains TestPanelsAgainstQuadrature judges")

// Every prismatic panel of random chains must place its depths where a rule of another kind does: the double exponential one of H. Takahasi and M. Mori
// (1974), which minds no behaviour at the ends of the interval, applied to dx/ddepth over the depth itself. A depth may be off by 1e-12 of itself or, where
// the surface is so steep that the chainage tells more, next to critical depth, by 1e-13 of the run in chainage; what is worse is no rounding.
func TestPanelsAgainstQuadrature(t *testing.T) {
	judged, worst := 0, 0.0
	seeds := []int64{2092} // comes within 1e-13 m of the chainage where its depth is critical
	for k := range int64(*judgedChains) {
		seeds = append(seeds, *firstChain+k)
	}
	for _, seed := range seeds {
		run, err := randomRun(rand.New(rand.NewPCG(uint64(seed), 11)))
		if err != nil || len(run.Stations) > 0 {
			continue
		}
		c := &chain{run: run}
		if c.lay() != nil || c.sweepUp() != nil || c.walk() != nil {
			continue
		}
		whole := 0.0
		for _, l := range c.legs {
			whole += l.length
		}
		for i := range c.segments {
			g := &c.segments[i]
			p, ok := g.leg.stretch.(*prismatic)
			if !ok {
				continue
			}
			for k := range g.trace.panels {
				pn := &g.trace.panels[k]
				if pn.form != overDepth {
					continue
				}
				for _, at := range [4]float64{-0.9, -0.37, 0.41, 1} {
					judged++
					off := p.offQuadrature(pn, at, whole)
					worst = max(worst, off)
					if !(off <= 1) {
						t.Errorf("seed %d, leg %d, chainage %.6g to %.6g, depth %.6g to %.6g: at %v off by %.1f times what is allowed", seed, g.leg.reach, pn.x0, pn.x1, pn.y0, pn.y1, at, off)
					}
				}
			}
		}
	}
	t.Logf("%d places judged, the worst off by %.2g of what is allowed", judged, worst)
	if judged < 2*len(seeds) {
		t.Errorf("only %d places judged", judged)
	}
}

// offQuadrature returns by how much the depth at a t of a panel is off, as a share of what is allowed in depth or in chainage, the lesser.
func (p *prismatic) offQuadrature(pn *panel, at, whole float64) float64 {
	y := pn.depthAt(at)
	if at == 1 {
		y = pn.y1
	}
	if math.Abs(y-pn.chart.pole) <= 1e-11*y {
		return 0 // normal depth, wherever it may be
	}
	slope := func(y float64) float64 {
		g := p.channel.Section.At(y)
		return p.motion.EnergyRate(g) / p.steepness(g)
	}
	run, _ := pn.s.at(at)
	off := math.Abs(run - doubleExponential(slope, pn.y0, y))
	return off / max(1e-13*whole, 1e-12*y*math.Abs(slope(y)))
}

// doubleExponential integrates a function between two bounds.
func doubleExponential(f func(float64) float64, a, b float64) float64 {
	const step, most = 1. / 32, 110
	half, sum := (b-a)/2, 0.0
	for k := -most; k <= most; k++ {
		u := float64(k) * step
		s := math.Pi / 2 * math.Sinh(u)
		fromEnd := math.Exp(-math.Abs(s)) / math.Cosh(s) // 1 - |tanh s|
		weight := math.Pi / 2 * math.Cosh(u) / (math.Cosh(s) * math.Cosh(s))
		y := b - half*fromEnd
		if k < 0 {
			y = a + half*fromEnd
		}
		if y != a && y != b {
			sum += weight * f(y)
		}
	}
	return sum * step * half
}
