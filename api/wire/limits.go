package wire

// Limits are the sizes of a request that are enforced before any work is done. GET /v1/limits shows the same numbers.
type Limits struct {
	ArrayItems   int // items of any list that has no limit of its own
	Points       int // points of a surveyed section
	Reaches      int // reaches of a profile
	Stations     int // surveyed stations of a profile
	ReportPoints int // places at which a profile reports
	Flows        int // named flows of an appraisal
	Work         int // estimated work of a request, see Request; 0 is no limit
}

// DefaultLimits returns the limits that hold unless an operator sets others.
func DefaultLimits() Limits {
	return Limits{ArrayItems: 10_000, Points: 10_000, Reaches: 10_000, Stations: 10_000, ReportPoints: 50_000, Flows: 100, Work: 10_000_000}
}

// named returns a limit by the name that callers know.
func (l *Limits) named(name string) int {
	switch name {
	case "points":
		return l.Points
	case "reaches":
		return l.Reaches
	case "stations":
		return l.Stations
	case "report_points":
		return l.ReportPoints
	case "flows":
		return l.Flows
	}
	return l.ArrayItems
}

// limitOfList names the limit of a list by the member whose value it is.
func limitOfList(member []byte) string {
	switch string(member) {
	case "points":
		return "points"
	case "reaches":
		return "reaches"
	case "stations":
		return "stations"
	case "at":
		return "report_points"
	}
	if Criterion(member).row() != nil { // flows of a criterion
		return "flows"
	}
	return "array_items"
}
