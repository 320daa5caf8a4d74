package wire

// rules judges which of the alternative members of a section are given. What they make together is for geometry to judge.
func (s *Section) rules(w *walk) {
	switch s.Kind {
	case Trapezoidal, Triangular:
		w.eitherOrBoth("side_slope", "left_side_slope", "right_side_slope", s.SideSlope, s.LeftSideSlope, s.RightSideSlope)
	case TwoStage:
		w.eitherOrBoth("bench_width", "left_bench_width", "right_bench_width", s.BenchWidth, s.LeftBenchWidth, s.RightBenchWidth)
	case Gutter:
		switch {
		case s.GutterWidth.Given && !s.GutterSlope.Given:
			w.faultAt("gutter_slope", codeMissingMember, func() string { return "gutter_slope is missing: it goes with gutter_width; give both or neither." })
		case s.GutterSlope.Given && !s.GutterWidth.Given:
			w.faultAt("gutter_width", codeMissingMember, func() string { return "gutter_width is missing: it goes with gutter_slope; give both or neither." })
		}
	}
}

// eitherOrBoth judges a member that stands for both sides against those for the left and the right.
func (w *walk) eitherOrBoth(both, left, right string, b, l, r Number) {
	conflict := func() string { return "Give either " + both + " or " + left + " and " + right + ", not both." }
	switch {
	case b.Given:
		if l.Given {
			w.faultAt(left, codeConflictingMember, conflict)
		}
		if r.Given {
			w.faultAt(right, codeConflictingMember, conflict)
		}
	case l.Given && r.Given:
	case l.Given:
		w.faultAt(right, codeMissingMember, func() string { return right + " is missing: it goes with " + left + "; or give " + both + " instead." })
	case r.Given:
		w.faultAt(left, codeMissingMember, func() string { return left + " is missing: it goes with " + right + "; or give " + both + " instead." })
	default:
		w.faultAt(both, codeMissingMember, func() string { return both + " is missing: give it, or " + left + " and " + right + "." })
	}
}
