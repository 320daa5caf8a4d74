package wire

import (
	"fmt"
	"strconv"
	"strings"
)

// bounds are the rules that a validate tag says of one number, in SI.
type bounds struct {
	least, greatest float64
	open            bool    // least and greatest themselves are out
	floor           float64 // the least size of a number that is not 0
	none            bool    // no bounds at all
}

// holds reports whether a value keeps the bounds.
func (b *bounds) holds(v float64) bool {
	if b.none {
		return true
	}
	if b.open && (v <= b.least || v >= b.greatest) {
		return false
	}
	return v >= b.least && v <= b.greatest && (v >= b.floor || v <= -b.floor || v == 0)
}

// rules reads a validate tag into the field and reports whether it requires the member. The tags understood are those that
// Check has the validator apply, so that both judge by one text.
func (f *field) rules(tag string) (required bool) {
	b := bounds{none: true}
	within := func(parameter string) float64 {
		v, err := strconv.ParseFloat(parameter, 64)
		if err != nil {
			panic(fmt.Sprintf("wire: %s: %q in a validate tag is no number", f.name, parameter))
		}
		return v
	}
	var hasLeast, hasGreatest bool
	for _, rule := range strings.Split(tag, ",") {
		name, parameter, _ := strings.Cut(rule, "=")
		switch name {
		case "", "omitempty", "dive":
		case "required":
			required = true
		case "oneof":
			f.enum = strings.Fields(parameter)
		case "min":
			f.least = int(within(parameter))
		case "gte", "gt":
			b.least, b.none, b.open, hasLeast = within(parameter), false, name == "gt", true
		case "lte", "lt":
			b.greatest, hasGreatest = within(parameter), true
			if b.open != (name == "lt") {
				panic("wire: " + f.name + ": gt goes with lt, gte with lte")
			}
		case "floor":
			b.floor = within(parameter)
		case "columns", "named", "ordinates":
			f.bounds = columnBounds(parameter)
		default:
			panic(fmt.Sprintf("wire: %s: unknown rule %q in a validate tag", f.name, rule))
		}
	}
	if hasLeast && !hasGreatest && f.shape == shapeWhole {
		b.greatest = greatestWhole
		hasGreatest = true
	}
	if hasLeast != hasGreatest {
		panic("wire: " + f.name + ": a bound on one side only")
	}
	if f.bounds == nil {
		f.bounds = []bounds{b}
	}
	if columns := f.columns(); f.shape != shapeObject && f.shape != shapeObjects && (len(f.bounds) != columns || len(f.quantity) != columns) {
		panic("wire: " + f.name + ": quantity or bounds do not fit its columns")
	}
	return required
}

// columnBounds reads the parameter of the rules columns and named: least:greatest, for each column.
func columnBounds(parameter string) []bounds {
	var out []bounds
	for _, column := range strings.Fields(parameter) {
		from, to, _ := strings.Cut(column, ":")
		least, err := strconv.ParseFloat(from, 64)
		if err == nil {
			var greatest float64
			if greatest, err = strconv.ParseFloat(to, 64); err == nil {
				out = append(out, bounds{least: least, greatest: greatest})
			}
		}
		if err != nil {
			panic("wire: bad columns " + parameter)
		}
	}
	return out
}
