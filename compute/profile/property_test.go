package profile_test

import (
	"math"
	"math/rand/v2"
	"os"
	"slices"
	"testing"

	"leat/compute/flow"
	"leat/compute/friction"
	"leat/compute/profile"
	"leat/compute/section"
)

// corpus returns the runs of the references: every curve, jump, joint and boundary that they know.
func corpus(t *testing.T) []reference {
	t.Helper()
	data, err := os.ReadFile("../../testdata/references/profiles.jsonl")
	if err != nil {
		t.Fatal(err)
	}
	references, err := readReferences(data)
	if err != nil {
		t.Fatal(err)
	}
	if len(references) < 300 {
		t.Fatalf("%d runs only", len(references))
	}
	return references
}

// solved solves a run that has to have an answer.
func solved(t *testing.T, name string, run *profile.Run) *profile.Answer {
	t.Helper()
	answer, err := profile.Solve(run)
	if err != nil {
		t.Fatalf("%s: %v", name, err)
	}
	return answer
}

// each runs a check with every run of the corpus and its answer.
func each(t *testing.T, check func(t *testing.T, r *reference, run *profile.Run, answer *profile.Answer)) {
	t.Helper()
	references := corpus(t)
	for i := range references {
		t.Run(references[i].Name, func(t *testing.T) {
			run, err := references[i].run()
			if err != nil {
				t.Fatal(err)
			}
			check(t, &references[i], run, solved(t, references[i].Name, run))
		})
	}
}

// at returns the depths of an answer at a chainage.
func at(answer *profile.Answer, chainage float64) []float64 {
	var depths []float64
	for i := range answer.Stations {
		if p := &answer.Stations[i]; p.Chainage == chainage {
			depths = append(depths, p.State.Geometry.Depth)
		}
	}
	return depths
}

// allowed is how far two depths at one chainage may lie apart: 1e-10 of themselves, or what 1e-12 of the run's length makes of them where the curve is
// as steep as next to critical depth.
func allowed(run *profile.Run, p *profile.Point) float64 {
	tolerance := 1e-10 * p.State.Geometry.Depth
	if len(run.Reaches) > 0 && p.State.Regime != flow.FullFlow {
		channel := &run.Reaches[p.Reach].Channel
		motion := channel.Motion(p.State.Discharge)
		rate := (channel.Slope - p.State.FrictionSlope) / motion.EnergyRate(p.State.Geometry)
		tolerance += math.Abs(rate) * 1e-12 * length(run)
	}
	return tolerance
}

// same holds the depths of two answers of one run against each other, at the chainages of the first that the second has too.
func same(t *testing.T, what, name string, run *profile.Run, one, two *profile.Answer) (worst float64, compared int) {
	t.Helper()
	for i := range one.Stations {
		p := &one.Stations[i]
		others := at(two, p.Chainage)
		if len(others) == 0 {
			continue
		}
		near := math.Inf(1)
		for _, depth := range others {
			near = min(near, math.Abs(depth-p.State.Geometry.Depth))
		}
		compared++
		worst = max(worst, near/p.State.Geometry.Depth)
		if !(near <= allowed(run, p)) {
			t.Errorf("%s: %s: depth %.17g at %.17g becomes %v", name, what, p.State.Geometry.Depth, p.Chainage, others)
		}
	}
	if len(one.Jumps) != len(two.Jumps) {
		t.Errorf("%s: %s: jumps %+v become %+v", name, what, one.Jumps, two.Jumps)
		return worst, compared
	}
	for i, jump := range one.Jumps {
		if !(math.Abs(jump.Chainage-two.Jumps[i].Chainage) <= 1e-9*length(run)) {
			t.Errorf("%s: %s: the jump at %.17g moves to %.17g", name, what, jump.Chainage, two.Jumps[i].Chainage)
		}
	}
	return worst, compared
}

