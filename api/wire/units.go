package wire

// System is a system of units.
type System uint8

const (
	SI System = iota // m, m3/s, ...
	US               // ft, ft3/s, ...
)
