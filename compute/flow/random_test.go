package flow

import (
	"flag"
	"fmt"
	"math"
	"math/rand/v2"
	"runtime"
	"sync"
	"sync/atomic"
	"testing"

	"leat/compute/friction/frictiontest"
)

var randomSolves = flag.Int("solves", 20_000, "how many random channels TestRandomSolves solves")

// Every random channel must end in answers whose equation holds within 1e-12, or changes its sign within 4 units in the last place of the
// depth, or in an absence that a dense scan confirms. No number that can be given is NaN.
func TestRandomSolves(t *testing.T) {
	workers := runtime.GOMAXPROCS(0)
	var next, solved, impossible, shown atomic.Int64
	var wait sync.WaitGroup
	for range workers {
		wait.Go(func() {
			for {
				seed := next.Add(1)
				if seed > int64(*randomSolves) {
					return
				}
				r := rand.New(rand.NewPCG(uint64(seed), 7))
				kind := r.IntN(len(frictiontest.Kinds))
				c, q, err := randomChannel(r, kind)
				if err != nil {
					impossible.Add(1)
					continue
				}
				solved.Add(1)
				x := examiner{c: &c, q: q, dense: seed%50 == 0}
				x.examine(r)
				if len(x.faults) > 0 && shown.Add(1) <= 20 {
					t.Errorf("seed %d, %s, law %T, slope %v, discharge %v:", seed, frictiontest.Kinds[kind].Name, c.Law, c.Slope, q)
					for _, f := range x.faults {
						t.Errorf("  %s", f)
					}
				}
			}
		})
	}
	wait.Wait()
	t.Logf("%d solved, %d made impossible by the dice", solved.Load(), impossible.Load())
	if solved.Load() < int64(*randomSolves)/2 {
		t.Error("the dice make too few possible channels")
	}
}

// examiner checks the answers for one channel.
type examiner struct {
	c      *Channel
	q      float64
	dense  bool // scan even where there is an answer
	faults []string
}

func (x *examiner) fault(format string, args ...any) {
	x.faults = append(x.faults, fmt.Sprintf(format, args...))
}

func (x *examiner) examine(r *rand.Rand) {
	c, q := x.c, x.q
	var room Room
	d := c.Depths(q, &room)
	if d.NormalAbsent == Unsolved || d.CriticalAbsent == Unsolved {
		x.fault("unsolved: %v %v", d.NormalAbsent, d.CriticalAbsent)
	}
	k := q / c.barrels() / math.Sqrt(c.Slope)
	if c.Slope > 0 {
		value := func(y float64) float64 { return c.conveyance(y)/k - 1 }
		x.roots("normal", d.Normal, value)
		if x.dense || len(d.Normal) == 0 {
			x.scan("normal", d.Normal, value, 0)
		}
	}
	m := c.Motion(q)
	rate := func(y float64) float64 { return m.EnergyRate(c.Section.At(y)) / m.cosine }
	x.roots("critical", d.Critical, rate)
	if x.dense || len(d.Critical) == 0 {
		x.scan("critical", d.Critical, rate, 1)
	}
	for _, y := range d.Normal {
		x.state(y)
	}
	if d.Capacity.Discharge > 0 {
		for range 5 {
			y := d.Bank * r.Float64()
			if got := c.UniformDischarge(c.Section.At(y)); !(got <= d.Capacity.Discharge*(1+4e-15)) {
				x.fault("capacity %v is below %v at depth %v", d.Capacity.Discharge, got, y)
			}
		}
	}
	if !math.IsNaN(d.CriticalSlope) {
		x.criticalSlope(d.CriticalSlope)
	}
	x.conjugates(r)
}

// roots checks that a function is zero, or changes its sign, at each depth of a rising list.
func (x *examiner) roots(name string, depths []float64, value func(float64) float64) {
	for i, y := range depths {
		if !(y > 0 && y <= x.c.Section.Height()) || i > 0 && y <= depths[i-1] {
			x.fault("%s depths %v do not rise within the section", name, depths)
		}
		if !(math.Abs(value(y)) <= 1e-12) && !changes(value, y, x.c.Section.Height()) {
			x.fault("%s depth %v: residual %v", name, y, value(y))
		}
	}
}

// changes reports whether a function changes its sign within four units in the last place of a depth.
func changes(value func(float64) float64, y, height float64) bool {
	ulp := above(y) - y
	negative, positive := false, false
	for k := -4.0; k <= 4; k++ {
		v := value(min(y+k*ulp, height))
		negative, positive = negative || v <= 0, positive || v >= 0
	}
	return negative && positive
}