func TestSameAnswerWhenCut(t *testing.T) {
	r := rand.New(rand.NewPCG(2, 3))
	worst, compared := 0.0, 0
	each(t, func(t *testing.T, ref *reference, run *profile.Run, answer *profile.Answer) {
		if len(run.Reaches) == 0 {
			return
		}
		cut := *run
		cut.Reaches = nil
		for _, reach := range run.Reaches {
			// Halves, quarters and eighths leave the sum of the lengths as it is.
			share := float64(1+r.IntN(7)) / 8
			first, second := reach, reach
			first.Length = reach.Length * share
			second.Length = reach.Length - first.Length
			first.Drop, first.Loss = 0, 0
			second.Inflow, second.Entry = 0, 0
			cut.Reaches = append(cut.Reaches, first, second)
		}
		w, n := same(t, "cut in two", ref.Name, run, answer, solved(t, ref.Name, &cut))
		worst, compared = max(worst, w), compared+n
	})
	t.Logf("%d depths, worst %.2g", compared, worst)
	if compared < 3000 {
		t.Errorf("%d depths compared", compared)
	}
}

func TestSameAnswerAtOtherPoints(t *testing.T) {
	r := rand.New(rand.NewPCG(5, 7))
	worst, compared := 0.0, 0
	each(t, func(t *testing.T, ref *reference, run *profile.Run, answer *profile.Answer) {
		dense := *run
		for range 40 {
			dense.Report.At = append(slices.Clone(dense.Report.At), run.Report.At[0]+r.Float64()*(run.Report.At[len(run.Report.At)-1]-run.Report.At[0]))
		}
		slices.Sort(dense.Report.At)
		single := *run
		single.Report.At = run.Report.At[len(run.Report.At)/2:][:1]
		spaced := *run
		spaced.Report = profile.Report{Spacing: length(run) / 16}
		open := *run
		open.Report = profile.Report{}
		all := solved(t, ref.Name, &dense)
		for _, other := range []*profile.Answer{answer, solved(t, ref.Name, &single), solved(t, ref.Name, &spaced), solved(t, ref.Name, &open)} {
			w, n := same(t, "other points", ref.Name, run, other, all)
			worst, compared = max(worst, w), compared+n
		}
	})
	t.Logf("%d depths, worst %.2g", compared, worst)
	if compared < 5000 {
		t.Errorf("%d depths compared", compared)
	}
}

// scaled returns a reference at another scale by Froude's law: lengths by s, discharges by s^2.5, Manning's n by s^(1/6). With s a power of
// 64 every factor is a power of two, and nothing is rounded.
func scaled(r *reference, s float64) reference {
	sixth, discharge, lateral := math.Round(math.Cbrt(math.Sqrt(s))*1024)/1024, s*s*math.Sqrt(s), s*math.Sqrt(s)
	c := *r
	c.Discharge *= discharge
	c.Datum *= s
	boundary := func(b *referenceBoundary) *referenceBoundary {
		if b == nil {
			return nil
		}
		d := *b
		d.Value, d.Opening, d.CrestHeight, d.CrestWidth = d.Value*s, d.Opening*s, d.CrestHeight*s, d.CrestWidth*s
		d.Curve = nil
		for _, row := range b.Curve {
			d.Curve = append(d.Curve, [2]float64{row[0] * s, row[1] * discharge})
		}
		return &d
	}
	c.Upstream, c.Downstream = boundary(r.Upstream), boundary(r.Downstream)
	reach := func(d referenceReach) referenceReach {
		g := &d.Section
		for _, size := range []*float64{&g.BottomWidth, &g.TopWidth, &g.Width, &g.Height, &g.Diameter, &g.BenchHeight, &g.LeftBenchWidth, &g.RightBenchWidth} {
			*size *= s
		}
		points := g.Points
		g.Points = nil
		for _, p := range points {
			g.Points = append(g.Points, [2]float64{p[0] * s, p[1] * s})
		}
		l := &d.Law
		l.Manning, l.Strickler, l.SandRoughness, l.KinematicViscosity = l.Manning*sixth, l.Strickler/sixth, l.SandRoughness*s, l.KinematicViscosity*lateral
		l.Bed, l.Sides = l.Bed*sixth, l.Sides*sixth
		until, zones, rows := l.Until, l.Zones, l.ManningByDepth
		l.Until, l.Zones, l.ManningByDepth = nil, nil, nil
		for _, x := range until {
			l.Until = append(l.Until, x*s)
		}
		for _, n := range zones {
			l.Zones = append(l.Zones, n*sixth)
		}
		for _, row := range rows {
			l.ManningByDepth = append(l.ManningByDepth, [2]float64{row[0] * s, row[1] * sixth})
		}
		d.Length, d.Drop, d.Chainage, d.BedLevel = d.Length*s, d.Drop*s, d.Chainage*s, d.BedLevel*s
		d.Inflow, d.Lateral = d.Inflow*discharge, d.Lateral*lateral
		return d
	}
	c.Reaches, c.Stations, c.Expect = nil, nil, nil
	for _, d := range r.Reaches {
		c.Reaches = append(c.Reaches, reach(d))
	}
	for _, d := range r.Stations {
		c.Stations = append(c.Stations, reach(d))
	}
	for _, e := range r.Expect {
		e.chainage *= s
		e.depth *= s
		c.Expect = append(c.Expect, e)
	}
	return c
}

