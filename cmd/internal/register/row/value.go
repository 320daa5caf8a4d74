// Package row holds what travels between registers and the mapping: typed values, columns, and pages of rows whose memory is used again and again.
package row

import (
	"bytes"
	"cmp"
	"math"
	"strconv"
	"time"
)

// A Kind is the type of a value or of a column.
type Kind uint8

// The kinds. A column of a database whose own type is none of these is Text, in the database's own spelling.
const (
	Null  Kind = iota // no value; as a column's kind: untyped, any value may come
	Int               // int64
	Float             // float64, NaN and infinities included
	Bool              //
	Text              // UTF-8
	Bytes             // a blob, a geometry
	Time              // a moment, in microseconds since 1970 UTC
)

var kindNames = [...]string{"any", "whole number", "number", "true or false", "text", "bytes", "time"}

func (k Kind) String() string { return kindNames[k] }

// A Value is one cell. The zero Value is null. The bytes of texts and blobs belong to the page (or whoever made the value)
// and live as long as that says.
type Value struct {
	Kind  Kind
	bits  uint64
	bytes []byte
}

// OfInt returns a whole number.
func OfInt(v int64) Value { return Value{Kind: Int, bits: uint64(v)} }

// OfFloat returns a number.
func OfFloat(v float64) Value { return Value{Kind: Float, bits: math.Float64bits(v)} }

// OfBool returns a truth value.
func OfBool(v bool) Value {
	if v {
		return Value{Kind: Bool, bits: 1}
	}
	return Value{Kind: Bool}
}

// OfText returns a text that shares the bytes given.
func OfText(v []byte) Value { return Value{Kind: Text, bytes: v} }

// OfString returns a text.
func OfString(v string) Value { return Value{Kind: Text, bytes: []byte(v)} }

// OfBytes returns a blob that shares the bytes given.
func OfBytes(v []byte) Value { return Value{Kind: Bytes, bytes: v} }

// OfTime returns a moment, to the microsecond.
func OfTime(v time.Time) Value { return Value{Kind: Time, bits: uint64(v.UnixMicro())} }

// IsNull reports whether there is no value.
func (v Value) IsNull() bool { return v.Kind == Null }

// Int returns the value of an Int.
func (v Value) Int() int64 { return int64(v.bits) }

// Float returns the value of a Float.
func (v Value) Float() float64 { return math.Float64frombits(v.bits) }

// Bool returns the value of a Bool.
func (v Value) Bool() bool { return v.bits != 0 }

// Bytes returns the bytes of a Text or of Bytes, shared.
func (v Value) Bytes() []byte { return v.bytes }

// Micros returns the microseconds since 1970 of a Time.
func (v Value) Micros() int64 { return int64(v.bits) }

// Time returns the value of a Time, in UTC.
func (v Value) Time() time.Time { return time.UnixMicro(int64(v.bits)).UTC() }

// Clone returns a value that shares nothing.
func (v Value) Clone() Value {
	v.bytes = bytes.Clone(v.bytes)
	return v
}

// Append appends the value as people and programs read it: nothing for null, a number in the shortest form that reads back as the same
// one, with an exponent below 1e-6 and from 1e21 on, a moment as RFC 3339 in UTC.
func (v Value) Append(dst []byte) []byte {
	switch v.Kind {
	case Int:
		return strconv.AppendInt(dst, v.Int(), 10)
	case Float:
		format := byte('f')
		if size := math.Abs(v.Float()); size != 0 && (size < 1e-6 || size >= 1e21) {
			format = 'e'
		}
		return strconv.AppendFloat(dst, v.Float(), format, -1, 64)
	case Bool:
		return strconv.AppendBool(dst, v.Bool())
	case Text, Bytes:
		return append(dst, v.bytes...)
	case Time:
		return v.Time().AppendFormat(dst, "2006-01-02T15:04:05.999999Z07:00")
	}
	return dst
}

func (v Value) String() string { return string(v.Append(nil)) }

// Equal reports whether two values are the same: of one kind, with one content. A whole number and the same number written as a float are not.
func (v Value) Equal(w Value) bool {
	return v.Kind == w.Kind && v.bits == w.bits && bytes.Equal(v.bytes, w.bytes)
}

// Compare orders values of one kind: numbers by size, texts and bytes by their bytes; null first, then by kind.
func (v Value) Compare(w Value) int {
	if v.Kind != w.Kind {
		return cmp.Compare(v.Kind, w.Kind)
	}
	switch v.Kind {
	case Int, Time:
		return cmp.Compare(v.Int(), w.Int())
	case Float:
		return cmp.Compare(v.Float(), w.Float())
	case Bool:
		return cmp.Compare(v.bits, w.bits)
	}
	return bytes.Compare(v.bytes, w.bytes)
}

// A Column is what a table says of one of its columns.
type Column struct {
	Name string
	// Kind of its values; Null where any may come (CSV, GeoJSON).
	Kind Kind
	// Declared is its type as its own table spells it: "double precision".
	Declared string
	// Geometry is how the geometries of this column are coded: "geojson", "geopackage", "ewkb"; empty where it holds none.
	Geometry string
	// Spatial is what its table says of its geometries; nil where it says nothing.
	Spatial *Spatial
}

// Spatial is what a table says of the geometries in one of its columns.
type Spatial struct {
	Type   string // of the simple features standard, in capitals: "LINESTRING", "GEOMETRY"
	Z, M   int    // 0: none has such an ordinate, 1: all have, 2: some have
	System ReferenceSystem
}

// A ReferenceSystem says what coordinates mean.
type ReferenceSystem struct {
	ID           int64  // in its own file or database
	Name         string // for people
	Organization string // "EPSG", "NONE"
	Code         int64  // the organization's number
	Definition   string // well-known text
	Description  string
}
