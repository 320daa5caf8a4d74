package record

import (
	"encoding/json"
	"math"
	"strconv"
	"strings"
	"sync"

	"leat/api/wire"
)

type column struct {
	member string
	at     int
}

// quantities tells what each member measures.
var quantities = sync.OnceValue(func() map[column]wire.Quantity {
	out := map[column]wire.Quantity{}
	for _, u := range wire.MemberUnits() {
		out[column{u.Member, u.Column}] = u.Quantity
	}
	return out
})

// quantityOf returns what a member, or a column of its tuples, measures; at is -1 for a plain number.
func quantityOf(member string, at int) (wire.Quantity, bool) {
	q, ok := quantities()[column{member, at}]
	return q, ok && q != wire.QuantityTold
}

var powers = strings.NewReplacer("m2", "m²", "m3", "m³", "ft2", "ft²", "ft3", "ft³", "s2", "s²", ".", "·")

// unit returns the unit of a member as people write it.
func unit(system wire.System, member string, at int) string {
	q, ok := quantityOf(member, at)
	if !ok {
		return ""
	}
	return powers.Replace(system.Unit(q))
}

// shown returns a number with six significant digits, with three decimals at least where it is a thousand or more.
func shown(v float64) string {
	if size := math.Abs(v); size >= 1000 && size < 1e6 && v == math.Trunc(v) {
		return strconv.FormatFloat(v, 'f', 0, 64)
	} else if size >= 1000 && size < 1e9 {
		return strconv.FormatFloat(v, 'f', 3, 64)
	}
	return strconv.FormatFloat(v, 'g', 6, 64)
}

// shownLiteral is shown of a literal.
func shownLiteral(literal json.Number) string {
	v, err := literal.Float64()
	if err != nil {
		return literal.String()
	}
	return shown(v)
}
