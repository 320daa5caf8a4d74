package wire

import "strconv"

// outOfRange is the fault of a number in SI that breaks its bounds, told in a system of units.
func (f *field) outOfRange(at pointer, column int, value float64, system System) Fault {
	b := &f.bounds[column]
	code := codeOutOfRange
	if value <= 0 && b.least > 0 {
		code = codeNotPositive
	}
	q := f.quantity[column]
	what := f.name
	if len(f.bounds) > 1 || f.shape == shapePositions {
		what = "This number"
	} else if f.shape == shapeNumbers || f.shape == shapeNamed {
		what = "Every number of " + f.name
	}
	shown := inUnits(value, q, system)
	detail := what + " must be " + b.text(q, system) + withUnit(q, system) + ", not " + shown + "."
	switch {
	case isNoData(shown):
		detail += " Leave an unknown number out or give null."
	case f.name == "greatest_fill":
		detail += " A fill of 80 % is 0.8."
	case f.name == "bed_slope":
		detail += " A fall of 2 % or 20 in 1000 is 0.02."
	}
	return Fault{Pointer: string(at), Code: code, Detail: detail}
}

// text tells what the bounds accept.
func (b *bounds) text(q Quantity, system System) string {
	least, greatest := inUnits(b.least, q, system), inUnits(b.greatest, q, system)
	text := "from " + least + " to " + greatest
	if b.open {
		text = "greater than " + least + " and less than " + greatest
	}
	if b.floor != 0 {
		text += " (0, or at least " + inUnits(b.floor, q, system) + " in size)"
	}
	return text
}

func withUnit(q Quantity, system System) string {
	if unit := system.Unit(q); unit != "" {
		return " " + unit
	}
	return ""
}

// inUnits tells a value in SI in a system of units, to the digits that people read.
func inUnits(value float64, q Quantity, system System) string {
	if q == Dimensionless && value == float64(int64(value)) {
		return strconv.FormatFloat(value, 'f', -1, 64)
	}
	digits := 6
	if system == SI {
		digits = 12
	}
	return string(trimExponent(strconv.AppendFloat(nil, system.FromSI(q, value), 'g', digits, 64)))
}

func tooFewText(f *field) string {
	items := " items"
	if f.least == 1 {
		items = " item"
	}
	return f.name + " must have at least " + strconv.Itoa(f.least) + items + "."
}
