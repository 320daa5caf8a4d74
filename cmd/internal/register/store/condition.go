package store

import "leat/cmd/internal/register/row"

// A Condition is one demand that a filter makes on a column. A null value meets IsNull only.
type Condition struct {
	Column string
	Op     Op
	// Values are one for comparisons, none for IsNull and NotNull, any number for AnyOf and NoneOf. They are Int, Float, Bool or Text.
	// SQL gets them as parameters, never as text.
	Values []row.Value
}

// An Op is how a condition compares.
type Op uint8

// The comparisons.
const (
	AnyOf Op = iota
	NoneOf
	Above
	AtLeast
	Below
	AtMost
	IsNull
	NotNull
)
