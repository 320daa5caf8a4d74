package section

import (
	"strconv"

	"leat/compute/solve"
)

// Tabulated is a section that is known by a table of depths.
type Tabulated struct {
	depths []float64
	rows   []row
	power  float64    // m of area = A1*(depth/d1)^m below the first row
	less   solve.Pair // m - 1
	breaks []float64
}

// row is one row and the span above it.
type row struct {
	area, perimeter, width, moment float64
	height                         float64 // of the span above
	middle                         float64 // second Bernstein coefficient of the width over the span: (width, middle, next width)
	next                           float64
	perimeterRate                  float64
}

// NewTabulated returns the section of rows [depth, area, wetted_perimeter, top_width] in m and m2, depths and areas rising. Between rows the area
// is the cubic that has the widths as its slopes (Hermite), which must not fall anywhere. Faults name
// rows, rows/INDEX and rows/INDEX/MEMBER, MEMBER from 0 to 3.
func NewTabulated(rows [][4]float64) (Section, error) {
	var c check
	if len(rows) == 0 {
		c.add("rows", "too_few", "A table needs at least one row.")
	}
	for i, r := range rows {
		for j, value := range r {
			if j == 1 && !isArea(value) {
				c.area(rowMember(i, j), value)
			} else if j != 1 && !isSize(value) {
				c.size(rowMember(i, j), value)
			}
		}
		sound := isSize(r[0]) && isArea(r[1]) && isSize(r[2]) && isSize(r[3])
		if sound && r[2] < r[3] {
			c.add(rowMember(i, 2), "perimeter_too_short", "The wetted perimeter cannot be shorter than the top width, which it underlies.")
		}
		if i == 0 {
			if sound && !(r[3]*r[0]/r[1] <= greatestPower) {
				c.add(rowMember(i, 1), "too_small", "This area is too small for its depth and width: no bed rises so steeply.")
			}
			continue
		}
		p := rows[i-1]
		if isSize(p[0]) && isSize(r[0]) && r[0] <= p[0] {
			c.add(rowMember(i, 0), "not_rising", "Depths must rise from row to row.")
		}
		if isArea(p[1]) && isArea(r[1]) && r[1] <= p[1] {
			c.add(rowMember(i, 1), "not_rising", "Areas must rise from row to row.")
		}
		if isSize(p[2]) && isSize(r[2]) && r[2] < p[2] {
			c.add(rowMember(i, 2), "falling_perimeter", "The wetted perimeter cannot fall as the depth rises.")
		}
		if sound && r[0] > p[0] && r[1] > p[1] && p[3] > 0 && !neverNegative(p[3], middleWidth(p, r), r[3]) {
			c.add("rows/"+strconv.Itoa(i), "area_not_monotone",
				"Between the row before and this one, the cubic through the areas with the widths as its slopes would fall; areas, widths and depths do not agree.")
		}
	}
	if err := c.err(); err != nil {
		return nil, err
	}

	first := rows[0]
	less := solve.Product(first[3], first[0]).Plus(-first[1]).Divide(solve.Pair{High: first[1]})
	t := &Tabulated{power: less.Plus(1).Value(), less: less}
	t.depths, t.rows, t.breaks = make([]float64, 0, len(rows)), make([]row, 0, len(rows)), make([]float64, 0, len(rows)-1)
	moment := first[1] * first[0] / (t.power + 1)
	for i, r := range rows {
		w := row{area: r[1], perimeter: r[2], width: r[3], moment: moment}
		if i+1 < len(rows) {
			n := rows[i+1]
			w.height = n[0] - r[0]
			w.next = n[3]
			w.middle = middleWidth(r, n)
			w.perimeterRate = (n[2] - r[2]) / w.height
			moment += w.height * (r[1] + w.height*(3*w.width+2*w.middle+w.next)*(1.0/12))
			t.breaks = append(t.breaks, r[0])
		}
		t.depths = append(t.depths, r[0])
		t.rows = append(t.rows, w)
	}
	return t, nil
}

// rowMember names a member of a row.
func rowMember(row, member int) string {
	return "rows/" + strconv.Itoa(row) + "/" + strconv.Itoa(member)
}

// middleWidth returns the second Bernstein coefficient of the width between two rows.
func middleWidth(p, r [4]float64) float64 { return 3*((r[1]-p[1])/(r[0]-p[0])) - p[3] - r[3] }

// greatestPower bounds the power of depth with which the area below the first row rises: beyond it, its values underflow.
const greatestPower = 1000

// neverNegative reports whether a*(1-u)^2 + 2*b*u*(1-u) + c*u^2, with a and c greater than 0, stays at or above 0 for u from 0 to 1.
// With b below 0 its least value there is (ac - b^2)/(a - 2b + c).
func neverNegative(a, b, c float64) bool { return b >= 0 || b*b <= a*c }

// At implements Section. Above the last row it returns what that says.
func (t *Tabulated) At(depth float64) (g Geometry) {
	last := len(t.depths) - 1
	if depth > t.depths[last] {
		depth = t.depths[last]
	}
	g.Depth = depth
	if first := t.depths[0]; depth <= first {
		x, r := depth/first, &t.rows[0]
		share := solve.PairedPower(x, t.less)
		rate := t.less.High / depth
		g.Area = r.area * x * share
		g.Perimeter = r.perimeter * share
		g.TopWidth = r.width * share
		g.Moment = r.area * x * share * depth / (t.power + 1)
		g.PerimeterRate = r.perimeter * share * rate
		g.TopWidthRate = r.width * share * rate
		return g
	}
	lo, hi := 0, last // the first row not below the depth, of a higher index than 0
	for lo < hi {
		if mid := int(uint(lo+hi) >> 1); t.depths[mid] < depth {
			lo = mid + 1
		} else {
			hi = mid
		}
	}
	r, from := &t.rows[lo-1], t.depths[lo-1]
	d := depth - from
	u, v := d/r.height, (t.depths[lo]-depth)/r.height
	a, b, c := r.width, r.middle, r.next
	g.Area = r.area + d*(a*(1-u+u*u*(1.0/3))+u*(b*(1-u*(2.0/3))+c*u*(1.0/3)))
	g.Perimeter = r.perimeter + r.perimeterRate*d
	g.TopWidth = a*v*v + 2*b*u*v + c*u*u
	g.Moment = r.moment + d*(r.area+d*(a*(0.5+u*(-1.0/3+u*(1.0/12)))+u*(b*(1.0/3-u*(1.0/6))+c*u*(1.0/12))))
	g.PerimeterRate = r.perimeterRate
	g.TopWidthRate = 2 * ((b-a)*v + (c-b)*u) / r.height
	return g
}

// Full implements Section: what the last row says.
func (t *Tabulated) Full() Geometry { return t.At(t.Height()) }

// Height implements Section: the depth of the last row.
func (t *Tabulated) Height() float64 { return t.depths[len(t.depths)-1] }

// Closed implements Section.
func (t *Tabulated) Closed() bool { return false }

// Bank implements Section: the depth of the last row.
func (t *Tabulated) Bank() (depth float64, known bool) { return t.Height(), true }

// Breaks implements Section.
func (t *Tabulated) Breaks() []float64 { return t.breaks }

// Form implements Section.
func (t *Tabulated) Form() Form { return Irregular }