func TestSameAnswerAtAnotherScale(t *testing.T) {
	worst, compared := 0.0, 0
	each(t, func(t *testing.T, ref *reference, run *profile.Run, answer *profile.Answer) {
		if run.Downstream.Kind == profile.SharpCrested && run.Downstream.Coefficient == 0 {
			return // Rehbock's formula has a length of its own
		}
		for _, s := range []float64{64, 1. / 64} {
			other := scaled(ref, s)
			big, err := other.run()
			if err != nil {
				t.Fatal(err)
			}
			got := solved(t, ref.Name, big)
			if len(got.Stations) != len(answer.Stations) || len(got.Jumps) != len(answer.Jumps) {
				t.Errorf("%s at %g: %d stations and %d jumps become %d and %d", ref.Name, s, len(answer.Stations), len(answer.Jumps), len(got.Stations), len(got.Jumps))
				continue
			}
			for i := range answer.Stations {
				a, b := &answer.Stations[i], &got.Stations[i]
				off := math.Abs(b.State.Geometry.Depth/s - a.State.Geometry.Depth)
				worst, compared = max(worst, off/a.State.Geometry.Depth), compared+1
				if !(off <= allowed(run, a)) || a.Curve != b.Curve {
					t.Errorf("%s at %g: depth %.17g at %g becomes %.17g, %q %q", ref.Name, s, a.State.Geometry.Depth, a.Chainage, b.State.Geometry.Depth/s, a.Curve, b.Curve)
				}
			}
			for i, jump := range answer.Jumps {
				if !(math.Abs(got.Jumps[i].Chainage/s-jump.Chainage) <= 1e-9*length(run)) || !(math.Abs(got.Jumps[i].Length/s-jump.Length) <= 1e-6*jump.Length) {
					t.Errorf("%s at %g: jump %+v becomes %+v", ref.Name, s, jump, got.Jumps[i])
				}
			}
		}
	})
	t.Logf("%d depths, worst %.2g", compared, worst)
	if compared < 6000 {
		t.Errorf("%d depths compared", compared)
	}
}

// TestBarrels: so many barrels carry so many times the discharge of one.
func TestBarrels(t *testing.T) {
	worst := 0.0
	each(t, func(t *testing.T, ref *reference, run *profile.Run, answer *profile.Answer) {
		if len(run.Stations) > 0 || run.Downstream.Kind == profile.Rating || run.Downstream.Kind == profile.SharpCrested || run.Downstream.Kind == profile.BroadCrested {
			return
		}
		many := *run
		many.Discharge *= 4
		many.Reaches = slices.Clone(run.Reaches)
		for i := range many.Reaches {
			reach := &many.Reaches[i]
			reach.Channel.Barrels = 4 * max(1, reach.Channel.Barrels)
			reach.Inflow, reach.Lateral = 4*reach.Inflow, 4*reach.Lateral
		}
		w, _ := same(t, "four times the barrels", ref.Name, run, answer, solved(t, ref.Name, &many))
		worst = max(worst, w)
	})
	t.Logf("worst %.2g", worst)
}

// levelsOf returns the bed level, the slope and the discharge at a chainage of a reach, worked out from the run.
func levelsOf(run *profile.Run, p *profile.Point) (bed, slope, discharge float64) {
	discharge = run.Discharge
	if len(run.Stations) > 0 {
		a, b := run.Stations[p.Reach], run.Stations[p.Reach+1]
		slope = (a.BedLevel - b.BedLevel) / (b.Chainage - a.Chainage)
		return a.BedLevel - slope*(p.Chainage-a.Chainage), slope, discharge
	}
	start, end := 0.0, 0.0
	for i := range run.Reaches {
		reach := &run.Reaches[i]
		if i <= p.Reach {
			discharge += reach.Inflow
			if i < p.Reach {
				discharge += reach.Lateral * reach.Length
				start += reach.Length
			} else {
				discharge += reach.Lateral * (p.Chainage - start)
			}
		}
	}
	bed, slope = run.Datum, run.Reaches[p.Reach].Channel.Slope
	for i := range run.Reaches {
		end += run.Reaches[i].Length
		switch {
		case i == p.Reach:
			bed += slope*(end-p.Chainage) + run.Reaches[i].Drop
		case i > p.Reach:
			bed += run.Reaches[i].Channel.Slope*run.Reaches[i].Length + run.Reaches[i].Drop
		}
	}
	return bed, slope, discharge
}

