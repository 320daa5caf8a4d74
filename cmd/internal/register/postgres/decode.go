package postgres

import (
	"encoding/binary"
	"fmt"
	"math"
	"strconv"
	"time"

	"leat/cmd/internal/register/row"
)

// A decoder reads the binary form of a value that is not null into a page.
type decoder func(page *row.Page, data []byte) (row.Value, error)

func decodeInt(_ *row.Page, data []byte) (row.Value, error) {
	switch len(data) {
	case 2:
		return row.OfInt(int64(int16(binary.BigEndian.Uint16(data)))), nil
	case 4:
		return row.OfInt(int64(int32(binary.BigEndian.Uint32(data)))), nil
	case 8:
		return row.OfInt(int64(binary.BigEndian.Uint64(data))), nil
	}
	return row.Value{}, wrongLength("a whole number", data)
}

// decodeFloat4 gives the number that the database shows: 0.013, not the nearest to it in 24 bits.
func decodeFloat4(_ *row.Page, data []byte) (row.Value, error) {
	if len(data) != 4 {
		return row.Value{}, wrongLength("a real", data)
	}
	single := float64(math.Float32frombits(binary.BigEndian.Uint32(data)))
	var text [32]byte
	shown, err := strconv.ParseFloat(string(strconv.AppendFloat(text[:0], single, 'g', -1, 32)), 64)
	if err != nil {
		return row.Value{}, err
	}
	return row.OfFloat(shown), nil
}

func decodeFloat8(_ *row.Page, data []byte) (row.Value, error) {
	if len(data) != 8 {
		return row.Value{}, wrongLength("a double precision", data)
	}
	return row.OfFloat(math.Float64frombits(binary.BigEndian.Uint64(data))), nil
}

func decodeBool(_ *row.Page, data []byte) (row.Value, error) {
	if len(data) != 1 {
		return row.Value{}, wrongLength("a boolean", data)
	}
	return row.OfBool(data[0] != 0), nil
}

func decodeText(page *row.Page, data []byte) (row.Value, error) { return page.Text(data), nil }

func decodeBytes(page *row.Page, data []byte) (row.Value, error) { return page.Blob(data), nil }

// epoch is 2000-01-01 UTC, from which the database counts, in microseconds since 1970.
const epoch = 946684800 * 1000000

// Moments before and after all others: how they are coded, and how they are spelled, here as in the database.
const (
	firstMoment, beforeAll = math.MinInt64, "-infinity"
	lastMoment, afterAll   = math.MaxInt64, "infinity"
)

func decodeTime(_ *row.Page, data []byte) (row.Value, error) {
	if len(data) != 8 {
		return row.Value{}, wrongLength("a moment", data)
	}
	switch micros := int64(binary.BigEndian.Uint64(data)); micros {
	case firstMoment:
		return row.OfString(beforeAll), nil
	case lastMoment:
		return row.OfString(afterAll), nil
	default:
		return row.OfTime(time.UnixMicro(micros + epoch)), nil
	}
}

// decodeNumeric gives the nearest float64; NaN and the infinities stay what they are.
func decodeNumeric(_ *row.Page, data []byte) (row.Value, error) {
	var space [64]byte
	text, err := appendNumeric(space[:0], data)
	if err != nil {
		return row.Value{}, err
	}
	number, err := strconv.ParseFloat(string(text), 64)
	if err != nil && !math.IsInf(number, 0) { // out of range is infinite, which no member accepts
		return row.Value{}, err
	}
	return row.OfFloat(number), nil
}

func decodeWholeNumeric(page *row.Page, data []byte) (row.Value, error) {
	var space [64]byte
	text, err := appendNumeric(space[:0], data)
	if err != nil {
		return row.Value{}, err
	}
	number, err := strconv.ParseInt(string(text), 10, 64)
	if err != nil { // NaN
		return decodeNumeric(page, data)
	}
	return row.OfInt(number), nil
}

// appendNumeric appends the decimal spelling of a numeric: digits to the base 10000, the weight of the first, a sign.
func appendNumeric(dst, data []byte) ([]byte, error) {
	if len(data) < 8 || len(data) != 8+2*int(binary.BigEndian.Uint16(data)) {
		return nil, wrongLength("a numeric", data)
	}
	count, weight := int(binary.BigEndian.Uint16(data)), int(int16(binary.BigEndian.Uint16(data[2:])))
	switch binary.BigEndian.Uint16(data[4:]) {
	case 0x0000:
	case 0x4000:
		dst = append(dst, '-')
	case 0xC000:
		return append(dst, "NaN"...), nil
	case 0xD000:
		return append(dst, "Inf"...), nil
	case 0xF000:
		return append(dst, "-Inf"...), nil
	default:
		return nil, fmt.Errorf("a numeric with a sign that is not known")
	}
	digits := data[8:]
	group := func(i int) uint16 {
		if i < count {
			return binary.BigEndian.Uint16(digits[2*i:])
		}
		return 0
	}
	appendGroup := func(dst []byte, v uint16) []byte {
		return append(dst, byte('0'+v/1000%10), byte('0'+v/100%10), byte('0'+v/10%10), byte('0'+v%10))
	}
	if weight < 0 {
		dst = append(dst, '0')
	} else {
		dst = strconv.AppendUint(dst, uint64(group(0)), 10)
		for i := 1; i <= weight; i++ {
			dst = appendGroup(dst, group(i))
		}
	}
	if count > weight+1 {
		dst = append(dst, '.')
		for range -1 - weight {
			dst = append(dst, "0000"...)
		}
		for i := max(weight+1, 0); i < count; i++ {
			dst = appendGroup(dst, group(i))
		}
	}
	return dst, nil
}

func wrongLength(what string, data []byte) error {
	return fmt.Errorf("%s of %d bytes came from the database", what, len(data))
}
