package operation

import (
	"bytes"
	"cmp"
	"errors"
	"math"
	"slices"

	"leat/api/wire"
	"leat/compute/flow"
	"leat/compute/profile"
	"leat/compute/section"
)

// A Figure is what a picture draws beside the numbers of an answer: shapes and curves, in SI units.
type Figure struct {
	Cross  *Cross   // nil for a profile
	Marks  []Mark   // the depths of an answer to depths, rising
	Energy []Point2 // specific energy by depth, of depths with its discharge: X in m, Y the depth in m
	Force  []Point2 // specific force, X in m3
	Rating []Point2 // X the discharge in m3/s; empty unless a rating is drawn
	Long   *Long    // of a profile
	Facts  []Fact   // what the request says in single numbers, for a heading
}

// A Mark is one depth of an answer with where it stands on the curves.
type Mark struct {
	Name   string // normal, critical, given, alternate or sequent
	Depth  float64
	Energy float64
	Force  float64
}

// A Fact is one number of a request.
type Fact struct {
	Name     string // of the member
	Quantity wire.Quantity
	Value    float64
}

// A Point2 is a point of a curve. One whose X is NaN parts two pieces.
type Point2 struct{ X, Y float64 }

// A Cross is the shape of a cross-section.
type Cross struct {
	Kind     wire.Kind
	Outline  []Point2 // offset and height above the lowest point, from left to right
	Exact    bool     // else widths alone are known and the outline stands about its middle
	Closed   bool
	Bank     float64 // depth at which it overtops, or the crown; NaN where not known
	Barrels  int
	Dividers []Divider // of zones of roughness, from left to right
}

// A Divider is a zone of roughness from where the one before ends until an offset.
type Divider struct {
	Until   float64 // NaN for the last
	Manning float64
}

// A Long is what stands along a run beside its stations.
type Long struct {
	Courses []Course
	// Places are as many as straight lines between them need, whatever the request wants reported.
	Places []Place
	// Reported says that the answer's stations are others.
	Reported bool
}

// A Place is one place of a run. At a jump, a drop or a break two stand at one chainage.
type Place struct {
	Chainage, Depth          float64
	Bed, Water, Energy, Free float64 // levels; Free is where the free surface, or the crown above a full section, lies
}

// A Course is one reach, or one interval between stations. Levels that are not known are NaN.
type Course struct {
	ID                       wire.ID
	From, To                 float64    // chainages
	Bed, Normal, Critical    [2]float64 // levels at both ends
	Top                      [2]float64 // of bank or crown
	Closed                   bool
	NormalFrom, CriticalFrom float64 // chainage from which their levels hold: an interval between stations knows its downstream end alone
}

// samples is how many points a curve is drawn with.
const samples = 120

// Figure samples what a picture of the answer draws. It may be called once the request is solved, as long as its body lives.
func (s *Solved) Figure() (*Figure, *wire.Problem) {
	switch a := s.Answer.(type) {
	case *wire.SectionAnswer:
		return figure(s, a, sectionFigure)
	case *wire.DepthsAnswer:
		return figure(s, a, depthsFigure)
	case *wire.RatingAnswer:
		return figure(s, a, ratingFigure)
	case *wire.AppraisalAnswer:
		return figure(s, a, appraisalFigure)
	case *wire.ProfileAnswer:
		return profileFigure(s.profile, s.profile.request, a)
	}
	return nil, wire.Internal("There is no picture of this answer.")
}

// figure decodes a request anew and samples from it.
func figure[R any, A wire.Answer, P interface {
	*R
	wire.Request
}](s *Solved, answer A, sample func(P, A) (*Figure, *wire.Problem)) (*Figure, *wire.Problem) {
	request := P(new(R))
	if problem := wire.Decode(s.body, s.defaultUnits, s.limits, request); problem != nil {
		return nil, problem
	}
	return sample(request, answer)
}

func sectionFigure(r *wire.SectionRequest, a *wire.SectionAnswer) (*Figure, *wire.Problem) {
	in := inputs{&r.Common, r.Barrels, &r.Section, &r.Roughness, r.BedSlope}
	c, problem := in.channel()
	if problem != nil {
		return nil, problem
	}
	return &Figure{Cross: cross(&c, &in, depthsOf(a.States)...), Facts: facts(r.Discharge, r.BedSlope)}, nil
}

