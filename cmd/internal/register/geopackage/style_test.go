package geopackage

import (
	"math"
	"testing"

	"leat/cmd/internal/geopackage"
)

// Colours that people with the common forms of colour blindness see, by the matrices of F. Viénot, H. Brettel and J. D. Mollon (1999), Digital video
// colourmaps for checking the legibility of displays by dichromats, Color Research and Application 24(4); matrices from memory. Differences by the CIE
// 1976 formula; 20 is common practice for areas and lines that are to be told apart at a glance.
func TestColoursStayApart(t *testing.T) {
	seen := map[string][3][3]float64{
		"as they are":  {{1, 0, 0}, {0, 1, 0}, {0, 0, 1}},
		"protanopia":   {{0.11238, 0.88762, 0}, {0.11238, 0.88762, 0}, {0.00401, -0.00401, 1}},
		"deuteranopia": {{0.29275, 0.70725, 0}, {0.29275, 0.70725, 0}, {-0.02234, 0.02234, 1}},
	}
	colours := []geopackage.Colour{blue, amber, orange, grey}
	for eye, m := range seen {
		for i := range colours {
			for k := range i {
				if d := difference1976(lab(colours[i], m), lab(colours[k], m)); !(d >= 20) {
					t.Errorf("%s: %v and %v differ by %.1f", eye, colours[i], colours[k], d)
				}
			}
		}
	}
}

func difference1976(a, b [3]float64) float64 {
	return math.Sqrt((a[0]-b[0])*(a[0]-b[0]) + (a[1]-b[1])*(a[1]-b[1]) + (a[2]-b[2])*(a[2]-b[2]))
}

// lab gives the CIE 1976 coordinates of a colour (IEC 61966-2-1 for sRGB, white D65) seen through a matrix on linear light.
func lab(c geopackage.Colour, m [3][3]float64) [3]float64 {
	var linear, through, xyz, out [3]float64
	for i, v := range c {
		u := float64(v) / 255
		if linear[i] = u / 12.92; u > 0.04045 {
			linear[i] = math.Pow((u+0.055)/1.055, 2.4)
		}
	}
	for i := range 3 {
		for k := range 3 {
			through[i] += m[i][k] * linear[k]
		}
	}
	white := [3]float64{0.95047, 1, 1.08883}
	for i, r := range [3][3]float64{{0.4124, 0.3576, 0.1805}, {0.2126, 0.7152, 0.0722}, {0.0193, 0.1192, 0.9505}} {
		for k := range 3 {
			xyz[i] += r[k] * through[k] / white[i]
		}
		if xyz[i] > 216.0/24389 {
			out[i] = math.Cbrt(xyz[i])
		} else {
			out[i] = (24389.0/27*xyz[i] + 16) / 116
		}
	}
	return [3]float64{116*out[1] - 16, 500 * (out[0] - out[1]), 200 * (out[1] - out[2])}
}
