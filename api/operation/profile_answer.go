package operation

import (
	"math"
	"sort"
	"strconv"

	"leat/api/wire"
	"leat/compute/flow"
	"leat/compute/profile"
)

// answer returns a solved run in the contract's terms.
func (p *profileRun) answer(a *profile.Answer) *wire.ProfileAnswer {
	names := p.names()
	out := &wire.ProfileAnswer{
		Stations: make([]wire.ProfileStation, len(a.Stations)), Reaches: make([]wire.ProfileReach, len(a.Reaches)),
		Curves: make([]wire.ProfileCurve, len(a.Curves)), Jumps: make([]wire.ProfileJump, len(a.Jumps)),
		Controls: make([]wire.ProfileControl, len(a.Controls)),
		Extent:   a.Extent, Balance: wire.ProfileBalance(a.Balance), Length: p.length,
	}
	if p.request.Geometry.Given {
		out.Geometry = &p.request.Geometry
	}
	w := p.doubts
	here := place{reach: -1}
	for i := range a.Stations {
		s := &a.Stations[i]
		if s.Reach != here.reach {
			here = p.reachPlace(s.Reach)
		}
		p.stateWarnings(&w, &here, s)
		out.Stations[i] = wire.ProfileStation{
			Chainage: s.Chainage, Reach: names[s.Reach], BedLevel: s.BedLevel, WaterLevel: s.WaterLevel, EnergyLevel: s.EnergyLevel, Curve: s.Curve,
			State: state(&s.State, here.members),
		}
	}
	for i, r := range a.Reaches {
		out.Reaches[i] = wire.ProfileReach{ID: names[i], NormalDepth: r.NormalDepth, CriticalDepth: r.CriticalDepth, SlopeClass: r.Class.String()}
	}
	for i, c := range a.Curves {
		out.Curves[i] = wire.ProfileCurve{From: c.From, To: c.To, Reach: names[c.Reach], Curve: c.Curve}
	}
	for i, j := range a.Jumps {
		out.Jumps[i] = wire.ProfileJump{
			Chainage: j.Chainage, Reach: names[j.Reach], UpstreamDepth: j.UpstreamDepth, DownstreamDepth: j.DownstreamDepth, FroudeNumber: j.FroudeNumber,
			EnergyLoss: j.EnergyLoss, Length: j.Length, Form: j.Form, WaterLevel: levelBelow(a.Stations, j.Chainage),
		}
	}
	for i, c := range a.Controls {
		out.Controls[i] = wire.ProfileControl(c)
	}
	out.Warnings = append(p.notes(a.Notes), w.done()...)
	return out
}

// names returns what answers call each reach: its id, or its index from 0 where it has none; an interval between stations by its index.
func (p *profileRun) names() []wire.ID {
	names := make([]wire.ID, max(len(p.request.Reaches), len(p.request.Stations)-1))
	for i := range names {
		if i < len(p.request.Reaches) {
			names[i] = p.request.Reaches[i].ID
		}
		if names[i] == nil {
			names[i] = strconv.AppendInt(nil, int64(i), 10)
		}
	}
	return names
}

// A place is what stations within one reach, or one interval, have in common.
type place struct {
	reach   int
	members wire.StateMembers
	channel *flow.Channel // of a reach
	pointer string        // of a reach
}

func (p *profileRun) reachPlace(i int) place {
	if len(p.run.Reaches) > 0 {
		c := &p.run.Reaches[i].Channel
		return place{i, members(c, true) | wire.WithDischarge, c, "/reaches/" + strconv.Itoa(i) + "/section"}
	}
	from, to := &p.run.Stations[i], &p.run.Stations[i+1]
	c := from.Channel
	c.Slope = from.BedLevel - to.BedLevel // of which the sign is meant
	return place{i, members(&c, true) | wire.WithDischarge, nil, ""}
}

// stateWarnings adds what is to be said of the flow at a place. Between two stations no section is the one there.
func (p *profileRun) stateWarnings(w *warnings, here *place, s *profile.Point) {
	c, pointer := here.channel, here.pointer
	if c == nil {
		i := here.reach
		switch s.Chainage {
		case p.run.Stations[i].Chainage:
		case p.run.Stations[i+1].Chainage:
			i++
		default:
			return
		}
		c, pointer = &p.run.Stations[i].Channel, "/stations/"+strconv.Itoa(i)+"/section"
	}
	w.state(c, &s.State, pointer)
}

// levelBelow returns the water level of the last of the stations at a chainage, which is the one below a jump there; NaN where a jump has no
// stations at both its sides.
func levelBelow(stations []profile.Point, chainage float64) float64 {
	i := sort.Search(len(stations), func(i int) bool { return stations[i].Chainage > chainage })
	if i < 2 || stations[i-1].Chainage != chainage || stations[i-2].Chainage != chainage {
		return math.NaN()
	}
	return stations[i-1].WaterLevel
}