func TestLevelsAreConsistent(t *testing.T) {
	rises := 0
	each(t, func(t *testing.T, ref *reference, run *profile.Run, _ *profile.Answer) {
		asked := *run
		asked.Report = profile.Report{}
		answer := solved(t, ref.Name, &asked)
		last := -1.0
		for i := range answer.Stations {
			p := &answer.Stations[i]
			bed, slope, discharge := levelsOf(run, p)
			cosine := math.Sqrt(1 - slope*slope)
			depth := p.State.Geometry.Depth
			scale := 1e-12 * (1 + math.Abs(bed) + length(run))
			if !(math.Abs(p.BedLevel-bed) <= scale) || !(math.Abs(p.WaterLevel-p.BedLevel-depth*cosine) <= scale) ||
				!(math.Abs(p.EnergyLevel-p.BedLevel-p.State.SpecificEnergy) <= scale) || !(math.Abs(p.State.SpecificEnergy-depth*cosine-p.State.VelocityHead) <= scale) {
				t.Errorf("%s at %g: bed %.17g (%.17g), water %.17g, energy %.17g", ref.Name, p.Chainage, p.BedLevel, bed, p.WaterLevel, p.EnergyLevel)
			}
			if !(math.Abs(p.State.Discharge-discharge) <= 1e-12*discharge) {
				t.Errorf("%s at %g: discharge %.17g, not %.17g", ref.Name, p.Chainage, p.State.Discharge, discharge)
			}
			if !(p.Chainage >= last) {
				t.Errorf("%s: chainage %g after %g", ref.Name, p.Chainage, last)
			}
			last = p.Chainage
			if i == 0 {
				continue
			}
			before := &answer.Stations[i-1]
			if before.State.Discharge != p.State.Discharge {
				continue // an inflow brings energy
			}
			rises++
			if !(p.EnergyLevel <= before.EnergyLevel+1e-9*p.State.SpecificEnergy) {
				t.Errorf("%s: the energy rises from %.17g at %g to %.17g at %g", ref.Name, before.EnergyLevel, before.Chainage, p.EnergyLevel, p.Chainage)
			}
		}
	})
	if rises < 5000 {
		t.Errorf("%d pairs of stations only", rises)
	}
}

// TestDepthIsMonotone: along a curve of a prismatic reach at constant discharge the depth only rises or only falls.
func TestDepthIsMonotone(t *testing.T) {
	spans := 0
	each(t, func(t *testing.T, ref *reference, run *profile.Run, _ *profile.Answer) {
		asked := *run
		asked.Report = profile.Report{Spacing: length(run) / 97}
		answer := solved(t, ref.Name, &asked)
		for _, span := range answer.Curves {
			if len(run.Stations) > 0 || run.Reaches[span.Reach].Lateral != 0 {
				continue
			}
			var depths []float64
			for i := range answer.Stations {
				if p := &answer.Stations[i]; p.Reach == span.Reach && p.Chainage > span.From && p.Chainage < span.To {
					depths = append(depths, p.State.Geometry.Depth)
				}
			}
			spans++
			up, down := 0.0, 0.0
			for i := 1; i < len(depths); i++ {
				d := (depths[i] - depths[i-1]) / depths[i]
				up, down = max(up, d), max(down, -d)
			}
			if !(min(up, down) <= 1e-13) {
				t.Errorf("%s: %s from %g to %g rises by %g and falls by %g", ref.Name, span.Curve, span.From, span.To, up, down)
			}
		}
	})
	if spans < 300 {
		t.Errorf("%d curves only", spans)
	}
}

