package wire

import (
	"math"
	"reflect"
	"strings"
	"testing"
)

// TestBoundsAreTheValidators proves that the bounds compiled for the fast walk and the validator, which read the same
// tags, judge every number alike: at each bound, next to it, and beyond.
func TestBoundsAreTheValidators(t *testing.T) {
	probes := 0
	for typ, p := range plans {
		for _, sf := range reflect.VisibleFields(typ) {
			i, member := find(p.index, sf.Tag.Get("json"))
			if !member || sf.Anonymous {
				continue
			}
			f := &p.fields[i]
			tag := sf.Tag.Get("validate")
			for column := range f.bounds {
				for _, v := range probing(&f.bounds[column]) {
					var value any
					switch f.shape {
					case shapeNumber:
						value = Number{v, true}
					case shapeWhole:
						if v != math.Trunc(v) || math.Abs(v) > greatestWhole {
							continue
						}
						value = Whole{int(v), true}
					case shapePair:
						row := [2]float64{sound(f, 0), sound(f, 1)}
						row[column] = v
						value = Pair{row, true}
					case shapeNamed:
						value = []NamedNumber{{"a", v}}
					case shapePositions:
						value = []Position{{Ordinates: [4]float64{0, v}, Count: 2}, {Count: 2}}
					case shapeNumbers:
						value = []float64{v}
					case shapePairs:
						row := [2]float64{sound(f, 0), sound(f, 1)}
						row[column] = v
						value = [][2]float64{row, row, row}
					case shapeRows:
						row := [4]float64{sound(f, 0), sound(f, 1), sound(f, 2), sound(f, 3)}
						row[column] = v
						value = [][4]float64{row, row, row}
					default:
						continue
					}
					probes++
					compiled := f.bounds[column].holds(v)
					if err := checker.Var(value, tag); (err == nil) != compiled {
						t.Errorf("%v.%s column %d = %v: compiled bounds say %v, the validator %v", typ, f.name, column, v, compiled, err)
					}
				}
			}
		}
	}
	if probes < 500 {
		t.Errorf("only %d probes", probes)
	}
}

// sound returns a value within the bounds of a column.
func sound(f *field, column int) float64 { return f.bounds[column].greatest }

// probing returns values at, next to and beyond bounds.
func probing(b *bounds) []float64 {
	out := []float64{0, math.Copysign(0, -1), 1, -1, 1e-100, -1e-100, 1e100, -1e100, 0.5, 2}
	for _, at := range []float64{b.least, b.greatest, b.floor, -b.floor} {
		out = append(out, at, math.Nextafter(at, math.Inf(1)), math.Nextafter(at, math.Inf(-1)), at+1, at-1)
	}
	return out
}

// TestListLengthsAreTheValidators is the same for the least number of items, and for enumerations.
func TestListLengthsAreTheValidators(t *testing.T) {
	for typ, p := range plans {
		for _, sf := range reflect.VisibleFields(typ) {
			i, member := find(p.index, sf.Tag.Get("json"))
			if !member || sf.Anonymous {
				continue
			}
			f := &p.fields[i]
			switch f.shape {
			case shapeName:
				for _, name := range append([]string{"x", "SI", f.enum[0] + " "}, f.enum...) {
					known := false
					for _, e := range f.enum {
						known = known || e == name
					}
					if err := checker.Var(name, sf.Tag.Get("validate")); (err == nil) != known {
						t.Errorf("%v.%s = %q: compiled %v, validator %v", typ, f.name, name, known, err)
					}
				}
			case shapeNumbers, shapePairs, shapeRows, shapePositions, shapeObjects, shapeNamed, shapeTexts:
				// Only the length is judged here: take the tag up to where it goes into the items.
				tag, _, _ := strings.Cut(sf.Tag.Get("validate"), ",dive")
				for n := range 4 {
					list := reflect.MakeSlice(sf.Type, n, n).Interface()
					if err := checker.Var(list, tag); (err == nil) != (n >= f.least) {
						t.Errorf("%v.%s of %d items: at least %d, validator %v", typ, f.name, n, f.least, err)
					}
				}
			}
		}
	}
}

// TestCheck judges a request that did not come through Decode.
func TestCheck(t *testing.T) {
	r := &DepthsRequest{
		Section:   Section{Given: true, Kind: Surveyed, Points: [][2]float64{{0, 1}, {1, 1e10}}},
		Roughness: Roughness{Given: true, Law: Zones, Zones: []Zone{{Manning: Number{-1, true}}}},
		BedSlope:  Number{2, true},
	}
	r.System = US
	got := ""
	for _, f := range Check(r) {
		got += f.Pointer + " " + f.Code + "\n"
	}
	want := "/section/points/1/1 out_of_range\n/roughness/zones/0/manning not_positive\n/bed_slope out_of_range\n/discharge missing_member\n"
	if got != want {
		t.Errorf("got\n%swant\n%s", got, want)
	}
}
