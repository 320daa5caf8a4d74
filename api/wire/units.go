package wire

// System is a system of units.
type System uint8

const (
	SI System = iota // m, m3/s, ...
	US               // ft, ft3/s, ...
)

// String returns the name by which requests and answers call the system.
func (s System) String() string {
	if s == US {
		return "us"
	}
	return "si"
}

// SystemNamed returns the system that a name stands for.
func SystemNamed(name string) (System, bool) {
	switch name {
	case "si":
		return SI, true
	case "us":
		return US, true
	}
	return SI, false
}

// ToSI converts a value of this system to SI. Values in SI come through bit for bit.
func (s System) ToSI(q Quantity, value float64) float64 {
	if s == SI {
		return value
	}
	return value * units[q].inSI
}

// FromSI converts a value in SI to this system. Values in SI come through bit for bit.
func (s System) FromSI(q Quantity, value float64) float64 {
	if s == SI {
		return value
	}
	return value / units[q].inSI
}

// Unit returns the unit of a quantity as people write it; empty for a plain number.
func (s System) Unit(q Quantity) string {
	if s == SI {
		return units[q].si
	}
	return units[q].us
}

// UCUM returns the unit's code in the Unified Code for Units of Measure, empty where that has none.
func (s System) UCUM(q Quantity) string {
	if s == SI {
		return units[q].siUCUM
	}
	return units[q].usUCUM
}
