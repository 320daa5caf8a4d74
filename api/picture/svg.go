package picture

import (
	"math"
	"strconv"
	"strings"
	"unicode/utf8"
)

// darkStyle sets the colours anew on dark paper. What the attributes say holds for light paper and for readers that know no style.
var darkStyle = func() string {
	var b strings.Builder
	b.WriteString("@media (prefers-color-scheme:dark){")
	for _, p := range pens {
		b.WriteString("." + p.name + "{")
		if p.darkStroke != "" {
			b.WriteString("stroke:" + p.darkStroke + ";")
		}
		if p.darkFill != "" {
			b.WriteString("fill:" + p.darkFill)
		}
		b.WriteString("}")
	}
	b.WriteString("}")
	return b.String()
}()

// appendSVG appends a list as an SVG document.
func appendSVG(dst []byte, l *list) []byte {
	dst = append(dst, `<svg xmlns="http://www.w3.org/2000/svg" width="`...)
	dst = appendCoordinate(dst, l.width)
	dst = append(dst, `" height="`...)
	dst = appendCoordinate(dst, l.height)
	dst = append(dst, `" viewBox="0 0 `...)
	dst = appendCoordinate(dst, l.width)
	dst = appendCoordinate(append(dst, ' '), l.height)
	dst = append(dst, `" role="img" aria-labelledby="title" aria-describedby="description" font-family="system-ui,sans-serif"><title id="title">`...)
	dst = appendEscaped(dst, l.title)
	dst = append(dst, `</title><desc id="description">`...)
	dst = appendEscaped(dst, l.description)
	dst = append(dst, "</desc><style>"...)
	dst = append(dst, darkStyle...)
	dst = append(dst, "</style>\n"...)
	for i := range l.items {
		dst = appendItem(dst, &l.items[i])
	}
	return append(dst, "</svg>\n"...)
}

func appendItem(dst []byte, it *item) []byte {
	p := it.pen
	if it.shape == words {
		dst = append(dst, `<text class="`...)
		dst = append(dst, p.name...)
		dst = append(dst, `" x="`...)
		dst = appendCoordinate(dst, it.points[0].x)
		dst = append(dst, `" y="`...)
		dst = appendCoordinate(dst, it.points[0].y)
		dst = append(dst, `" font-size="`...)
		dst = appendCoordinate(dst, it.size)
		switch it.anchor {
		case middle:
			dst = append(dst, `" text-anchor="middle`...)
		case end:
			dst = append(dst, `" text-anchor="end`...)
		}
		if it.bold {
			dst = append(dst, `" font-weight="600`...)
		}
		dst = append(dst, `" fill="`...)
		dst = append(dst, p.fill...)
		dst = append(dst, `">`...)
		dst = appendEscaped(dst, it.text)
		return append(dst, "</text>\n"...)
	}
	dst = append(dst, `<path class="`...)
	dst = append(dst, p.name...)
	dst = append(dst, `" fill="`...)
	if p.fill == "" || it.shape == open {
		dst = append(dst, "none"...)
	} else {
		dst = append(dst, p.fill...)
	}
	if p.stroke != "" {
		dst = append(dst, `" stroke="`...)
		dst = append(dst, p.stroke...)
		dst = append(dst, `" stroke-width="`...)
		dst = appendCoordinate(dst, p.width)
		dst = append(dst, `" stroke-linejoin="round`...)
		for i, d := range p.dash {
			if i == 0 {
				dst = append(dst, `" stroke-dasharray="`...)
			} else {
				dst = append(dst, ' ')
			}
			dst = appendCoordinate(dst, d)
		}
	}
	dst = append(dst, `" d="`...)
	last := point{math.NaN(), math.NaN()}
	for i, at := range it.points {
		at = point{hundredths(at.x), hundredths(at.y)}
		if at == last && i < len(it.points)-1 {
			continue
		}
		last = at
		switch i {
		case 0:
			dst = append(dst, 'M')
		case 1:
			dst = append(dst, 'L')
		default:
			dst = append(dst, ' ')
		}
		dst = appendCoordinate(dst, at.x)
		dst = appendCoordinate(append(dst, ' '), at.y)
	}
	if it.shape == closed {
		dst = append(dst, 'Z')
	}
	return append(dst, "\"/>\n"...)
}

func hundredths(x float64) float64 { return math.Round(x*100) / 100 }

// appendCoordinate appends a number of units with at most two decimals.
func appendCoordinate(dst []byte, x float64) []byte {
	n := int64(math.Round(x * 100))
	if n < 0 {
		dst = append(dst, '-')
		n = -n
	}
	dst = strconv.AppendInt(dst, n/100, 10)
	if n %= 100; n != 0 {
		dst = append(dst, '.', byte('0'+n/10))
		if n%10 != 0 {
			dst = append(dst, byte('0'+n%10))
		}
	}
	return dst
}

// appendEscaped appends text for XML; what XML cannot hold becomes U+FFFD.
func appendEscaped(dst []byte, text string) []byte {
	for _, r := range text {
		switch {
		case r == '&':
			dst = append(dst, "&amp;"...)
		case r == '<':
			dst = append(dst, "&lt;"...)
		case r == '>':
			dst = append(dst, "&gt;"...)
		case r < ' ' || r == 0xFFFE || r == 0xFFFF || r == utf8.RuneError:
			dst = append(dst, "\uFFFD"...)
		default:
			dst = utf8.AppendRune(dst, r)
		}
	}
	return dst
}
