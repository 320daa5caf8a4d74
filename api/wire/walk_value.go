package wire

import (
	"bytes"
	"math"
	"reflect"
	"slices"
	"strconv"
	"unicode/utf8"

	"github.com/go-json-experiment/json"
	"github.com/go-json-experiment/json/jsontext"
)

func jsontextOptions() jsontext.Options {
	return json.JoinOptions(jsontext.AllowDuplicateNames(true), jsontext.AllowInvalidUTF8(true))
}

// greatestWhole bounds whole numbers so that they fit an int everywhere.
const greatestWhole = 1_000_000_000

// value reads the value of a member, which is not null, into its field of a struct.
// A field whose value cannot be read is left as given, so that it does not count as missing too.
func (w *walk) value(f *field, v reflect.Value) {
	switch f.shape {
	case shapeNumber:
		n := v.Addr().Interface().(*Number)
		n.Value, n.Given = w.number(f, 0), true
	case shapeWhole:
		n := v.Addr().Interface().(*Whole)
		n.Value, n.Given = w.whole(f), true
	case shapeBool:
		v.SetBool(w.boolean())
	case shapeName:
		v.SetString(w.name(f))
	case shapeID:
		*v.Addr().Interface().(*ID) = w.id()
	case shapeNumbers:
		*v.Addr().Interface().(*[]float64) = w.list(f)
	case shapePairs:
		*v.Addr().Interface().(*[][2]float64) = w.pairList(f)
	case shapeRows:
		*v.Addr().Interface().(*[][4]float64) = w.rowList(f)
	case shapePair:
		w.pair(f, v.Addr().Interface().(*Pair))
	case shapePositions:
		*v.Addr().Interface().(*[]Position) = w.positions(f)
	case shapeNamed:
		*v.Addr().Interface().(*[]NamedNumber) = w.named(f)
	case shapeTexts:
		*v.Addr().Interface().(*[]string) = w.texts(f)
	case shapeRaw:
		*v.Addr().Interface().(*Raw) = w.next()
	case shapeObject:
		w.object(f.sub, v)
	case shapeObjects:
		w.objects(f, v)
	}
}

// number reads a number in the units in force and returns it in SI.
func (w *walk) number(f *field, column int) float64 {
	if w.decoder.PeekKind() != '0' {
		w.wrongType("a number")
		return 0
	}
	raw := w.next()
	v, err := strconv.ParseFloat(string(raw), 64)
	if err != nil { // cannot be: the scanner has bounded it
		w.broken()
		return 0
	}
	v = w.system.ToSI(f.quantity[column], v) + 0 // -0 becomes 0
	if !w.collect && !f.bounds[column].holds(v) {
		w.failed = true
	}
	return v
}

// whole reads a whole number, however it is written: 3, 3.0 and 0.3e1 are one.
func (w *walk) whole(f *field) int {
	if w.decoder.PeekKind() != '0' {
		w.wrongType("a whole number")
		return 0
	}
	raw := w.next()
	v, err := strconv.ParseFloat(string(raw), 64)
	if err != nil {
		w.broken()
		return 0
	}
	if v != math.Trunc(v) {
		w.fault(codeNotWhole, func() string { return f.name + " must be a whole number, not " + clip(string(raw)) + "." })
		return 0
	}
	n := int(max(-2*greatestWhole, min(2*greatestWhole, v)))
	if !w.collect && !f.bounds[0].holds(float64(n)) {
		w.failed = true
	}
	if f.limit != "" {
		if limit := w.limits.named(f.limit); n > limit {
			w.size = true
			w.fault(codeTooManyItems, func() string {
				return f.name + " is " + clip(string(raw)) + ", but may be at most " + strconv.Itoa(limit) + ", the limit `" + f.limit + "` of this service (GET /v1/limits)."
			})
		}
	}
	return n
}

func (w *walk) boolean() bool {
	switch w.decoder.PeekKind() {
	case 't':
		w.skip()
		return true
	case 'f':
		w.skip()
	default:
		w.wrongType("true or false")
	}
	return false
}

// name reads a string that is one of an enumeration.
func (w *walk) name(f *field) string {
	if w.decoder.PeekKind() != '"' {
		w.wrongType("a string: one of " + quotedList(f.enum))
		return ""
	}
	raw := w.next()
	if len(raw) < 2 {
		return ""
	}
	for _, name := range f.enum {
		if string(raw[1:len(raw)-1]) == name {
			return name
		}
	}
	// An escaped spelling of a name is that name.
	given, _ := jsontext.AppendUnquote(nil, raw)
	if i := slices.Index(f.enum, string(given)); i >= 0 {
		return f.enum[i]
	}
	w.fault(codeUnknownValue, func() string { return unknownValueText(f, string(given)) })
	return ""
}

// id reads an id as it stands.
func (w *walk) id() ID {
	switch w.decoder.PeekKind() {
	case '0':
		return ID(w.next())
	case '"':
		raw := w.next()
		if len(raw) > MaxIDCharacters+2 && characters(raw) > MaxIDCharacters {
			w.fault(codeTooLong, func() string { return "An id may have at most 256 characters." })
			return nil
		}
		return ID(raw)
	}
	w.wrongType("a string or a number")
	return nil
}

// characters counts the characters of a checked string, quotes included in what is given but not in the count.
func characters(quoted []byte) int {
	if bytes.IndexByte(quoted, '\\') < 0 {
		return utf8.RuneCount(quoted) - 2
	}
	plain, _ := jsontext.AppendUnquote(nil, quoted)
	return utf8.RuneCount(plain)
}

// objects reads a list of objects into an empty one.
func (w *walk) objects(f *field, v reflect.Value) {
	v.Grow(4) // no nil, even if empty
	if !w.openList(f) {
		return
	}
	for i := 0; !w.stop() && w.decoder.PeekKind() != ']'; i++ {
		at := w.enterItem(i)
		if i == v.Cap() {
			v.Grow(i)
		}
		v.SetLen(i + 1)
		w.object(f.sub, v.Index(i))
		w.leave(at)
	}
	w.closeList(f, v.Len())
}
