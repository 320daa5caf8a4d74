package mapping

import (
	"bytes"
	"strconv"
)

// parseNumber reads a decimal number as people and databases write it: 12, -0.5, 1e-3; with the given decimal mark. What Go
// would take beyond that (hexadecimal, infinity) is none.
func parseNumber(text []byte, mark byte) (float64, bool) {
	if len(text) == 0 || len(text) > 128 {
		return 0, false
	}
	digits := false
	for _, c := range text {
		switch {
		case '0' <= c && c <= '9':
			digits = true
		case c == mark, c == '-', c == '+', c == 'e', c == 'E':
		default:
			return 0, false
		}
	}
	if !digits {
		return 0, false
	}
	if mark != '.' {
		text = bytes.Replace(text, []byte{mark}, []byte{'.'}, 1)
	}
	v, err := strconv.ParseFloat(string(text), 64)
	return v, err == nil
}
