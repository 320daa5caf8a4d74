package demo

import (
	"fmt"
	"math"
	"math/rand/v2"
	"strconv"
	"strings"
)

// A pen draws sizes and writes them in the units of the asset's parish.
type pen struct {
	*rand.Rand
	parish parish
}

const foot = 0.3048 // m, exact

// between draws evenly from [low, high).
func (p *pen) between(low, high float64) float64 { return low + (high-low)*p.Float64() }

// chance reports true in percent of a hundred cases.
func (p *pen) chance(percent int) bool { return p.IntN(100) < percent }

// pick draws one of the values.
func (p *pen) pick(values ...float64) float64 { return values[p.IntN(len(values))] }

// pickText draws one of the texts.
func (p *pen) pickText(texts ...string) string { return texts[p.IntN(len(texts))] }

// size rounds a length in metres to what a drawing would say, in metres: steps of step, or of a quarter foot (a twentieth of a
// foot below one foot) where drawings are in feet.
func (p *pen) size(metres, step float64) float64 {
	if p.parish.feet {
		step = 0.25 * foot
		if metres < foot {
			step = 0.05 * foot
		}
	}
	return max(1, math.Round(metres/step)) * step
}

// length writes a length in metres in the asset's units, to the millimetre or the hundredth of a foot.
func (p *pen) length(metres float64) string {
	if p.parish.feet {
		return fixed(metres/foot, 2)
	}
	return fixed(metres, 3)
}

// roughnessHeight writes a sand roughness in metres in the asset's units, to two digits.
func (p *pen) roughnessHeight(metres float64) string {
	if p.parish.feet {
		return digits(metres/foot, 2)
	}
	return digits(metres, 2)
}

// chezy writes a Chezy coefficient in m^(1/2)/s in the asset's units, as a whole number.
func (p *pen) chezy(c float64) string {
	if p.parish.feet {
		c /= math.Sqrt(foot)
	}
	return fixed(c, 0)
}

// discharge writes a discharge in m3/s in the asset's units, to three digits.
func (p *pen) discharge(q float64) string {
	if p.parish.feet {
		return digits(q/(foot*foot*foot), 3)
	}
	return digits(q, 3)
}

// area writes an area in m2 in the asset's units.
func (p *pen) area(a float64) string {
	if p.parish.feet {
		return fixed(a/(foot*foot), 2)
	}
	return fixed(a, 3)
}

// fixed writes a number with at most so many decimals and no trailing zeros.
func fixed(x float64, decimals int) string {
	s := strconv.FormatFloat(x, 'f', decimals, 64)
	if strings.Contains(s, ".") {
		s = strings.TrimRight(strings.TrimRight(s, "0"), ".")
	}
	if s == "-0" {
		return "0"
	}
	return s
}

// digits writes a number rounded to so many significant digits, without an exponent.
func digits(x float64, n int) string {
	rounded, _ := strconv.ParseFloat(strconv.FormatFloat(x, 'e', n-1, 64), 64)
	return strconv.FormatFloat(rounded, 'f', -1, 64)
}

// object writes a JSON object from names and values in turn; a value is JSON text, and an empty one leaves its member out.
func object(pairs ...string) string {
	var b strings.Builder
	b.WriteByte('{')
	for i := 0; i < len(pairs); i += 2 {
		if pairs[i+1] == "" {
			continue
		}
		if b.Len() > 1 {
			b.WriteByte(',')
		}
		fmt.Fprintf(&b, "%q:%s", pairs[i], pairs[i+1])
	}
	b.WriteByte('}')
	return b.String()
}

// list writes a JSON array of JSON texts.
func list(items ...string) string { return "[" + strings.Join(items, ",") + "]" }