// TestCurvesCoverTheRun: one after the other, without gaps, each station on the curve that it names.
func TestCurvesCoverTheRun(t *testing.T) {
	each(t, func(t *testing.T, ref *reference, run *profile.Run, answer *profile.Answer) {
		place, end := 0.0, length(run)
		if len(run.Reaches) == 0 {
			place, end = run.Stations[0].Chainage, run.Stations[len(run.Stations)-1].Chainage
		}
		for _, span := range answer.Curves {
			if !(math.Abs(span.From-place) <= 1e-12*end) || !(span.To > span.From) {
				t.Errorf("%s: curve %+v after %.17g", ref.Name, span, place)
			}
			place = span.To
		}
		if !(math.Abs(place-end) <= 1e-12*end) {
			t.Errorf("%s: the curves end at %g of %g", ref.Name, place, end)
		}
		for i := range answer.Stations {
			p := &answer.Stations[i]
			if p.State.Regime == flow.CriticalFlow {
				continue
			}
			if !slices.ContainsFunc(answer.Curves, func(s profile.CurveSpan) bool {
				return s.Reach == p.Reach && s.Curve == p.Curve && p.Chainage >= s.From && p.Chainage <= s.To
			}) {
				t.Errorf("%s: %q at %g is on none of %+v", ref.Name, p.Curve, p.Chainage, answer.Curves)
			}
		}
	})
}

// TestJumpsBalance: at a jump the specific forces are equal, energy is lost, and length and form follow from the Froude number.
func TestJumpsBalance(t *testing.T) {
	jumps := 0
	each(t, func(t *testing.T, ref *reference, run *profile.Run, answer *profile.Answer) {
		for _, jump := range answer.Jumps {
			if len(run.Stations) > 0 {
				continue
			}
			jumps++
			channel := &run.Reaches[jump.Reach].Channel
			_, _, discharge := levelsOf(run, &profile.Point{Chainage: jump.Chainage, Reach: jump.Reach})
			one, two := channel.State(jump.UpstreamDepth, discharge), channel.State(jump.DownstreamDepth, discharge)
			if !(math.Abs(one.SpecificForce-two.SpecificForce) <= 1e-11*one.SpecificForce) {
				t.Errorf("%s: forces %.17g and %.17g at the jump", ref.Name, one.SpecificForce, two.SpecificForce)
			}
			if !(jump.EnergyLoss > 0) || !(math.Abs(jump.EnergyLoss-(one.SpecificEnergy-two.SpecificEnergy)) <= 1e-12*one.SpecificEnergy) {
				t.Errorf("%s: the jump loses %.17g of %.17g less %.17g", ref.Name, jump.EnergyLoss, one.SpecificEnergy, two.SpecificEnergy)
			}
			if one.Regime != flow.Supercritical || two.Regime != flow.Subcritical && two.Regime != flow.FullFlow {
				t.Errorf("%s: from %v to %v", ref.Name, one.Regime, two.Regime)
			}
			if f := one.FroudeNumber; !(math.Abs(jump.FroudeNumber-f) <= 1e-12*f) || !(math.Abs(jump.Length-220*jump.UpstreamDepth*math.Tanh((f-1)/22)) <= 1e-12*jump.Length) {
				t.Errorf("%s: Froude number %g and length %g of %+v", ref.Name, f, jump.Length, jump)
			}
			form := "strong"
			for _, limit := range []struct {
				froude float64
				form   string
			}{{9, "steady"}, {4.5, "oscillating"}, {2.5, "weak"}, {1.7, "undular"}} {
				if jump.FroudeNumber < limit.froude {
					form = limit.form
				}
			}
			if jump.Form != form {
				t.Errorf("%s: %q at Froude number %g", ref.Name, jump.Form, jump.FroudeNumber)
			}
		}
	})
	if jumps < 40 {
		t.Errorf("%d jumps only", jumps)
	}
}

