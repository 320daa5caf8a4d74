package wire

// Position is a place of a GeoJSON geometry (RFC 7946): two to four ordinates in the caller's own coordinates, which no system of units converts.
type Position struct {
	Ordinates [4]float64
	Count     int8 // of ordinates
}

// The least and the greatest number of ordinates.
const (
	leastOrdinates = 2
	mostOrdinates  = 4
)

// positions reads a list of positions. It returns a list of its own, never nil.
func (w *walk) positions(f *field) []Position {
	out := []Position{}
	if !w.openList(f) {
		return out
	}
	for i := 0; !w.stop() && w.decoder.PeekKind() != ']'; i++ {
		at := w.enterItem(i)
		out = append(out, w.position(f))
		w.leave(at)
	}
	w.closeList(f, len(out))
	return out
}

func (w *walk) position(f *field) (p Position) {
	if w.decoder.PeekKind() != '[' {
		w.wrongType(f.tupleType())
		return p
	}
	w.delimiter()
	n := 0
	for ; !w.stop() && w.decoder.PeekKind() != ']'; n++ {
		if n >= mostOrdinates {
			w.skip()
			continue
		}
		at := w.enterItem(n)
		p.Ordinates[n] = w.number(f, 0)
		w.leave(at)
	}
	if w.stop() {
		return p
	}
	w.delimiter()
	if n < leastOrdinates || n > mostOrdinates {
		w.fault(codeWrongLength, func() string { return wrongLengthText(f, n) })
	}
	p.Count = int8(min(n, mostOrdinates))
	return p
}
