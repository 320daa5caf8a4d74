package picture

import (
	"strings"

	"leat/api/operation"
	"leat/api/wire"
)

// newList begins a picture: its paper, heading and facts. finish gives it its height.
func newList(subject string, solved *operation.Solved, facts []operation.Fact) *list {
	l := &list{width: paperWide}
	l.title = subject
	if name := solved.ID.Text(); name != "" {
		l.title += " of " + name
	}
	l.items = append(l.items, item{}) // the paper, once its height is known
	l.writeBold(ink, point{margin, 26}, start, heading, cut(l.title, heading*1.06, paperWide-2*margin))
	var parts []string
	for _, f := range facts {
		parts = append(parts, spoken(f.Name)+" "+told(solved.Units, f.Quantity, f.Value))
	}
	if len(parts) > 0 {
		l.write(soft, point{margin, 44}, start, common, strings.Join(parts, ", "))
		l.describe(strings.Join(parts, ", ") + ".")
	}
	return l
}

// describe adds a sentence to the description.
func (l *list) describe(sentence string) {
	if l.description != "" {
		l.description += " "
	}
	l.description += upperFirst(sentence)
}

// finish sets the height and lays the paper below all.
func (l *list) finish(height float64) *list {
	l.height = height
	l.items[0] = item{shape: closed, pen: paper, points: []point{{0, 0}, {l.width, 0}, {l.width, height}, {0, height}}}
	return l
}

// bodyTop is where drawings begin.
const bodyTop = 58.0

// barrelled adds how many barrels there are to the facts.
func barrelled(facts []operation.Fact, c *operation.Cross) []operation.Fact {
	if c.Barrels > 1 {
		facts = append(facts, operation.Fact{Name: "barrels", Quantity: wire.Dimensionless, Value: float64(c.Barrels)})
	}
	return facts
}