// scan looks densely for sign changes inside smooth pieces (direction 0: any, 1: rising through zero) and checks that a depth was given for each.
func (x *examiner) scan(name string, depths []float64, value func(float64) float64, direction int) {
	b := newBreaks(x.c)
	lo := 0.0
	for {
		hi := b.next()
		top := hi
		if math.IsInf(hi, 1) {
			top = max(1, lo) * 1e4
		}
		const n = 400
		from, before := lo, 0.0
		for i := 0; i <= n; i++ {
			u := float64(i) / n
			y := min(lo+(top-lo)*u*u*u, top)
			if i == 0 {
				y = above(lo)
				if lo == 0 {
					y = 1e-9 * top
				}
			}
			v := value(y)
			if v != v {
				x.fault("%s: NaN at depth %v", name, y)
				return
			}
			if i > 0 && (before < 0 && v > 0 || direction == 0 && before > 0 && v < 0) {
				found := false
				for _, d := range depths {
					found = found || d >= from*(1-1e-14) && d <= y*(1+1e-14)
				}
				if !found {
					x.fault("%s: sign change between %v and %v (%v, %v) without a depth in %v", name, from, y, before, v, depths)
				}
			}
			from, before = y, v
		}
		if hi >= x.c.Section.Height() {
			return
		}
		lo = hi
	}
}

func (x *examiner) state(y float64) {
	s := x.c.State(y, x.q)
	for i, v := range []float64{s.Radius, s.HydraulicDepth, s.CentroidDepth, s.Velocity, s.VelocityHead, s.SpecificEnergy,
		s.SpecificForce, s.Conveyance, s.FrictionSlope, s.BedShearStress, s.StreamPower} {
		if math.IsNaN(v) || math.IsInf(v, 0) {
			x.fault("state at %v: number %d is %v", y, i, v)
		}
	}
}

// criticalSlope checks that at the slope found uniform flow at the lowest critical depth is critical, or that the slope it needs passes the slope
// within four units in the last place (on the steepest slopes the cosine is all that counts, and the sine hardly tells it).
func (x *examiner) criticalSlope(slope float64) {
	trial := *x.c
	value := func(s float64) float64 { return trial.slopeExcess(x.q, s) / s }
	ulp := above(slope) - slope
	low, high := value(slope-4*ulp), value(min(slope+4*ulp, math.Nextafter(1, 0)))
	if !(math.Abs(value(slope)) <= 1e-12) && !(low <= 0 && high >= 0) {
		x.fault("critical slope %v: uniform flow there needs a fraction %v less", slope, value(slope))
	}
}

// conjugates checks the alternate and the sequent depth of a random depth: the equation holds, and the way back leads to the same depth.
func (x *examiner) conjugates(r *rand.Rand) {
	c := x.c
	m := c.Motion(x.q)
	yardstick := math.Cbrt(m.head)
	if height := c.Section.Height(); !math.IsInf(height, 1) {
		yardstick = min(yardstick, height)
	}
	y := yardstick * (0.05 + 1.2*r.Float64())
	if y > c.Section.Height() {
		return
	}
	for _, of := range []quantity{specificEnergy, specificForce} {
		f := m.hollow(of)
		other, absent := f.conjugate(y)
		switch absent {
		case Unsolved:
			x.fault("conjugate %d of %v unsolved", of, y)
			continue
		case Present:
		default:
			continue
		}
		a, b := f.value(c.Section.At(y)), f.value(c.Section.At(other))
		residual := func(z float64) float64 { return f.value(c.Section.At(z))/a - 1 }
		if !(math.Abs(b/a-1) <= 1e-12) && !changes(residual, other, c.Section.Height()) {
			x.fault("conjugate %d of %v: %v with values %v, %v", of, y, other, a, b)
		}
		if (f.rate(c.Section.At(y)) > 0) == (f.rate(c.Section.At(other)) > 0) {
			x.fault("conjugate %d of %v: %v on a branch of the same direction", of, y, other)
		}
		if f.turning == once { // one minimum: the way back is the same
			back, _ := f.conjugate(other)
			if !(math.Abs(back/y-1) <= 1e-9) {
				x.fault("conjugate %d of %v: %v, and back %v", of, y, other, back)
			}
		}
	}
}
