package wire

import (
	"math"
	"strconv"
)

// appendNumber appends the shortest JSON number that reads back as the same float64, in the form of RFC 8785 (that of
// ECMAScript); null for NaN and the infinities, 0 for -0.
func appendNumber(dst []byte, v float64) []byte {
	size := math.Abs(v)
	switch {
	case size == 0:
		return append(dst, '0')
	case !(size <= math.MaxFloat64):
		return append(dst, "null"...)
	case size < 1e-6 || size >= 1e21:
		start := len(dst)
		dst = strconv.AppendFloat(dst, v, 'e', -1, 64)
		return append(dst[:start], trimExponent(dst[start:])...)
	}
	return strconv.AppendFloat(dst, v, 'f', -1, 64)
}

// AppendNumber appends a number as answers write it: see appendNumber.
func AppendNumber(dst []byte, v float64) []byte { return appendNumber(dst, v) }

// trimExponent takes the leading zero out of an exponent of two digits, in place: 1e-09 becomes 1e-9.
func trimExponent(number []byte) []byte {
	n := len(number)
	if n >= 4 && number[n-4] == 'e' && number[n-2] == '0' {
		number[n-2] = number[n-1]
		number = number[:n-1]
	}
	return number
}
