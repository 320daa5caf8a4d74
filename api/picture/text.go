package picture

import (
	"math"
	"strconv"
	"strings"
	"sync"

	"golang.org/x/image/font"
	"golang.org/x/image/font/gofont/gobold"
	"golang.org/x/image/font/gofont/goregular"
	"golang.org/x/image/font/sfnt"
	"golang.org/x/image/math/fixed"

	"leat/api/wire"
)

// fonts are the two weights of the Go font. They come with the module and can be parsed.
var fonts = sync.OnceValue(func() [2]*sfnt.Font {
	var out [2]*sfnt.Font
	for i, data := range [][]byte{goregular.TTF, gobold.TTF} {
		f, err := sfnt.Parse(data)
		if err != nil {
			panic(err)
		}
		out[i] = f
	}
	return out
})

// advances are the widths of the first characters of the regular font, in thousandths of its size.
var advances = sync.OnceValue(func() [256]float64 {
	var out [256]float64
	var b sfnt.Buffer
	f := fonts()[0]
	for r := range out {
		out[r] = 600
		if glyph, err := f.GlyphIndex(&b, rune(r)); err == nil && glyph != 0 {
			if a, err := f.GlyphAdvance(&b, glyph, fixed.I(1000), font.HintingNone); err == nil {
				out[r] = float64(a) / 64
			}
		}
	}
	return out
})

// spare is by how much the sans serif fonts of viewers may be wider than the Go font.
const spare = 1.17

// wide returns the width that a text may take in any viewer.
func wide(text string, size float64) float64 {
	table, sum := advances(), 0.0
	for _, r := range text {
		if int(r) < len(table) {
			sum += table[r]
		} else {
			sum += 1000
		}
	}
	return sum * size / 1000 * spare
}

// cut shortens a text to a width, with an ellipsis where something is left out.
func cut(text string, size, width float64) string {
	if wide(text, size) <= width {
		return text
	}
	runes := []rune(text)
	for n := len(runes) - 1; n > 0; n-- {
		if short := strings.TrimRight(string(runes[:n]), " ") + "…"; wide(short, size) <= width {
			return short
		}
	}
	return ""
}

// number tells a number to four digits.
func number(x float64) string {
	if math.IsNaN(x) {
		return "not known"
	}
	text := strconv.FormatFloat(x, 'g', 4, 64)
	if mantissa, exponent, big := strings.Cut(text, "e"); big {
		if e, _ := strconv.Atoi(exponent); e > 0 && e < 9 {
			return strconv.FormatFloat(math.Round(x), 'f', -1, 64)
		}
		return mantissa + "e" + exponent
	}
	return text
}

// unitText is a unit with raised powers.
func unitText(units wire.System, q wire.Quantity) string { return powers.Replace(units.Unit(q)) }

var powers = strings.NewReplacer("m2", "m²", "m3", "m³", "ft2", "ft²", "ft3", "ft³")

// told is a value in SI in the units of the request.
func told(units wire.System, q wire.Quantity, value float64) string {
	text := number(units.FromSI(q, value))
	if unit := unitText(units, q); unit != "" && !math.IsNaN(value) {
		text += " " + unit
	}
	return text
}

// spoken is the name of a member as words.
func spoken(name string) string { return strings.ReplaceAll(name, "_", " ") }

// upperFirst begins a text with a capital.
func upperFirst(text string) string {
	if text == "" {
		return ""
	}
	return strings.ToUpper(text[:1]) + text[1:]
}

// lines parts a text at its spaces into lines of a width.
func lines(text string, size, width float64) []string {
	var out []string
	line := ""
	for word := range strings.FieldsSeq(text) {
		switch {
		case line == "":
			line = word
		case wide(line+" "+word, size) <= width:
			line += " " + word
		default:
			out, line = append(out, line), word
		}
	}
	return append(out, line)
}
