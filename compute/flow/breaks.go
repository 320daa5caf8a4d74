package flow

import "math"

// breaks merges the depths at which the section's and the law's curves may break, rising.
type breaks struct {
	section, law []float64
	height       float64
}

func newBreaks(c *Channel) breaks {
	b := breaks{section: c.Section.Breaks(), height: c.Section.Height()}
	if c.Law != nil {
		b.law = c.Law.Breaks()
	}
	return b
}

// next returns the next break, and in the end the height of the section (+Inf where it has none).
func (b *breaks) next() float64 {
	s, l := b.height, math.Inf(1)
	if len(b.section) > 0 {
		s = b.section[0]
	}
	if len(b.law) > 0 {
		l = b.law[0]
	}
	if s <= l && len(b.section) > 0 {
		b.section = b.section[1:]
	}
	if l <= s && len(b.law) > 0 {
		b.law = b.law[1:]
	}
	return min(s, l, b.height)
}