// TestShorterRun: the depth found part of the way, given as boundary of the rest, gives the rest of the curve.
func TestShorterRun(t *testing.T) {
	worst, runs := 0.0, 0
	each(t, func(t *testing.T, ref *reference, run *profile.Run, answer *profile.Answer) {
		if len(run.Reaches) != 1 || len(answer.Jumps) > 0 || run.Reaches[0].Lateral != 0 {
			return
		}
		k := len(ref.Expect) / 2
		x := ref.Expect[k].chainage
		p := answer.Stations[slices.IndexFunc(answer.Stations, func(p profile.Point) bool { return p.Chainage == x })]
		short := *run
		short.Reaches = slices.Clone(run.Reaches)
		short.Report.At = nil
		boundary := profile.Boundary{Kind: profile.Depth, Value: p.State.Geometry.Depth}
		shift := 0.0
		if p.State.Regime == flow.Supercritical {
			shift = x
			short.Upstream = boundary
			short.Reaches[0].Length -= x
		} else {
			short.Downstream = boundary
			short.Reaches[0].Length = x
		}
		for _, e := range ref.Expect {
			if at := e.chainage - shift; at >= 0 && at <= short.Reaches[0].Length {
				short.Report.At = append(short.Report.At, at)
			}
		}
		got := solved(t, ref.Name, &short)
		runs++
		for _, e := range ref.Expect {
			for _, depth := range at(got, e.chainage-shift) {
				i := slices.IndexFunc(answer.Stations, func(p profile.Point) bool { return p.Chainage == e.chainage })
				whole := &answer.Stations[i]
				off := math.Abs(depth - whole.State.Geometry.Depth)
				worst = max(worst, off/depth)
				if !(off <= allowed(run, whole)) {
					t.Errorf("%s: depth %.17g at %g becomes %.17g", ref.Name, whole.State.Geometry.Depth, e.chainage, depth)
				}
			}
		}
	})
	t.Logf("%d runs, worst %.2g", runs, worst)
	if runs < 150 {
		t.Errorf("%d runs only", runs)
	}
}

// TestStationsOfAPrismaticReach: the same channel given as reaches and as stations, of which two suffice.
func TestStationsOfAPrismaticReach(t *testing.T) {
	worst, runs := 0.0, 0
	each(t, func(t *testing.T, ref *reference, run *profile.Run, answer *profile.Answer) {
		if len(run.Reaches) != 1 || run.Reaches[0].Lateral != 0 || run.Reaches[0].Channel.Barrels > 1 {
			return
		}
		reach := run.Reaches[0]
		top := run.Datum + reach.Channel.Slope*reach.Length
		for _, count := range []int{2, 5, 33} {
			stations := *run
			stations.Reaches, stations.Datum = nil, 0
			for i := range count {
				x := reach.Length * float64(i) / float64(count-1)
				stations.Stations = append(stations.Stations, profile.Station{Channel: reach.Channel, Chainage: x, BedLevel: top - reach.Channel.Slope*x})
			}
			got := solved(t, ref.Name, &stations)
			runs++
			for _, e := range ref.Expect {
				near := math.Inf(1)
				for _, depth := range at(got, e.chainage) {
					near = min(near, math.Abs(depth-e.depth)/e.depth)
				}
				worst = max(worst, near)
				// the levels say the slope to 1e-15 of themselves only
				steepness := 1e-14 * (1 + math.Abs(top)) / (reach.Length * max(math.Abs(reach.Channel.Slope), 1e-9)) * float64(count)
				if !(near <= 1e-8+10*steepness) {
					t.Errorf("%s as %d stations: depth %g at %g is off by %.2g", ref.Name, count, e.depth, e.chainage, near)
				}
			}
			if len(got.Jumps) != len(answer.Jumps) {
				t.Errorf("%s as %d stations: jumps %+v", ref.Name, count, got.Jumps)
			}
		}
	})
	t.Logf("%d runs, worst %.2g", runs, worst)
	if runs < 400 {
		t.Errorf("%d runs only", runs)
	}
}

// TestSurveyedCopyConverges: a parabola surveyed by ever more points comes to the parabola's profile, with the square of their number.
func TestSurveyedCopyConverges(t *testing.T) {
	law, err := friction.NewManning(0.025)
	if err != nil {
		t.Fatal(err)
	}
	parabola, err := section.NewParabolic(8, 2)
	if err != nil {
		t.Fatal(err)
	}
	run := func(s section.Section) *profile.Answer {
		var stations []profile.Station
		for i := range 6 {
			channel := flow.Channel{Section: s, Law: law, Gravity: gravity}
			stations = append(stations, profile.Station{Channel: channel, Chainage: 200 * float64(i), BedLevel: 10 - 0.2*float64(i)})
		}
		return solved(t, "parabola", &profile.Run{Discharge: 8, Stations: stations, Downstream: profile.Boundary{Kind: profile.Depth, Value: 2}, Report: profile.Report{At: []float64{300, 700}}})
	}
	exact := run(parabola)
	var last float64
	for _, n := range []int{32, 64, 128, 256} {
		var points [][2]float64
		for i := range n + 1 {
			x := 12 * (2*float64(i)/float64(n) - 1)
			points = append(points, [2]float64{x, 2 * x * x / 16})
		}
		s, err := section.NewSurveyed(points)
		if err != nil {
			t.Fatal(err)
		}
		got, off := run(s), 0.0
		for _, x := range []float64{300, 700} {
			off = max(off, math.Abs(at(got, x)[0]-at(exact, x)[0])/at(exact, x)[0])
		}
		t.Logf("%d points: off by %.2g", n+1, off)
		if last > 0 && !(off < 0.35*last) {
			t.Errorf("from %g to %g with twice the points", last, off)
		}
		last = off
	}
	if !(last < 1e-4) {
		t.Errorf("still off by %g", last)
	}
}