func depthsFigure(r *wire.DepthsRequest, a *wire.DepthsAnswer) (*Figure, *wire.Problem) {
	in := inputs{&r.Common, r.Barrels, &r.Section, &r.Roughness, r.BedSlope}
	c, problem := in.channel()
	if problem != nil {
		return nil, problem
	}
	var marks []Mark
	add := func(name string, depths ...float64) {
		for _, depth := range known(depths...) {
			s := c.State(depth, r.Discharge.Value)
			marks = append(marks, Mark{name, depth, s.SpecificEnergy, s.SpecificForce})
		}
	}
	add("normal", allOf(a.NormalDepth, a.Normal)...)
	add("critical", allOf(a.CriticalDepth, a.Critical)...)
	if a.Given.Present {
		add("given", a.Given.State.Depth)
		add("alternate", a.Given.AlternateDepth)
		add("sequent", a.Given.SequentDepth)
	}
	slices.SortStableFunc(marks, func(a, b Mark) int { return cmp.Compare(a.Depth, b.Depth) })
	var depths []float64
	for _, m := range marks {
		depths = append(depths, m.Depth)
	}
	f := &Figure{Cross: cross(&c, &in, depths...), Facts: facts(r.Discharge, r.BedSlope), Marks: marks}
	if len(depths) == 0 {
		return f, nil
	}
	from, to := 0.55*slices.Min(depths), min(1.35*slices.Max(depths), c.Section.Height())
	f.Energy, f.Force = make([]Point2, samples), make([]Point2, samples)
	for i := range samples {
		// More of them where the depths are small and the curves turn away.
		share := float64(i) / (samples - 1)
		depth := min(from+(to-from)*share*share, to)
		s := c.State(depth, r.Discharge.Value)
		f.Energy[i], f.Force[i] = Point2{s.SpecificEnergy, depth}, Point2{s.SpecificForce, depth}
	}
	return f, nil
}

// allOf returns the depths of a list of states, or the lowest where a brief answer has no list.
func allOf(lowest float64, states []wire.State) []float64 {
	if len(states) == 0 {
		return []float64{lowest}
	}
	return depthsOf(states)
}

func ratingFigure(r *wire.RatingRequest, a *wire.RatingAnswer) (*Figure, *wire.Problem) {
	in := inputs{&r.Common, r.Barrels, &r.Section, &r.Roughness, r.BedSlope}
	c, problem := in.channel()
	if problem != nil {
		return nil, problem
	}
	depths := known(depthsOf(a.States)...)
	f := &Figure{Cross: cross(&c, &in, depths...), Facts: facts(wire.Number{}, r.BedSlope)}
	if len(depths) == 0 {
		return f, nil
	}
	from, to := slices.Min(depths), slices.Max(depths)
	for i := range samples {
		depth := evenly(from, to, i, samples)
		find := c.UniformAt
		if r.Kind == wire.RatingCritical {
			find = c.CriticalAt
		}
		q, absent := find(depth)
		if absent != flow.Present {
			q = math.NaN()
		}
		f.Rating = append(f.Rating, Point2{q, depth})
	}
	return f, nil
}

func appraisalFigure(r *wire.AppraisalRequest, a *wire.AppraisalAnswer) (*Figure, *wire.Problem) {
	var w warnings
	asset, _, problem := newAsset(r, &w)
	if problem != nil {
		return nil, problem
	}
	var depths []float64
	for i := range a.Flows {
		depths = append(depths, a.Flows[i].Depths.NormalDepth)
	}
	in := inputs{&r.Common, r.Barrels, &r.Section, &r.Roughness, r.BedSlope}
	return &Figure{Cross: cross(&asset.Channel, &in, known(depths...)...), Facts: facts(wire.Number{}, r.BedSlope)}, nil
}

func profileFigure(p *profileRun, r *wire.ProfileRequest, a *wire.ProfileAnswer) (*Figure, *wire.Problem) {
	names := p.names()
	courses := p.run.Courses()
	long := &Long{Courses: make([]Course, len(courses))}
	for i := range courses {
		from, to := &courses[i], &long.Courses[i]
		*to = Course{ID: names[i], From: from.From, To: from.To, Bed: [2]float64{from.FromBed, from.ToBed}}
		upper, lower := p.ends(i)
		to.Closed = upper.Section.Closed() && lower.Section.Closed()
		levels := func(upper, lower float64) [2]float64 {
			return [2]float64{from.Level(upper, false), from.Level(lower, true)}
		}
		to.Normal = levels(a.Reaches[i].NormalDepth, a.Reaches[i].NormalDepth)
		to.Critical = levels(a.Reaches[i].CriticalDepth, a.Reaches[i].CriticalDepth)
		to.Top = levels(bankOf(upper), bankOf(lower))
		to.NormalFrom, to.CriticalFrom = to.From, to.From
		if len(p.run.Stations) > 0 {
			to.NormalFrom, to.CriticalFrom = to.To, to.To
		}
	}
	if problem := p.places(long, r, a); problem != nil {
		return nil, problem
	}
	return &Figure{Long: long, Facts: facts(r.Discharge, wire.Number{})}, nil
}

