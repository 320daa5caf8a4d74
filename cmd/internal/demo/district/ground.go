package district

import (
	"math"
	"math/rand/v2"
)

// The grid of the district, in metres. It is nobody else's: the number stands beyond those that registers of reference systems give out.
const (
	GridID         = 990041
	GridName       = "Ostermere grid"
	GridDefinition = `LOCAL_CS["Ostermere grid",UNIT["metre",1],AXIS["Easting",EAST],AXIS["Northing",NORTH]]`
)

// A parish is a part of the district: a turned square of streets and fields around its church.
type parish struct {
	code, name string
	share      int     // in a hundred
	x, y       float64 // the church
	turn       float64 // of the lanes, in radians
	ground     float64 // level in metres above datum
}

var parishes = []parish{
	{"OST", "Ostermere", 40, 6200, 4300, 0.21, 5},
	{"SAL", "Sallowby", 23, 9400, 5600, -0.12, 9},
	{"MAR", "Marlhithe", 20, 8300, 8100, 0.44, 24},
	{"QUE", "Quenfen", 17, 3300, 6700, 0.05, 0},
}

// A lane is a line of the lattice on which a parish is laid out; assets lie along it, one after another.
type lane struct{ line, piece int }

// lattices deal out places, so that no two assets of a kind lie on one another.
type lattices struct {
	*rand.Rand
	free map[string][]lane
}

// A spread says how the assets of a class lie: lanes so far apart, in a square of so many, each lane cut into pieces.
type spread struct {
	apart  float64 // metres
	lanes  int     // in each direction
	pieces int     // of a lane
	aside  float64 // metres from the middle of the lane
}

// place deals out a piece of lane that is not taken yet: its middle, and the direction that it runs in.
func (l *lattices) place(p *parish, class string, s spread) (x, y, direction float64) {
	key := p.code + class
	if l.free[key] == nil {
		all := make([]lane, 0, 2*s.lanes*s.pieces)
		for line := range 2 * s.lanes {
			for piece := range s.pieces {
				all = append(all, lane{line, piece})
			}
		}
		l.Shuffle(len(all), func(i, k int) { all[i], all[k] = all[k], all[i] })
		l.free[key] = all
	}
	at := l.free[key][0]
	if len(l.free[key]) > 1 {
		l.free[key] = l.free[key][1:]
	}
	across := (float64(at.line%s.lanes)-float64(s.lanes-1)/2)*s.apart + s.aside
	along := (float64(at.piece) + 0.5 - float64(s.pieces)/2) * s.apart * float64(s.lanes) / float64(s.pieces)
	direction = p.turn
	if at.line >= s.lanes {
		direction += math.Pi / 2
	}
	sin, cos := math.Sincos(direction)
	return p.x + along*cos - across*sin, p.y + along*sin + across*cos, direction
}

// A Vertex is a point of an asset's line: place, level of the bed and distance from the upstream end, in metres.
type Vertex struct{ X, Y, Z, M float64 }

// line draws a line of about so long from upstream to downstream, with the bends of a hand that knows the ground.
func line(r *rand.Rand, x, y, direction, length, bend float64) []Vertex {
	if r.IntN(2) == 1 {
		direction += math.Pi
	}
	n := 2 + int(length/45)
	n = min(n, 12)
	sin, cos := math.Sincos(direction)
	out := make([]Vertex, n)
	for i := range out {
		along := (float64(i)/float64(n-1) - 0.5) * length
		across := 0.0
		if i > 0 && i < n-1 {
			across = bend * (r.Float64() - 0.5)
		}
		out[i].X, out[i].Y = round(x+along*cos-across*sin, 2), round(y+along*sin+across*cos, 2)
	}
	for i := 1; i < n; i++ {
		out[i].M = round(out[i-1].M+math.Hypot(out[i].X-out[i-1].X, out[i].Y-out[i-1].Y), 2)
	}
	return out
}

// lay gives the line its levels, falling evenly.
func lay(line []Vertex, upstream, downstream float64) {
	length := line[len(line)-1].M
	for i := range line {
		line[i].Z = round(upstream+(downstream-upstream)*line[i].M/length, 3)
	}
}

// round rounds to so many decimals, as a number is written.
func round(v float64, decimals int) float64 {
	scale := 1.0
	for range decimals {
		scale *= 10
	}
	return math.Round(v*scale) / scale
}
