package store

import (
	"bytes"
	"cmp"
	"slices"
	"strconv"
	"strings"

	"leat/cmd/internal/register/row"
)

// Matches reports whether a value meets a condition, for files, which have no database to ask. A text is compared with a number as the number
// that it spells, with the given decimal mark; a text with true or false as t, true, f or false.
func (c *Condition) Matches(v row.Value, decimal byte) bool {
	if v.Kind == row.Text && len(v.Bytes()) == 0 {
		v = row.Value{}
	}
	switch {
	case c.Op == IsNull:
		return v.IsNull()
	case v.IsNull():
		return false
	case c.Op == NotNull:
		return true
	case c.Op == AnyOf:
		return slices.ContainsFunc(c.Values, func(w row.Value) bool { order, ok := compare(v, w, decimal); return ok && order == 0 })
	case c.Op == NoneOf:
		return !slices.ContainsFunc(c.Values, func(w row.Value) bool { order, ok := compare(v, w, decimal); return ok && order == 0 })
	}
	order, ok := compare(v, c.Values[0], decimal)
	if !ok {
		return false
	}
	switch c.Op {
	case Above:
		return order > 0
	case AtLeast:
		return order >= 0
	case Below:
		return order < 0
	}
	return order <= 0
}

// compare orders a cell and a value of a condition; ok is false where they cannot be compared.
func compare(v, w row.Value, decimal byte) (order int, ok bool) {
	switch w.Kind {
	case row.Int, row.Float:
		a, isNumber := number(v, decimal)
		b, _ := number(w, '.')
		return cmp.Compare(a, b), isNumber
	case row.Bool:
		a, isTruth := truth(v)
		order = 0
		if a != w.Bool() {
			order = 1
		}
		return order, isTruth
	}
	return strings.Compare(v.String(), w.String()), true
}

func number(v row.Value, decimal byte) (float64, bool) {
	switch v.Kind {
	case row.Int:
		return float64(v.Int()), true
	case row.Float:
		return v.Float(), true
	case row.Text:
		text := bytes.TrimSpace(v.Bytes())
		if decimal != '.' {
			text = bytes.Replace(text, []byte{decimal}, []byte{'.'}, 1)
		}
		f, err := strconv.ParseFloat(string(text), 64)
		return f, err == nil
	}
	return 0, false
}

func truth(v row.Value) (is, ok bool) {
	switch v.Kind {
	case row.Bool:
		return v.Bool(), true
	case row.Text:
		switch strings.ToLower(v.String()) {
		case "t", "true":
			return true, true
		case "f", "false":
			return false, true
		}
	}
	return false, false
}
