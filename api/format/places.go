package format

import (
	"math"
	"sort"

	"leat/api/operation"
	"leat/api/wire"
)

// appendPlaces appends an answer as a GeoJSON FeatureCollection (RFC 7946): a Point for each place, its properties those of the place; all else
// the answer says stands beside the features. A place's third ordinate is its water level, in the units of the answer.
func appendPlaces(dst []byte, solved *operation.Solved) ([]byte, *wire.Problem) {
	answer := solved.Answer.(wire.Placed)
	line, length := answer.Line()
	if len(line) == 0 {
		return dst, wire.NotAcceptable("The request carries no geometry on which the answer could be placed; give geometry, a LineString from upstream to downstream, or accept application/json or text/csv.")
	}
	r := newRoute(line)
	dst = append(dst, `{"type":"FeatureCollection","features":[`...)
	for i := range answer.Places() {
		if i > 0 {
			dst = append(dst, ',')
		}
		chainage, level := answer.Place(i)
		x, y := r.at(chainage / length)
		dst = append(dst, `{"type":"Feature","geometry":{"type":"Point","coordinates":[`...)
		dst = wire.AppendNumber(dst, x)
		dst = wire.AppendNumber(append(dst, ','), y)
		if !math.IsNaN(level) {
			dst = wire.AppendNumber(append(dst, ','), solved.Units.FromSI(wire.QuantityLength, level))
		}
		dst = append(dst, `]},"properties":`...)
		dst = answer.AppendProperties(dst, i, solved.Units)
		dst = append(dst, '}')
	}
	dst = append(dst, ']')
	dst = answer.AppendRest(dst, solved.Units, solved.ID)
	return append(dst, '}'), nil
}

// A route is a line that places are found on by their share of its length, which is measured in the plane of the first two ordinates.
type route struct {
	line  []wire.Position
	along []float64 // length from the first position to each
}

func newRoute(line []wire.Position) route {
	along := make([]float64, len(line))
	for i := 1; i < len(line); i++ {
		a, b := &line[i-1].Ordinates, &line[i].Ordinates
		along[i] = along[i-1] + math.Hypot(b[0]-a[0], b[1]-a[1])
	}
	return route{line, along}
}

// at returns the point at a share of the length, from 0 to 1.
func (r route) at(share float64) (x, y float64) {
	last := len(r.along) - 1
	want := share * r.along[last]
	i := sort.SearchFloat64s(r.along, want) // the first position that lies there or beyond
	switch {
	case i > last || share >= 1:
		return r.line[last].Ordinates[0], r.line[last].Ordinates[1]
	case i == 0:
		return r.line[0].Ordinates[0], r.line[0].Ordinates[1]
	}
	a, b := &r.line[i-1].Ordinates, &r.line[i].Ordinates
	part := (want - r.along[i-1]) / (r.along[i] - r.along[i-1])
	return a[0] + part*(b[0]-a[0]), a[1] + part*(b[1]-a[1])
}
