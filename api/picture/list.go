package picture

// A point is a place on the paper in units, from its upper left corner, y downwards.
type point struct{ x, y float64 }

// A shape says how the points of an item are joined.
type shape uint8

const (
	open   shape = iota // a line
	closed              // an area, its last point joined to the first
	words               // text
)

// An anchor says which part of a text stands at its place.
type anchor uint8

const (
	start anchor = iota
	middle
	end
)

// An item is one thing that is drawn.
type item struct {
	shape  shape
	pen    *pen
	points []point // of text, its place on the base line

	text   string
	anchor anchor
	size   float64
	bold   bool
}

// A list is a picture as a display list.
type list struct {
	width, height      float64
	title, description string
	items              []item
}

func (l *list) line(p *pen, points ...point) {
	if len(points) > 1 {
		l.items = append(l.items, item{shape: open, pen: p, points: points})
	}
}

func (l *list) area(p *pen, points ...point) {
	if len(points) > 2 {
		l.items = append(l.items, item{shape: closed, pen: p, points: points})
	}
}

// The sizes of text.
const (
	small   = 11.0
	common  = 12.0
	heading = 16.0
)

func (l *list) write(p *pen, at point, a anchor, size float64, text string) {
	l.items = append(l.items, item{shape: words, pen: p, points: []point{at}, text: text, anchor: a, size: size})
}

func (l *list) writeBold(p *pen, at point, a anchor, size float64, text string) {
	l.write(p, at, a, size, text)
	l.items[len(l.items)-1].bold = true
}
