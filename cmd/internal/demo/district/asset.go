package district

import (
	"fmt"
	"math/rand/v2"
	"slices"
)

// Rows is the number of assets.
const Rows = 1200

// A Channel is one row of the table of channels. A nil cell is one that nobody filled in.
type Channel struct {
	Code     string
	Parish   string
	Class    string // roadside_ditch, main_drain, …
	Shape    string // the authority's codes: TRAP, RECT, VEE, PIPE, …
	Material string // EARTH, CONCRETE, …
	Status   string // in_use, planned, abandoned

	BottomWidth any // metres
	SideSlope   any // horizontal for 1 of height
	TopWidth    any // metres, of swales
	BankHeight  any // metres
	Width       any // millimetres
	Height      any // millimetres; of round pipes the diameter
	CrossFall   any // percent, of gutters
	Barrels     any // number of pipes side by side; nothing for one

	UpstreamLevel   any // metres above datum, of the bed
	DownstreamLevel any
	Length          any // metres in plan
	FlowDesign      any // m3/s
	FlowCheck       any // m3/s, of the rarer storm
	Surveyed        string
	Remark          any

	Line   []Vertex
	Points []Point // as they were booked; only of SURVEY
}

// A Point is one point of a surveyed section.
type Point struct {
	Place         int // in the order of booking
	Offset, Level float64
}

// Channels returns the assets in the order in which they came into the register.
func Channels() []Channel {
	r := rand.New(rand.NewPCG(1911, 7)) // any fixed pair will do; changing it changes the register
	l := &lattices{Rand: r, free: map[string][]lane{}}
	out := make([]Channel, 0, Rows)
	for i := range Rows {
		p := parishOf(r)
		k := classes[classOf(r)]
		m, wrong := mistakeOf(i + 1)
		if wrong {
			k = classes[slices.IndexFunc(classes, func(c class) bool { return c.name == m.Class })]
		}
		c := k.draw(&pen{Rand: r, lattices: l, parish: p, class: k})
		c.Code, c.Parish, c.Class = fmt.Sprintf("%s-%s-%04d", p.code, k.code, i+1), p.name, k.name
		c.Status = "in_use"
		switch n := r.IntN(100); {
		case n < 3:
			c.Status = "planned"
		case n < 5:
			c.Status = "abandoned"
		}
		c.Surveyed = fmt.Sprintf("20%02d-%02d-%02d", 12+r.IntN(14), 1+r.IntN(12), 1+r.IntN(28))
		if wrong {
			c.Status = "in_use"
			m.spoil(&c)
		}
		out = append(out, c)
	}
	return out
}

func parishOf(r *rand.Rand) *parish {
	n := r.IntN(100)
	for i := range parishes {
		if n < parishes[i].share {
			return &parishes[i]
		}
		n -= parishes[i].share
	}
	return &parishes[0]
}

// A class is one sort of asset.
type class struct {
	name, code string
	share      int // in a hundred
	spread     spread
	draw       func(*pen) Channel
}

var classes []class

func init() { // in a function, since the drawings refer to their class
	classes = []class{
		{"roadside_ditch", "RD", 30, spread{330, 6, 10, 5}, roadsideDitch},
		{"main_drain", "MD", 9, spread{520, 4, 5, -60}, mainDrain},
		{"lined_channel", "LC", 7, spread{300, 6, 7, 40}, linedChannel},
		{"sewer", "SW", 30, spread{70, 10, 12, 0}, sewer},
		{"culvert", "CU", 10, spread{330, 6, 17, -5}, culvert},
		{"gutter", "GU", 8, spread{70, 10, 9, 3}, gutter},
		{"swale", "SG", 6, spread{260, 6, 8, -30}, swale},
	}
}

func classOf(r *rand.Rand) int {
	n := r.IntN(100)
	for i := range classes {
		if n < classes[i].share {
			return i
		}
		n -= classes[i].share
	}
	return 0
}