// places samples a run: from the answer, or, where the request wants certain stations reported, from a solve that reports as many as it needs.
func (p *profileRun) places(long *Long, r *wire.ProfileRequest, a *wire.ProfileAnswer) *wire.Problem {
	if r.Report.Given {
		run := p.run
		run.Report = profile.Report{Most: p.run.Report.Most}
		sampled, err := solve(&run)
		var problem *wire.Problem
		switch {
		case err == nil:
			long.Reported = true
			long.Places = make([]Place, len(sampled.Stations))
			for i := range sampled.Stations {
				s := &sampled.Stations[i]
				long.Places[i] = Place{s.Chainage, s.State.Geometry.Depth, s.BedLevel, s.WaterLevel, s.EnergyLevel,
					p.free(long, s.Reach, s.Chainage, s.WaterLevel, s.State.Regime == flow.FullFlow)}
			}
			return nil
		case errors.As(err, &problem): // stopped at a checkpoint
			return problem
		}
		// More stations than there may be: those of the answer then.
	}
	long.Places = make([]Place, len(a.Stations))
	reach := 0
	for i := range a.Stations {
		s := &a.Stations[i]
		for reach+1 < len(long.Courses) && (s.Chainage > long.Courses[reach].To || s.Chainage >= long.Courses[reach].To && !bytes.Equal(s.Reach, long.Courses[reach].ID)) {
			reach++
		}
		long.Places[i] = Place{s.Chainage, s.State.Depth, s.BedLevel, s.WaterLevel, s.EnergyLevel, p.free(long, reach, s.Chainage, s.WaterLevel, s.State.Regime == wire.RegimeFull)}
	}
	return nil
}

// free returns the level of the water itself: of its surface, or of the crown where the section is full.
func (p *profileRun) free(long *Long, reach int, chainage, level float64, full bool) float64 {
	if !full {
		return level
	}
	c := &long.Courses[reach]
	return c.Top[0] + (chainage-c.From)/(c.To-c.From)*(c.Top[1]-c.Top[0])
}

// ends returns the channels at both ends of a reach or an interval.
func (p *profileRun) ends(i int) (upper, lower *flow.Channel) {
	if len(p.run.Reaches) > 0 {
		return &p.run.Reaches[i].Channel, &p.run.Reaches[i].Channel
	}
	return &p.run.Stations[i].Channel, &p.run.Stations[i+1].Channel
}

// bankOf returns the depth at which a channel overtops, NaN where that is not known.
func bankOf(c *flow.Channel) float64 {
	if bank, known := c.BankHeight(); known {
		return bank
	}
	return math.NaN()
}

// cross returns the shape of a channel as far up as its bank or the depths drawn in it need.
func cross(c *flow.Channel, in *inputs, depths ...float64) *Cross {
	out := &Cross{Kind: in.section.Kind, Closed: c.Section.Closed(), Bank: bankOf(c), Barrels: in.barrels.Or(1)}
	depths = known(depths...)
	to := 0.0
	if len(depths) > 0 {
		to = 1.2 * slices.Max(depths)
	}
	if !math.IsNaN(out.Bank) {
		to = max(out.Bank, min(to, c.Section.Height()))
		if len(depths) > 0 && slices.Max(depths) <= out.Bank || out.Closed {
			to = out.Bank
		}
	}
	if to == 0 {
		to = min(1, c.Section.Height()) // nothing says how far up is of interest
	}
	to = min(to, c.Section.Height())
	line, exact := section.Outline(c.Section, to)
	out.Exact = exact
	out.Outline = make([]Point2, len(line))
	for i, p := range line {
		out.Outline[i] = Point2{p[0], p[1]}
	}
	for i := range in.roughness.Zones {
		z := &in.roughness.Zones[i]
		until := math.NaN()
		if z.Until.Given {
			until = z.Until.Value
		}
		out.Dividers = append(out.Dividers, Divider{until, z.Manning.Value})
	}
	return out
}

func depthsOf(states []wire.State) []float64 {
	var out []float64
	for i := range states {
		out = append(out, states[i].Depth)
	}
	return out
}

// known returns the numbers that are known.
func known(numbers ...float64) []float64 {
	var out []float64
	for _, n := range numbers {
		if !math.IsNaN(n) {
			out = append(out, n)
		}
	}
	return out
}

// facts returns what is given of a discharge and a slope.
func facts(discharge, slope wire.Number) []Fact {
	var out []Fact
	if discharge.Given {
		out = append(out, Fact{"discharge", wire.QuantityDischarge, discharge.Value})
	}
	if slope.Given {
		out = append(out, Fact{"bed_slope", wire.Dimensionless, slope.Value})
	}
	return out
}
