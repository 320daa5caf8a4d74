package wire

// Common holds the members that every request may have.
type Common struct {
	ID    ID     `json:"id"`
	Units string `json:"units" validate:"omitempty,oneof=si us"`

	// Gravity is the acceleration of free fall in m/s2.
	Gravity Number `json:"gravity" quantity:"acceleration" validate:"omitempty,gte=1e-3,lte=1e3"`
	// EnergyCoefficient (alpha) and MomentumCoefficient (beta) cannot be less than 1 by the shape of a velocity profile alone, but
	// are used a little below it where they also correct the pressure of curved flow; hence the wide bounds.
	EnergyCoefficient   Number `json:"energy_coefficient" validate:"omitempty,gte=0.1,lte=100"`
	MomentumCoefficient Number `json:"momentum_coefficient" validate:"omitempty,gte=0.1,lte=100"`

	// System is the system of units in force: that of Units, or of the call where the request names none. Decode sets it.
	System System `json:"-"`
}

func (c *Common) common() *Common { return c }

// work is that of a request whose sizes do not matter.
func (c *Common) work() (units float64, member string) { return 0, "" }

// SectionKind is that of a request without a section.
func (c *Common) SectionKind() Kind { return "" }

// Request is what Decode fills: a pointer to a struct that embeds Common.
type Request interface {
	common() *Common
	// work estimates, from the sizes of a request that keeps all other rules, what its solve costs; one unit is about a microsecond of a
	// processor. It names the member that most of it is due to.
	work() (units float64, member string)
	// SectionKind is the kind of the request's section, or whatever stands in its place where the request breaks that rule.
	SectionKind() Kind
}

// Barrelled holds the member that stands beside every section.
type Barrelled struct {
	// Barrels is the number of equal sections side by side.
	Barrels Whole `json:"barrels" validate:"omitempty,gte=1,lte=100"`
}
