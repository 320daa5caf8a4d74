package wire

// Limits are the sizes of a request that are enforced before any work is done. GET /v1/limits shows the same numbers.
type Limits struct {
	ArrayItems int // items of any list
	Points     int // points of a surveyed section
}

// DefaultLimits returns the limits that hold unless an operator sets others.
func DefaultLimits() Limits { return Limits{ArrayItems: 10_000, Points: 10_000} }

// named returns a limit by the name that callers know.
func (l *Limits) named(name string) int {
	if name == "points" {
		return l.Points
	}
	return l.ArrayItems
}
