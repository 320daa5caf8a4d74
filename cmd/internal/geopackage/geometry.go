package geopackage

import (
	"encoding/binary"
	"errors"
	"fmt"
	"math"
)

// Geometry is what the header of a geometry in a GeoPackage says, with the rectangle that the geometry lies in.
type Geometry struct {
	SRS      int64
	Empty    bool
	Envelope Envelope // where not empty
	Body     []byte   // the WKB, a part of what was read
}

// Envelope is a rectangle in the coordinates of its layer.
type Envelope struct{ MinX, MaxX, MinY, MaxY float64 }

// nothing is the envelope that any other enlarges.
var nothing = Envelope{math.Inf(1), math.Inf(-1), math.Inf(1), math.Inf(-1)}

// Join returns the smallest rectangle around both.
func (e Envelope) Join(o Envelope) Envelope {
	return Envelope{min(e.MinX, o.MinX), max(e.MaxX, o.MaxX), min(e.MinY, o.MinY), max(e.MaxY, o.MaxY)}
}

// envelopeBytes is the length of the header's envelope by its indicator code (table gpb_spec of the standard).
var envelopeBytes = []int{0, 32, 48, 48, 64}

var errGeometry = errors.New("this is no geometry of a GeoPackage")

// ReadGeometry reads a geometry of a GeoPackage (clause 2.1.3). Its envelope is the header's where there is one, else that of the points.
func ReadGeometry(blob []byte) (Geometry, error) {
	if len(blob) < 8 || blob[0] != 'G' || blob[1] != 'P' {
		return Geometry{}, fmt.Errorf("%w: it does not begin with GP", errGeometry)
	}
	flags := blob[3]
	var order binary.ByteOrder = binary.BigEndian
	if flags&1 != 0 {
		order = binary.LittleEndian
	}
	code := int(flags >> 1 & 7)
	if code >= len(envelopeBytes) || len(blob) < 8+envelopeBytes[code] {
		return Geometry{}, fmt.Errorf("%w: its envelope is cut or of an unknown kind", errGeometry)
	}
	g := Geometry{SRS: int64(int32(order.Uint32(blob[4:]))), Empty: flags&16 != 0, Body: blob[8+envelopeBytes[code]:]}
	if g.Empty || flags&32 != 0 { // of an extended type only the envelope can be known
		if code == 0 {
			g.Empty = true
		}
	}
	if g.Empty {
		return g, nil
	}
	if code != 0 {
		at := func(i int) float64 { return math.Float64frombits(order.Uint64(blob[8+8*i:])) }
		g.Envelope = Envelope{at(0), at(1), at(2), at(3)}
		g.Empty = math.IsNaN(g.Envelope.MinX)
		return g, nil
	}
	w := wkb{rest: g.Body, envelope: nothing}
	if err := w.geometry(0); err != nil {
		return Geometry{}, err
	}
	g.Envelope, g.Empty = w.envelope, w.envelope == nothing
	return g, nil
}

// wkb walks through well-known binary (ISO 13249-3) and gathers the envelope of its points.
type wkb struct {
	rest     []byte
	envelope Envelope
}

// nesting bounds collections within collections.
const nesting = 16

func (w *wkb) geometry(depth int) error {
	if depth > nesting || len(w.rest) < 5 {
		return fmt.Errorf("%w: its WKB is cut or nested too deeply", errGeometry)
	}
	var order binary.ByteOrder = binary.BigEndian
	if w.rest[0] == 1 {
		order = binary.LittleEndian
	}
	kind := order.Uint32(w.rest[1:])
	w.rest = w.rest[5:]
	ordinates := 2
	switch kind / 1000 {
	case 1, 2:
		ordinates = 3
	case 3:
		ordinates = 4
	}
	switch kind % 1000 {
	case 1: // point
		return w.points(order, 1, ordinates)
	case 2, 8: // line, arcs
		return w.run(order, ordinates)
	case 3: // polygon: rings
		return w.each(order, func() error { return w.run(order, ordinates) })
	case 4, 5, 6, 7, 9, 10, 11, 12: // collections of geometries
		return w.each(order, func() error { return w.geometry(depth + 1) })
	}
	return fmt.Errorf("%w: the standard has no type %d of WKB", errGeometry, kind)
}

// count reads how many things follow.
func (w *wkb) count(order binary.ByteOrder) (int, error) {
	if len(w.rest) < 4 {
		return 0, fmt.Errorf("%w: its WKB is cut", errGeometry)
	}
	n := order.Uint32(w.rest)
	w.rest = w.rest[4:]
	if uint64(n) > uint64(len(w.rest)) { // each of them takes more than a byte
		return 0, fmt.Errorf("%w: its WKB is cut", errGeometry)
	}
	return int(n), nil
}

func (w *wkb) each(order binary.ByteOrder, one func() error) error {
	n, err := w.count(order)
	for range n {
		if err == nil {
			err = one()
		}
	}
	return err
}

func (w *wkb) run(order binary.ByteOrder, ordinates int) error {
	n, err := w.count(order)
	if err != nil {
		return err
	}
	return w.points(order, n, ordinates)
}

func (w *wkb) points(order binary.ByteOrder, n, ordinates int) error {
	if len(w.rest) < 8*n*ordinates {
		return fmt.Errorf("%w: its WKB is cut", errGeometry)
	}
	for range n {
		x, y := math.Float64frombits(order.Uint64(w.rest)), math.Float64frombits(order.Uint64(w.rest[8:]))
		if !math.IsNaN(x) && !math.IsNaN(y) { // an empty point is written as NaN
			w.envelope = w.envelope.Join(Envelope{x, x, y, y})
		}
		w.rest = w.rest[8*ordinates:]
	}
	return nil
}

// A Point has a place, a height and a measure.
type Point struct{ X, Y, Z, M float64 }

// Line writes a LineString as a geometry of a GeoPackage, little-endian, with the envelope of x and y; with z and with m as asked.
func Line(srs int64, points []Point, z, m bool) []byte {
	envelope := nothing
	for _, p := range points {
		envelope = envelope.Join(Envelope{p.X, p.X, p.Y, p.Y})
	}
	le := binary.LittleEndian
	out := []byte{'G', 'P', 0, 1<<1 | 1}
	out = le.AppendUint32(out, uint32(int32(srs)))
	for _, v := range []float64{envelope.MinX, envelope.MaxX, envelope.MinY, envelope.MaxY} {
		out = le.AppendUint64(out, math.Float64bits(v))
	}
	kind := uint32(2)
	if z {
		kind += 1000
	}
	if m {
		kind += 2000
	}
	out = le.AppendUint32(append(out, 1), kind)
	out = le.AppendUint32(out, uint32(len(points)))
	for _, p := range points {
		out = le.AppendUint64(out, math.Float64bits(p.X))
		out = le.AppendUint64(out, math.Float64bits(p.Y))
		if z {
			out = le.AppendUint64(out, math.Float64bits(p.Z))
		}
		if m {
			out = le.AppendUint64(out, math.Float64bits(p.M))
		}
	}
	return out
}
