package profile

import "leat/compute/flow"

// A Course is where the bed of a reach, or of the interval between two stations, runs.
type Course struct {
	From, To       float64 // chainages from the upstream end, m
	FromBed, ToBed float64 // levels of the bed at its two ends, m
	Cosine         float64 // of the bed's angle
}

// Level returns the water level in m of a depth in m, normal to the bed, at the upstream or the downstream end.
func (c *Course) Level(depth float64, downstream bool) float64 {
	if downstream {
		return c.ToBed + depth*c.Cosine
	}
	return c.FromBed + depth*c.Cosine
}

// Courses returns the course of every reach, or of every interval, in order downstream.
func (run *Run) Courses() []Course {
	if n := len(run.Stations); n > 0 {
		out := make([]Course, n-1)
		for i := range out {
			a, b := &run.Stations[i], &run.Stations[i+1]
			c := flow.Channel{Slope: (a.BedLevel - b.BedLevel) / (b.Chainage - a.Chainage)}
			out[i] = Course{a.Chainage, b.Chainage, a.BedLevel, b.BedLevel, c.Cosine()}
		}
		return out
	}
	out := make([]Course, len(run.Reaches))
	at := 0.0
	for i := range out {
		out[i].From, out[i].To = at, at+run.Reaches[i].Length
		at = out[i].To
	}
	bed := run.Datum
	for i := len(out) - 1; i >= 0; i-- {
		r, c := &run.Reaches[i], &out[i]
		if i < len(out)-1 {
			bed += r.Drop
		}
		c.ToBed = bed
		bed += r.Channel.Slope * r.Length
		c.FromBed, c.Cosine = bed, r.Channel.Cosine()
	}
	return out
}
