package section

import "math"

// arcSamples is into how many chords a smooth piece of a round wall is parted: none of them strays from it by more than a few ten-thousandths of the piece.
const arcSamples = 48

// outlined is a section that knows where its walls stand.
type outlined interface {
	outline(to float64) [][2]float64
}

// Outline returns the wall of a section as a line of [offset, height above the lowest point] in m, from left to right, up to a height or
// to the crown, whichever is lower. A surveyed line is whole; where one of its ends lies below the height, a wall goes straight up from there, as
// depths above it take it. Round walls come as chords. exact is false where widths alone are known (a table of rows), so that the line is drawn
// about its middle.
func Outline(s Section, to float64) (line [][2]float64, exact bool) {
	if o, known := s.(outlined); known {
		return o.outline(to), true
	}
	_, table := s.(*Tabulated)
	return symmetrical(s, min(to, s.Height())), !table
}

// symmetrical is the outline of a section that has half its width on either side.
func symmetrical(s Section, to float64) [][2]float64 {
	var right [][2]float64
	add := func(height, width float64) { right = append(right, [2]float64{0.5 * width, height}) }
	lower := 0.0
	for _, upper := range append(append([]float64(nil), s.Breaks()...), to) {
		if upper = min(upper, to); !(upper > lower) {
			break
		}
		for i := range arcSamples + 1 {
			// Cosines crowd the samples at both ends, where a round wall runs level.
			height := lower + (upper-lower)*0.5*(1-math.Cos(math.Pi*float64(i)/arcSamples))
			switch {
			case i == 0 && lower == 0:
				height = to * 1e-9 // the limit of the width from above
			case i == 0:
				height = math.Nextafter(lower, upper)
			case i == arcSamples:
				height = upper
			}
			add(height, s.At(height).TopWidth)
		}
		lower = upper
	}
	right[0][1] = 0
	line := make([][2]float64, 0, 2*len(right)+1)
	for i := len(right) - 1; i >= 0; i-- {
		line = append(line, [2]float64{-right[i][0], right[i][1]})
	}
	return append(line, right...)
}

func (s *sides) outline(to float64) [][2]float64 {
	half := 0.5 * s.bottom
	line := [][2]float64{{-half - s.left*to, to}, {-half, 0}}
	if half > 0 {
		line = append(line, [2]float64{half, 0})
	}
	return append(line, [2]float64{half + s.right*to, to})
}

func (b *Benched) outline(to float64) [][2]float64 { return along(b.line, to) }

func (s *Gutter) outline(to float64) [][2]float64 { return along(s.line, to) }

func (s *SurveyedLine) outline(to float64) [][2]float64 {
	line := along(s.line, math.Inf(1))
	if first := line[0]; first[1] < to {
		line = append([][2]float64{{first[0], to}}, line...)
	}
	if last := line[len(line)-1]; last[1] < to {
		line = append(line, [2]float64{last[0], to})
	}
	return line
}

// along returns the points of a line; sides that go on for ever end at a height, and what lies above it is left out at both ends.
func along(stretches []stretch, to float64) [][2]float64 {
	var line [][2]float64
	for i := range stretches {
		t := &stretches[i]
		left, right := [2]float64{t.left, t.leftLevel.Value()}, [2]float64{t.right, t.rightLevel.Value()}
		rises := right[1] > left[1]
		if max(left[1], right[1]) > to {
			if min(left[1], right[1]) >= to {
				continue
			}
			if rises {
				right = [2]float64{left[0] + t.run.Value()*(to-left[1]), to}
			} else {
				left = [2]float64{right[0] - t.run.Value()*(to-right[1]), to}
			}
		}
		if len(line) == 0 {
			line = append(line, left)
		}
		line = append(line, right)
	}
	return line
}
