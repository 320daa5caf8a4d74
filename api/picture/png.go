package picture

import (
	"bytes"
	"image"
	"image/color"
	"image/draw"
	"image/png"
	"math"
	"strconv"

	"golang.org/x/image/font"
	"golang.org/x/image/font/opentype"
	"golang.org/x/image/math/fixed"
	"golang.org/x/image/vector"
)

// perUnit is how many pixels a PNG has for each unit: print on A4 wants two.
const perUnit = 2

// appendPNG appends a list as a PNG, on light paper.
func appendPNG(dst []byte, l *list) ([]byte, error) {
	width, height := int(math.Ceil(l.width*perUnit)), int(math.Ceil(l.height*perUnit))
	c := canvas{image: image.NewRGBA(image.Rect(0, 0, width, height)), raster: vector.NewRasterizer(width, height), faces: map[textFace]font.Face{}}
	for i := range l.items {
		if err := c.draw(&l.items[i]); err != nil {
			return dst, err
		}
	}
	out := bytes.NewBuffer(dst)
	if err := encoder.Encode(out, c.image); err != nil {
		return dst, err
	}
	return out.Bytes(), nil
}

// encoder gives up about a twentieth of the size for time, since no checkpoint is called while it works.
var encoder = png.Encoder{CompressionLevel: png.BestSpeed}

// A canvas draws items as pixels. What belongs to one area is gathered first, so that no more than its own surroundings are drawn.
type canvas struct {
	image  *image.RGBA
	raster *vector.Rasterizer
	faces  map[textFace]font.Face
	rings  [][]float64 // of the area being gathered, in pixels: x, y in turn
}

type textFace struct {
	size float64
	bold bool
}

func (c *canvas) draw(it *item) error {
	if it.shape == words {
		return c.write(it)
	}
	if it.pen == paper {
		draw.Draw(c.image, c.image.Rect, image.NewUniform(shade(paper.fill)), image.Point{}, draw.Src)
		return nil
	}
	if it.shape == closed && it.pen.fill != "" {
		ring := make([]float64, 0, 2*len(it.points))
		for _, p := range it.points {
			ring = append(ring, p.x*perUnit, p.y*perUnit)
		}
		c.polygon(ring...)
		c.fill(it.pen.fill)
	}
	if it.pen.stroke == "" {
		return nil
	}
	points := it.points
	if it.shape == closed {
		points = append(append([]point(nil), points...), points[0])
	}
	for _, piece := range dashes(points, it.pen.dash) {
		c.stroke(piece, it.pen.width)
		c.fill(it.pen.stroke) // each dash for itself, since the surroundings of all together may be the whole paper
	}
	return nil
}

// fill colours what was gathered.
func (c *canvas) fill(hex string) {
	bounds := image.Rectangle{}
	for _, ring := range c.rings {
		for i := 0; i < len(ring); i += 2 {
			x, y := int(math.Floor(ring[i])), int(math.Floor(ring[i+1]))
			bounds = bounds.Union(image.Rect(x, y, x+2, y+2))
		}
	}
	if bounds = bounds.Intersect(c.image.Rect); !bounds.Empty() {
		c.raster.Reset(bounds.Dx(), bounds.Dy())
		left, top := float64(bounds.Min.X), float64(bounds.Min.Y)
		for _, ring := range c.rings {
			for i := 0; i < len(ring); i += 2 {
				if x, y := float32(ring[i]-left), float32(ring[i+1]-top); i == 0 {
					c.raster.MoveTo(x, y)
				} else {
					c.raster.LineTo(x, y)
				}
			}
			c.raster.ClosePath()
		}
		c.raster.Draw(c.image, bounds, image.NewUniform(shade(hex)), image.Point{})
	}
	c.rings = c.rings[:0]
}

// polygon adds an area to what is gathered.
func (c *canvas) polygon(ring ...float64) { c.rings = append(c.rings, ring) }

// shade reads #rrggbb, which the pens hold.
func shade(hex string) color.RGBA {
	n, err := strconv.ParseUint(hex[1:], 16, 32)
	if err != nil {
		panic(err) // a pen is wrong
	}
	return color.RGBA{uint8(n >> 16), uint8(n >> 8), uint8(n), 255}
}

// stroke adds the area of a line of a width: a box for each piece and a disc at each joint within, all turning the same way, so that they count as one.
func (c *canvas) stroke(points []point, width float64) {
	half := 0.5 * width * perUnit
	for i := 1; i < len(points); i++ {
		a, b := points[i-1], points[i]
		ax, ay, bx, by := a.x*perUnit, a.y*perUnit, b.x*perUnit, b.y*perUnit
		length := math.Hypot(bx-ax, by-ay)
		if length == 0 {
			continue
		}
		nx, ny := -(by-ay)/length*half, (bx-ax)/length*half
		c.polygon(ax+nx, ay+ny, ax-nx, ay-ny, bx-nx, by-ny, bx+nx, by+ny)
		if i < len(points)-1 {
			c.disc(bx, by, half)
		}
	}
}

func (c *canvas) disc(x, y, radius float64) {
	const corners = 10
	var ring [2 * corners]float64
	for i := range corners {
		angle := 2 * math.Pi * float64(i) / corners
		ring[2*i], ring[2*i+1] = x+radius*math.Cos(angle), y+radius*math.Sin(angle)
	}
	c.polygon(ring[:]...)
}

// dashes parts a line by the lengths of dashes and gaps in turn.
func dashes(points []point, pattern []float64) [][]point {
	if len(pattern) == 0 {
		return [][]point{points}
	}
	var out [][]point
	piece := []point{points[0]}
	which, left := 0, pattern[0]
	for i := 1; i < len(points); i++ {
		a, b := points[i-1], points[i]
		length := math.Hypot(b.x-a.x, b.y-a.y)
		done := 0.0
		for length-done > left {
			done += left
			at := point{a.x + (b.x-a.x)*done/length, a.y + (b.y-a.y)*done/length}
			if which%2 == 0 {
				out = append(out, append(piece, at))
			}
			which = (which + 1) % len(pattern)
			left, piece = pattern[which], []point{at}
		}
		left -= length - done
		piece = append(piece, b)
	}
	if which%2 == 0 && len(piece) > 1 {
		out = append(out, piece)
	}
	return out
}

func (c *canvas) write(it *item) error {
	key := textFace{it.size, it.bold}
	face := c.faces[key]
	if face == nil {
		weight := 0
		if it.bold {
			weight = 1
		}
		var err error
		face, err = opentype.NewFace(fonts()[weight], &opentype.FaceOptions{Size: it.size * perUnit, DPI: 72, Hinting: font.HintingNone})
		if err != nil {
			return err
		}
		c.faces[key] = face
	}
	d := font.Drawer{Dst: c.image, Src: image.NewUniform(shade(it.pen.fill)), Face: face}
	x := fixed.Int26_6(math.Round(it.points[0].x * perUnit * 64))
	switch it.anchor {
	case middle:
		x -= d.MeasureString(it.text) / 2
	case end:
		x -= d.MeasureString(it.text)
	}
	d.Dot = fixed.Point26_6{X: x, Y: fixed.Int26_6(math.Round(it.points[0].y * perUnit * 64))}
	d.DrawString(it.text)
	return nil
}
