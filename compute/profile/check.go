package profile

import (
	"strconv"

	"leat/compute"
)

// check returns every rule that a run breaks.
func check(run *Run) compute.Faults {
	var faults compute.Faults
	fault := func(member, code, detail string) {
		faults = append(faults, compute.Fault{Member: member, Code: code, Detail: detail})
	}
	if !(run.Discharge > 0) {
		fault("discharge", "not_positive", "The discharge must be greater than 0.")
	}
	if (len(run.Reaches) == 0) == (len(run.Stations) < 2) {
		fault("reaches", "missing_member", "Give either reaches or at least two stations, not both.")
	}
	for i := range run.Reaches {
		r := &run.Reaches[i]
		at := func(member string) string { return "reaches/" + strconv.Itoa(i) + member }
		if !(r.Length > 0) {
			fault(at("/length"), "not_positive", "The length must be greater than 0.")
		}
		if r.Channel.Law == nil {
			fault(at("/roughness"), "missing_member", "A reach needs a roughness; give one.")
		}
		if r.Inflow < 0 || r.Lateral < 0 {
			fault(at(""), "negative", "Inflows must be 0 or more.")
		}
		if i == 0 && (r.Inflow != 0 || r.Entry != 0) {
			fault(at(""), "first_reach", "The first reach has no inflow at its upstream end and no entry loss: there is nothing above it. Leave them out.")
		}
		if i == len(run.Reaches)-1 && (r.Drop != 0 || r.Loss != 0) {
			fault(at(""), "last_reach", "The last reach has no drop and no loss at its downstream end: there is nothing below it. Leave them out.")
		}
	}
	for i := 1; i < len(run.Stations); i++ {
		if !(run.Stations[i].Chainage > run.Stations[i-1].Chainage) {
			fault("stations/"+strconv.Itoa(i)+"/chainage", "not_rising", "The chainage must be greater than that of the station before.")
		}
	}
	return faults
}