// TestBoundariesThatDoNotGovern: what asks for less than critical depth downstream acts as a free overfall, what is not shallower than critical upstream as
// left out, and each is said.
func TestBoundariesThatDoNotGovern(t *testing.T) {
	s, err := section.NewTrapezoidal(3, 1, 1)
	if err != nil {
		t.Fatal(err)
	}
	law, err := friction.NewManning(0.025)
	if err != nil {
		t.Fatal(err)
	}
	const discharge = 6.0
	for _, slope := range []float64{0.001, 0, -0.0005, 0.04} {
		channel := flow.Channel{Section: s, Law: law, Slope: slope, Gravity: gravity}
		depths, _ := channel.Critical(discharge, nil)
		critical := depths[0]
		with := func(up, down profile.Boundary) *profile.Run {
			return &profile.Run{Discharge: discharge, Reaches: []profile.Reach{{Channel: channel, Length: 150}}, Upstream: up, Downstream: down, Datum: 10,
				Report: profile.Report{At: []float64{0, 20, 75, 140}}}
		}
		overfall := profile.Boundary{Kind: profile.FreeOverfall}
		plain := solved(t, "overfall", with(profile.Boundary{}, overfall))
		for name, down := range map[string]profile.Boundary{
			"a depth below critical":         {Kind: profile.Depth, Value: 0.7 * critical},
			"a level below critical":         {Kind: profile.Level, Value: 10 + 0.5*critical},
			"a level below the bed":          {Kind: profile.Level, Value: 9},
			"a low, wide broad crest":        {Kind: profile.BroadCrested, CrestHeight: 0.01, CrestWidth: 60},
			"a low, wide sharp crest":        {Kind: profile.SharpCrested, CrestHeight: 0.01, CrestWidth: 60},
			"a rating of less than critical": {Kind: profile.Rating, Curve: [][2]float64{{0.1 * critical, 1}, {0.8 * critical, 12}}},
		} {
			answer := solved(t, name, with(profile.Boundary{}, down))
			same(t, name, "overfall", with(profile.Boundary{}, overfall), plain, answer)
			if len(answer.Notes) == 0 {
				t.Errorf("%s at slope %g is not said", name, slope)
			}
		}
		for name, up := range map[string]profile.Boundary{
			"a subcritical depth":  {Kind: profile.Depth, Value: 1.3 * critical},
			"a subcritical level":  {Kind: profile.Level, Value: 10 + slope*150 + 1.5*critical},
			"a gate drawn up high": {Kind: profile.Gate, Opening: 2 * critical, Contraction: 0.61},
		} {
			answer := solved(t, name, with(up, overfall))
			same(t, name, "left out", with(profile.Boundary{}, overfall), plain, answer)
			if len(answer.Notes) == 0 {
				t.Errorf("%s at slope %g is not said", name, slope)
			}
		}
		if slope <= 0 {
			_, err := profile.Solve(with(profile.Boundary{}, profile.Boundary{Kind: profile.Normal}))
			if _, physical := err.(*profile.NoSolution); !physical {
				t.Errorf("normal depth at slope %g: %v", slope, err)
			}
		}
		for _, beyond := range [][][2]float64{{{0.5, 1}, {1, 5}}, {{0.5, 7}, {1, 20}}} {
			_, err := profile.Solve(with(profile.Boundary{}, profile.Boundary{Kind: profile.Rating, Curve: beyond}))
			if _, physical := err.(*profile.NoSolution); !physical {
				t.Errorf("a rating that does not hold the discharge: %v", err)
			}
		}
	}
}
