package wire

import (
	"reflect"
	"strconv"
	"strings"
)

func (r *Reach) rules(w *walk) { r.Roughness.fits(w, &r.Section) }

// rules judges which of them says where the bed lies.
func (s *Station) rules(w *walk) {
	s.Roughness.fits(w, &s.Section)
	switch surveyed := s.Section.Kind == Surveyed; {
	case surveyed && s.BedLevel.Given:
		w.faultAt("bed_level", codeConflictingMember, func() string {
			return "The levels of a surveyed section say where its bed is; leave bed_level out."
		})
	case !surveyed && s.Section.Kind != "" && !s.BedLevel.Given:
		w.faultAt("bed_level", codeMissingMember, func() string {
			return "bed_level is missing: a section that is not surveyed needs a number in m (ft in US units) there."
		})
	}
}

// rules judges how the members of a profile go together.
func (r *ProfileRequest) rules(w *walk) {
	switch {
	case r.Reaches != nil && r.Stations != nil:
		w.faultAt("stations", codeConflictingMember, func() string { return "Give either reaches or stations, not both." })
	case r.Reaches == nil && r.Stations == nil:
		w.faultAt("reaches", codeMissingMember, func() string {
			return "reaches is missing: give reaches, a list of objects, or stations, a list of surveyed cross-sections."
		})
	case r.Reaches != nil:
		r.chainRules(w)
	default:
		r.stationRules(w)
	}
	r.Upstream.upstream(w)
	r.reportRules(w)
	r.geometryRules(w)
}

// chainRules judges which members stand at the ends of a chain of reaches.
func (r *ProfileRequest) chainRules(w *walk) {
	if len(r.Reaches) == 0 {
		return
	}
	misplaced := func(i int, name string, n Number, detail string) {
		if n.Given {
			at := w.enter("reaches")
			w.enterItem(i)
			w.faultAt(name, codeMisplacedMember, func() string { return detail })
			w.leave(at)
		}
	}
	first, last := &r.Reaches[0], &r.Reaches[len(r.Reaches)-1]
	misplaced(0, "inflow", first.Inflow, "The first reach has no inflow of its own: what flows in there is the request's discharge. Leave it out.")
	misplaced(0, "entry_loss_coefficient", first.EntryLossCoefficient, "There is no entry from another reach into the first one; leave entry_loss_coefficient out.")
	misplaced(len(r.Reaches)-1, "drop", last.Drop, "There is no reach below the last one to drop to; leave drop out.")
	misplaced(len(r.Reaches)-1, "loss_coefficient", last.LossCoefficient, "There is no reach below the last one for the flow to change to; leave loss_coefficient out.")
}

// stationRules judges the order of surveyed stations, and what may stand beside closed ones.
func (r *ProfileRequest) stationRules(w *walk) {
	if r.Datum.Given {
		w.faultAt("datum", codeConflictingMember, func() string {
			return "datum goes with reaches; stations say at which level their beds are. Leave it out."
		})
	}
	at := w.enter("stations")
	for i := 1; i < len(r.Stations) && !w.stop(); i++ {
		above, here := &r.Stations[i-1], &r.Stations[i]
		item := w.enterItem(i)
		if above.Chainage.Given && here.Chainage.Given && !(here.Chainage.Value > above.Chainage.Value) && !w.faulted("chainage") {
			w.faultAt("chainage", codeNotRising, func() string {
				return "chainage must be greater than that of the station before; put the stations in order from upstream to downstream."
			})
		}
		if (above.Section.closed() || here.Section.closed()) && !reflect.DeepEqual(&above.Section, &here.Section) {
			w.faultAt("section", codeSectionDiffers, func() string {
				return "A closed section reaches from one station to the next only where both have the same section; repeat that of the station before, or give reaches."
			})
		}
		w.leave(item)
	}
	w.leave(at)
}

func (s *Section) closed() bool {
	switch s.Kind {
	case Circular, Box, Elliptical, Egg, Horseshoe:
		return true
	}
	return false
}

// Run returns the whole length of a profile in m, and the chainage at which its upstream end is given.
func (r *ProfileRequest) Run() (length, start float64) {
	if n := len(r.Stations); n > 0 {
		start = r.Stations[0].Chainage.Value
		return r.Stations[n-1].Chainage.Value - start, start
	}
	for i := range r.Reaches {
		length += r.Reaches[i].Length.Value
	}
	return length, 0
}

// beyondEnd is by how much of the whole length a chainage may lie beyond the end: what sums and conversions round.
const beyondEnd = 1e-9

// reportRules judges the places of report against the run.
func (r *ProfileRequest) reportRules(w *walk) {
	length, _ := r.Run()
	if !r.Report.Given || w.stop() || !(length > 0) {
		return
	}
	at := w.enter("report")
	defer w.leave(at)
	if spacing := r.Report.Spacing; spacing.Given && spacing.Value > 0 {
		if limit := w.limits.ReportPoints; length/spacing.Value > float64(limit-1) {
			w.size = true
			w.faultAt("spacing", codeTooManyItems, func() string {
				return "Stations so close would be more than " + strconv.Itoa(limit) + ", the limit `report_points` of this service (GET /v1/limits); give a greater spacing."
			})
		}
	}
	w.enter("at")
	for i, chainage := range r.Report.At {
		if w.stop() {
			break
		}
		item := w.enterItem(i)
		switch {
		case !(chainage <= length*(1+beyondEnd)):
			w.fault(codeOutOfRange, func() string {
				return "This chainage lies beyond the end of the run, which is " + inUnits(length, QuantityLength, w.system) + withUnit(QuantityLength, w.system) + " long."
			})
		case i > 0 && !(chainage > r.Report.At[i-1]):
			w.fault(codeNotRising, func() string { return "Chainages must rise from one to the next." })
		}
		w.leave(item)
	}
}

// geometryRules judges that a line has a length to go along.
func (r *ProfileRequest) geometryRules(w *walk) {
	line := r.Geometry.Coordinates
	if len(line) < 2 {
		return
	}
	for i := range line {
		if line[i].Ordinates[0] != line[0].Ordinates[0] || line[i].Ordinates[1] != line[0].Ordinates[1] {
			return
		}
	}
	at := w.enter("geometry")
	if !w.faulted("coordinates") {
		w.faultAt("coordinates", codeNoLength, func() string {
			return "All positions of the line are one point; stations need a line with a length to stand on."
		})
	}
	w.leave(at)
}

// faulted reports whether a fault was collected at a member of the object being read, or below it.
func (w *walk) faulted(member string) bool {
	at := w.enter(member)
	defer w.leave(at)
	return w.faultedBelow()
}

// faultedBelow reports whether a fault was collected at the value being read, or below it.
func (w *walk) faultedBelow() bool {
	for i := range w.faults {
		if rest, below := strings.CutPrefix(w.faults[i].Pointer, string(w.at)); below && (rest == "" || rest[0] == '/') {
			return true
		}
	}
	return false
}
