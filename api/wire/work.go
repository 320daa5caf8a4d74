package wire

import "fmt"

// What parts of a solve cost, in units of work. They come from the times of requests of many sizes: searches for depths go through every band of a
// surveyed section, so they take time by its points; a state at a known depth does not.
const (
	sectionWork  = 12 // of one search in a section with a formula; a point or a row adds 1
	depthsWork   = 4  // searches for the characteristic depths at one discharge
	reachWork    = 10 // searches for one reach
	stationWork  = 24 // searches for one surveyed station and the interval below it
	reportedWork = 2  // units for one place that is reported
)

// work is what one search for a depth in the section costs.
func (s *Section) work() float64 { return float64(sectionWork + len(s.Points) + len(s.Rows)) }

func (r *SectionRequest) work() (float64, string) {
	return r.Section.work() + float64(len(r.Depths)), "depths"
}

func (r *DepthsRequest) work() (float64, string) {
	return depthsWork * r.Section.work(), "section"
}

func (r *RatingRequest) work() (float64, string) {
	if r.Discharges == nil {
		return r.Section.work() + float64(r.Count.Value), "count"
	}
	return float64(len(r.Discharges)) * r.Section.work(), "discharges"
}

func (r *AppraisalRequest) work() (float64, string) {
	return float64(len(r.Flows)) * depthsWork * r.Section.work(), "flows"
}

func (r *ProfileRequest) work() (units float64, member string) {
	member = "reaches"
	for i := range r.Reaches {
		units += reachWork * r.Reaches[i].Section.work()
	}
	if r.Stations != nil {
		member = "stations"
	}
	for i := range r.Stations {
		units += stationWork * r.Stations[i].Section.work()
	}
	reported := float64(len(r.Report.At))
	if spacing := r.Report.Spacing; spacing.Given {
		length, _ := r.Run()
		reported = length / spacing.Value
	}
	if reported *= reportedWork; reported > units {
		member = "report"
	}
	return units + reported, member
}

// tooMuchWork is the problem of a request whose estimated work is beyond the limit, or nil.
func tooMuchWork(r Request, limits *Limits) *Problem {
	units, member := r.work()
	if limits.Work == 0 || units <= float64(limits.Work) {
		return nil
	}
	return TooLarge(Fault{Pointer: "/" + member, Code: codeTooMuchWork, Detail: fmt.Sprintf(
		"The work of this request is estimated at %.0f units, more than %d, the limit `work` of this service (GET /v1/limits); parts of it, one after another, are accepted.", units, limits.Work)})
}
