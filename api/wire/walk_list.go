package wire

// openList reads the bracket of a list and reports whether there is one.
func (w *walk) openList(f *field) bool {
	if w.decoder.PeekKind() != '[' {
		w.wrongType(f.listType())
		return false
	}
	w.delimiter()
	return true
}

// closeList reads the closing bracket of a list of n items.
func (w *walk) closeList(f *field, n int) {
	if w.stop() {
		return
	}
	w.delimiter()
	if n < f.least && !w.collect {
		w.failed = true
	}
}

// list reads a list of numbers. It returns a list of its own, never nil.
func (w *walk) list(f *field) []float64 {
	if !w.openList(f) {
		return []float64{}
	}
	w.numbers = w.numbers[:0]
	for i := 0; !w.stop() && w.decoder.PeekKind() != ']'; i++ {
		at := w.enterItem(i)
		w.numbers = append(w.numbers, w.number(f, 0))
		w.leave(at)
	}
	w.closeList(f, len(w.numbers))
	return own(w.numbers)
}

// pairList reads a list of pairs.
func (w *walk) pairList(f *field) [][2]float64 {
	if !w.openList(f) {
		return [][2]float64{}
	}
	w.pairs = w.pairs[:0]
	for i := 0; !w.stop() && w.decoder.PeekKind() != ']'; i++ {
		at := w.enterItem(i)
		var pair [2]float64
		w.tuple(f, pair[:])
		w.pairs = append(w.pairs, pair)
		w.leave(at)
	}
	w.closeList(f, len(w.pairs))
	return own(w.pairs)
}

// rowList reads a list of rows.
func (w *walk) rowList(f *field) [][4]float64 {
	if !w.openList(f) {
		return [][4]float64{}
	}
	w.rows = w.rows[:0]
	for i := 0; !w.stop() && w.decoder.PeekKind() != ']'; i++ {
		at := w.enterItem(i)
		var row [4]float64
		w.tuple(f, row[:])
		w.rows = append(w.rows, row)
		w.leave(at)
	}
	w.closeList(f, len(w.rows))
	return own(w.rows)
}

// tuple reads a list of exactly as many numbers as into has room for.
func (w *walk) tuple(f *field, into []float64) {
	if w.decoder.PeekKind() != '[' {
		w.wrongType(f.tupleWanted())
		return
	}
	w.delimiter()
	n := 0
	for ; !w.stop() && w.decoder.PeekKind() != ']'; n++ {
		if n >= len(into) {
			w.skip()
			continue
		}
		at := w.enterItem(n)
		into[n] = w.number(f, n)
		w.leave(at)
	}
	if w.stop() {
		return
	}
	w.delimiter()
	if n != len(into) {
		w.fault(codeWrongLength, func() string { return wrongLengthText(f, n) })
	}
}

// own returns a copy that is never nil.
func own[T any](room []T) []T {
	out := make([]T, len(room))
	copy(out, room)
	return out
}
