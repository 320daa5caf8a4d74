package operation

import (
	"strconv"

	"leat/api/wire"
)

// Section is the operation section: geometry and hydraulics at given depths.
var Section = Operation{Name: "section", Form: (*wire.SectionAnswer)(nil), Request: (*wire.SectionRequest)(nil), Solve: func(body []byte, options Options) (Solved, *wire.Problem) {
	var request wire.SectionRequest
	return Run("section", body, options, &request, &request.Common, func() (wire.Answer, *wire.Problem) {
		return solveSection(&request, &options)
	})
}}

// betweenCheckpoints is how many depths or discharges are described from one checkpoint to the next.
const betweenCheckpoints = 16

func solveSection(r *wire.SectionRequest, options *Options) (wire.Answer, *wire.Problem) {
	in := inputs{&r.Common, r.Barrels, &r.Section, &r.Roughness, r.BedSlope}
	c, problem := in.channel()
	if problem != nil {
		return nil, problem
	}
	depths, one := r.Depths, r.Depth.Given
	if one {
		depths = []float64{r.Depth.Value}
	}
	pointer := func(i int) string {
		if one {
			return "/depth"
		}
		return "/depths/" + strconv.Itoa(i)
	}
	var faults []wire.Fault
	for i, depth := range depths {
		if fault, above := aboveSection(&c, depth, pointer(i)); above {
			faults = append(faults, fault)
		}
	}
	if len(faults) > 0 {
		return nil, wire.InvalidRequest(faults...)
	}
	var w warnings
	w.doubt("", &in)
	m := members(&c, r.Discharge.Given)
	a := &wire.SectionAnswer{States: make([]wire.State, len(depths))}
	checkpoint := options.begin()
	for i, depth := range depths {
		if i%betweenCheckpoints == 0 {
			if err := checkpoint(); err != nil {
				return nil, stopped(err)
			}
		}
		s := c.State(depth, r.Discharge.Value)
		a.States[i] = state(&s, m)
		w.state(&c, &s, pointer(i))
	}
	a.Warnings = w.done()
	return a, nil
}
