package operation

import (
	"math"
	"sort"
	"strconv"

	"leat/api/wire"
	"leat/compute/profile"
)

// notes returns the solver's notes as warnings: each thing once for each end and once for all places within, at the first of them.
func (p *profileRun) notes(notes []profile.Note) []wire.Warning {
	out := []wire.Warning{}
	if p.start != 0 {
		out = append(out, wire.Warning{Code: "chainages_shifted", Pointer: "/stations/0/chainage",
			Detail: "The chainages of this answer count from the upstream end, where the first station is given another chainage than 0."})
	}
	type key struct{ code, end, detail string }
	first := map[key]int{}
	others := map[int]int{}
	for _, n := range notes {
		k := key{n.Code, n.End, n.Detail}
		if i, known := first[k]; known {
			others[i]++
			continue
		}
		first[k] = len(out)
		out = append(out, wire.Warning{Code: n.Code, Detail: n.Detail + p.where(n.Chainage), Pointer: p.place(&n)})
	}
	for i, count := range others {
		out[i].Detail += alsoAt(count)
	}
	return out
}

// place returns the pointer of what a note concerns: a boundary, a reach or a station.
func (p *profileRun) place(n *profile.Note) string {
	switch {
	case n.End != "":
		return p.pointer(n.End)
	case math.IsNaN(n.Chainage):
		return ""
	case len(p.run.Stations) > 0:
		i := sort.Search(len(p.run.Stations), func(i int) bool { return p.run.Stations[i].Chainage > n.Chainage })
		return "/stations/" + strconv.Itoa(max(i-1, 0))
	}
	end := 0.0
	for i := range p.run.Reaches {
		if end += p.run.Reaches[i].Length; n.Chainage < end || i == len(p.run.Reaches)-1 {
			return "/reaches/" + strconv.Itoa(i)
		}
	}
	return ""
}

// where tells a chainage in the units of the request, as a sentence; nothing where none is meant.
func (p *profileRun) where(chainage float64) string {
	if math.IsNaN(chainage) {
		return ""
	}
	system := p.request.System
	return " This is at chainage " + strconv.FormatFloat(system.FromSI(wire.QuantityLength, chainage), 'g', 6, 64) + " " + system.Unit(wire.QuantityLength) + "."
}
