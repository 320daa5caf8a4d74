package mapping

import (
	"crypto/sha256"
	"encoding/hex"
	"math"
	"math/rand/v2"
	"strings"
	"testing"

	"leat/api/operation"
	"leat/api/wire"
	"leat/cmd/internal/register/row"
	"leat/compute"
)

// request maps one row of the sound file, or of one changed by pairs of old and new text. cells are by column.
func request(t *testing.T, cells map[string]any, points [][2]any, changes ...string) (string, []Problem) {
	t.Helper()
	_, m, err := compileText(strings.NewReplacer(changes...).Replace(sound))
	if err != nil {
		t.Fatal(err)
	}
	r := Row{Values: make([]row.Value, len(m.Columns))}
	for i, name := range m.Columns {
		r.Values[i] = valueOf(cells[name])
	}
	for _, p := range points {
		r.Children = append(r.Children, valueOf(p[0]), valueOf(p[1]))
	}
	body, problems := m.NewWriter().Append([]byte("kept"), r)
	if !strings.HasPrefix(string(body), "kept") {
		t.Errorf("what stood before is lost: %s", body)
	}
	return string(body[len("kept"):]), problems
}

func valueOf(v any) row.Value {
	switch v := v.(type) {
	case nil:
		return row.Value{}
	case int:
		return row.OfInt(int64(v))
	case float64:
		return row.OfFloat(v)
	case bool:
		return row.OfBool(v)
	case []byte:
		return row.OfBytes(v)
	}
	return row.OfString(v.(string))
}

func TestRequests(t *testing.T) {
	circle := map[string]any{"asset": 1, "shape": "C", "diameter": 300, "width": 900, "material": "concrete", "up": 10.5, "down": 10.0, "length": 100, "flow": 50}
	with := func(changes ...any) map[string]any {
		out := map[string]any{}
		for k, v := range circle {
			out[k] = v
		}
		for i := 0; i < len(changes); i += 2 {
			out[changes[i].(string)] = changes[i+1]
		}
		return out
	}
	// The sine of a slope of 0.5 in plan over 100: 0.5/sqrt(100^2 + 0.5^2).
	const slope = "0.004999937501171851"
	const tail = `"section":{"diameter":0.3,"kind":"circular"},"units":"si"}`
	for _, c := range []struct {
		name    string
		cells   map[string]any
		points  [][2]any
		changes []string
		want    string
	}{
		{"a pipe", circle, nil, nil, `{"bed_slope":` + slope + `,"discharge":0.05,"roughness":{"manning":0.013},` + tail},
		{"texts", with("diameter", " 300 ", "up", "10.5", "down", "1e1", "flow", "5E1"), nil, nil, `{"bed_slope":` + slope + `,"discharge":0.05,"roughness":{"manning":0.013},` + tail},
		{"no material: the next source", with("material", nil), nil, nil, `{"bed_slope":` + slope + `,"discharge":0.05,"roughness":{"manning":0.03},` + tail},
		{"reversed, swapped", with("up", 10, "down", 10.5), nil, nil, `{"bed_slope":` + slope + `,"discharge":0.05,"roughness":{"manning":0.013},` + tail},
		{"reversed, kept", with("up", 10, "down", 10.5), nil, []string{"reversed: swap", "reversed: keep"}, `{"bed_slope":-` + slope + `,"discharge":0.05,"roughness":{"manning":0.013},` + tail},
		{"flat, kept", with("up", 10, "down", 10), nil, []string{"reversed: swap", "flat: keep"}, `{"bed_slope":0,"discharge":0.05,"roughness":{"manning":0.013},` + tail},
		{"length along the bed", circle, nil, []string{"length_along: plan", "length_along: bed"}, `{"bed_slope":0.005,"discharge":0.05,"roughness":{"manning":0.013},` + tail},
		{"a box has no diameter, a circle no width", with("shape", "B"), nil, nil,
			`{"bed_slope":` + slope + `,"discharge":0.05,"roughness":{"manning":0.013},"section":{"height":1.2,"kind":"box","width":0.9},"units":"si"}`},
		{"missing numbers", with("diameter", -999, "flow", 0), nil, nil, `{"bed_slope":` + slope + `,"roughness":{"manning":0.013},"section":{"kind":"circular"},"units":"si"}`},
		{"missing texts", with("diameter", "-999.0", "flow", " "), nil, nil, `{"bed_slope":` + slope + `,"roughness":{"manning":0.013},"section":{"kind":"circular"},"units":"si"}`},
		{"missing numbers in quotes", with("diameter", -999, "flow", 0), nil, []string{"missing: [0, -999]", `missing: ["0", "-999"]`}, `{"bed_slope":` + slope + `,"roughness":{"manning":0.013},"section":{"kind":"circular"},"units":"si"}`},
		{"missing of its own", with("diameter", -999, "flow", -1), nil, []string{"unit: l/s}", "unit: l/s, missing: [-1], default: 7}"},
			`{"bed_slope":` + slope + `,"discharge":0.007,"roughness":{"manning":0.013},"section":{"kind":"circular"},"units":"si"}`},
		{"a survey", with("shape", "S"), [][2]any{{0, 1.5}, {"2.5", 0}, {5, 1.25}}, nil,
			`{"bed_slope":` + slope + `,"discharge":0.05,"roughness":{"manning":0.013},"section":{"kind":"surveyed","points":[[0,1.5],[2.5,0],[5,1.25]]},"units":"si"}`},
		{"a survey in feet", with("shape", "S"), [][2]any{{0, 10}, {2.5, 0}}, []string{"level, unit: m}", "level, unit: ft}"},
			`{"bed_slope":` + slope + `,"discharge":0.05,"roughness":{"manning":0.013},"section":{"kind":"surveyed","points":[[0,3.048],[2.5,0]]},"units":"si"}`},
		// The levels are in feet then, the length still in metres: 0.5 ft over 100/0.3048 ft.
		{"feet asked for", circle, nil, []string{"units: si", "units: us", "flow, unit: l/s", "flow", "section_height: 1.2", "section_height: {constant: 12, unit: in}"},
			`{"bed_slope":0.001523998230200171,"discharge":50,"roughness":{"manning":0.013},"section":{"diameter":0.984251968503937,"kind":"circular"},"units":"us"}`},
	} {
		got, problems := request(t, c.cells, c.points, c.changes...)
		if got != c.want || len(problems) > 0 {
			t.Errorf("%s: %s %v\nwant %s", c.name, got, problems, c.want)
		}
	}
}

// Each way to write a slope, by hand; the contract's bed_slope is a sine, a side slope horizontal per vertical, a cross slope vertical per horizontal.
func TestSlopes(t *testing.T) {
	for _, c := range []struct {
		member, unit string
		cell         any
		want         float64
	}{
		{"bed_slope", "sine", 0.6, 0.6},
		{"bed_slope", "tangent", 0.75, 0.6}, // 3, 4, 5
		{"bed_slope", "%", 75, 0.6},
		{"bed_slope", "percent", "75", 0.6},
		{"bed_slope", "permille", 750, 0.6},
		{"bed_slope", "1:x", 4. / 3, 0.6},
		{"bed_slope", "1:x", "3:4", 0.6},
		{"bed_slope", "1:x", "1 : 200", 0.005 / math.Sqrt(1+0.005*0.005)},
		{"bed_slope", "degrees", 30, 0.5},
		{"side_slope", "x:1", 2, 2},
		{"side_slope", "x:1", "2:1", 2},
		{"side_slope", "1:x", "1:2", 2},
		{"side_slope", "1:x", 2, 2},
		{"side_slope", "%", 50, 2},
		{"side_slope", "tangent", 0.5, 2},
		{"side_slope", "degrees", 45, 1},
		{"cross_slope", "tangent", 0.02, 0.02},
		{"cross_slope", "%", 2, 0.02},
		{"cross_slope", "1:x", "1:50", 0.02},
	} {
		convert, found := converter(wire.Dimensionless, slopeOfMember([]string{c.member}), c.unit, wire.SI)
		if !found {
			t.Fatalf("%s in %s", c.member, c.unit)
		}
		w := writing{m: &Mapping{decimal: '.'}, row: Row{Values: []row.Value{valueOf(c.cell)}}}
		got, ok := w.number(&node{about: wire.MemberDescription{Path: []string{c.member}}}, &source{measure: measure{c.unit, convert}}, w.row.Values[0])
		if !ok || !(math.Abs(got-c.want) <= 1e-15) {
			t.Errorf("%s: %v in %s is %v, want %v; %v", c.member, c.cell, c.unit, got, c.want, w.problems)
		}
	}
	w := writing{m: &Mapping{decimal: '.'}}
	convert, _ := converter(wire.Dimensionless, sineSlope, "1:x", wire.SI)
	if _, ok := w.number(&node{about: wire.MemberDescription{Path: []string{"bed_slope"}}}, &source{name: "fall", measure: measure{"1:x", convert}}, row.OfInt(0)); ok || len(w.problems) != 1 {
		t.Error("1:0 is a slope")
	}
}

// Units against NIST Special Publication 811 (2008), appendix B.8, to the digits printed there (values from memory); exact ones in bold there.
func TestUnits(t *testing.T) {
	for _, c := range []struct {
		quantity wire.Quantity
		unit     string
		want     float64
		digits   float64
	}{
		{wire.QuantityLength, "in", 0.0254, 0},
		{wire.QuantityLength, "ft", 0.3048, 0},
		{wire.QuantityLength, "yd", 0.9144, 0},
		{wire.QuantityLength, "US survey ft", 0.3048006, 5e-7},
		{wire.QuantityArea, "ft2", 0.09290304, 0},
		{wire.QuantityArea, "in2", 6.4516e-4, 0},
		{wire.QuantityDischarge, "ft3/s", 2.831685e-2, 5e-7},
		{wire.QuantityDischarge, "l/s", 1e-3, 0},
		{wire.QuantityDischarge, "m3/h", 2.777778e-4, 5e-7},
		{wire.QuantityDischarge, "l/min", 1.666667e-5, 5e-7},
		{wire.QuantityDischarge, "m3/d", 1.157407e-5, 5e-7},
		{wire.QuantityVelocity, "km/h", 2.777778e-1, 5e-7},
		{wire.QuantityVelocity, "ft/s", 0.3048, 0},
		{wire.QuantityStress, "lbf/ft2", 47.88026, 5e-7},
		{wire.QuantityStress, "kPa", 1000, 0},
		{wire.QuantityKinematicViscosity, "mm2/s", 1e-6, 0}, // centistokes
		{wire.QuantityKinematicViscosity, "ft2/s", 9.290304e-2, 0},
	} {
		convert, found := converter(c.quantity, noSlope, c.unit, wire.SI)
		if !found || convert == nil {
			t.Fatalf("no unit %s", c.unit)
		}
		got, ok := convert(1)
		if !ok || !(math.Abs(got-c.want) <= c.digits*c.want) {
			t.Errorf("1 %s is %v, want %v", c.unit, got, c.want)
		}
	}
	// Both ways of writing one length are one number, for all whole millimetres up to 10 m.
	millimetres, _ := converter(wire.QuantityLength, noSlope, "mm", wire.SI)
	for mm := range 10_000 {
		got, _ := millimetres(float64(mm))
		if want := float64(mm) / 1000; got != want {
			t.Fatalf("%d mm is %v", mm, got)
		}
	}
	for q := range scales {
		for _, system := range []wire.System{wire.SI, wire.US} {
			if own := system.Unit(q); own != "" {
				if c, found := converter(q, noSlope, own, system); !found && q != wire.QuantityPowerPerArea || c != nil {
					t.Errorf("%v: %s is not the unit of %v", q, own, system)
				}
			}
		}
	}
}

// What is wrong with a row is told with its column, and where in the request it would stand.
func TestProblems(t *testing.T) {
	good := map[string]any{"asset": 1, "shape": "C", "diameter": 300, "material": "concrete", "up": 10.5, "down": 10.0, "length": 100, "flow": 50}
	for _, c := range []struct {
		column                string
		cell                  any
		code, pointer, detail string
		changes               []string
	}{
		{"shape", "X", CodeUnknownValue, "/section/kind", "there are C, B, S", nil},
		{"shape", "circle", CodeUnknownValue, "/section/kind", `did you mean "circular"`, []string{"\n    values: {C: circular, B: box, S: surveyed}", ""}},
		{"diameter", "300 mm", CodeNotANumber, "/section/diameter", `"300 mm", which is not a number`, nil},
		{"diameter", "0x12", CodeNotANumber, "/section/diameter", "not a number", nil},
		{"diameter", "1,5", CodeNotANumber, "/section/diameter", `set decimal to ","`, nil},
		{"diameter", "NaN", CodeNotANumber, "/section/diameter", "say so with missing", nil},
		{"diameter", math.NaN(), CodeNotANumber, "/section/diameter", "say so with missing", nil},
		{"diameter", math.Inf(1), CodeNotANumber, "/section/diameter", "not a number", nil},
		{"diameter", 1e200, CodeOutOfRange, "/section/diameter", "between 1e-100 and 1e100", nil},
		{"diameter", "1e-200", CodeOutOfRange, "/section/diameter", "between 1e-100 and 1e100", nil},
		{"diameter", true, CodeNotANumber, "/section/diameter", "true or false, not a number", nil},
		{"material", "wood", CodeUnknownValue, "/roughness/manning", "there are concrete", nil},
		{"length", 0.0, CodeMissing, "/bed_slope", "Column length is empty", nil}, // 0 is missing
		{"up", nil, CodeMissing, "/bed_slope", "Column up is empty", nil},
		{"length", -5, CodeLength, "/bed_slope", "not greater than 0", nil},
		{"down", 10.5, CodeFlat, "/bed_slope", "flat: keep", nil},
		{"down", 11, CodeReversed, "/bed_slope", "reversed: swap", []string{"reversed: swap", "reversed: report"}},
		{"length", 0.25, CodeLength, "/bed_slope", "more than the length along the bed", []string{"length_along: plan", "length_along: bed"}},
		{"shape", "S", CodeMissing, "/section/points", "no points", nil},
		{"flow", "1:200", CodeNotANumber, "/bed_slope", "needs the unit 1:x", []string{
			"    upstream_level: up\n    downstream_level: down\n    length: {column: length, unit: m}\n    length_along: plan\n    reversed: swap\n", "    column: flow\n", "flow, unit: l/s", "up"}},
	} {
		cells := map[string]any{}
		for k, v := range good {
			cells[k] = v
		}
		cells[c.column] = c.cell
		body, problems := request(t, cells, nil, c.changes...)
		if c.code == "" {
			if len(problems) > 0 {
				t.Errorf("%s %v: %v", c.column, c.cell, problems)
			}
			continue
		}
		if len(problems) != 1 || body != "" {
			t.Errorf("%s %v: %s %v", c.column, c.cell, body, problems)
			continue
		}
		p := problems[0]
		if p.Code != c.code || p.Pointer != c.pointer || !strings.Contains(p.Text, c.detail) || !strings.Contains(p.Column, c.column) && p.Code != CodeMissing {
			t.Errorf("%s %v: %+v", c.column, c.cell, p)
		}
	}
	// All at once.
	if _, problems := request(t, map[string]any{"shape": "X", "diameter": "a", "material": "b", "up": "c", "flow": "d"}, nil); len(problems) != 4 {
		t.Errorf("%v", problems) // the diameter counts for circles only
	}
}

// A canonical request is its own canonical form: its hash is the fingerprint that the service gives it, digit by digit.
func TestFingerprintOfCanonicalRequests(t *testing.T) {
	_, m, err := compileText(sound)
	if err != nil || !m.Canonical {
		t.Fatal(err, m)
	}
	random := rand.New(rand.NewPCG(1, 1))
	w := m.NewWriter()
	for range 3000 {
		r := Row{Values: make([]row.Value, len(m.Columns))}
		for i, name := range m.Columns {
			switch name {
			case "shape":
				r.Values[i] = row.OfString([]string{"C", "B", "S"}[random.IntN(3)])
			case "material":
				r.Values[i] = row.OfString([]string{"", "concrete"}[random.IntN(2)])
			default:
				v := random.NormFloat64() * math.Pow(10, float64(random.IntN(60)-30))
				r.Values[i] = row.OfFloat([]float64{v, math.Abs(v), math.Trunc(v), 0}[random.IntN(4)])
			}
		}
		for range 2 * random.IntN(4) {
			r.Children = append(r.Children, row.OfFloat(random.NormFloat64()))
		}
		body, problems := w.Append(nil, r)
		if len(problems) > 0 {
			continue
		}
		want, problem := operation.Depths.Fingerprint(body, operation.Options{})
		if problem != nil {
			t.Fatalf("%s: %v", body, problem)
		}
		sum := sha256.Sum256([]byte("depths\n" + compute.EngineVersion + "\n" + string(body)))
		if got := hex.EncodeToString(sum[:]); got != want {
			t.Fatalf("%s: %s, want %s", body, got, want)
		}
	}
}

// A list in a cell is JSON as it stands there, checked to be a list, so that it can bring no members with it.
func TestListsInCells(t *testing.T) {
	changes := []string{"  points:\n    path: points.csv\n    key: asset\n    order: number\n    offset: station\n    level: {column: level, unit: m}\n", "", "section_height: 1.2", "section_points: width", "  section_width: {column: width, unit: mm, for: [box]}\n", ""}
	cells := map[string]any{"asset": 1, "shape": "S", "material": "concrete", "up": 10.5, "down": 10.0, "length": 100, "flow": 50}
	for cell, good := range map[string]bool{
		`[[0, 1], [2.50, 0]]`: true, `[]`: true, `[[0,1]],"x":1`: false, `{"a":1}`: false, `[1`: false, `[1] [2]`: false, `"[1]"`: false, `3`: false,
	} {
		for _, v := range []any{cell, []byte(cell)} {
			cells["width"] = v
			body, problems := request(t, cells, nil, changes...)
			if (len(problems) == 0) != good || good && !strings.Contains(body, `"points":`+cell) {
				t.Errorf("%s: %s %v", cell, body, problems)
			}
		}
	}
	_, m, err := compileText(strings.NewReplacer(changes...).Replace(sound))
	if err != nil || m.Canonical {
		t.Errorf("not canonical any more: %v", err)
	}
}

// A fault that the service finds leads back to the columns that feed the member.
func TestColumnsAtPointers(t *testing.T) {
	_, m, err := compileText(sound)
	if err != nil {
		t.Fatal(err)
	}
	for pointer, want := range map[string]string{
		"/section/diameter": "diameter", "/section/points/3/1": "station, level", "/bed_slope": "up, down, length", "/roughness": "material",
		"/section": "diameter, shape, station, level, width", "/discharge": "flow", "": "", "/gravity": "",
	} {
		if got := m.ColumnsAt(pointer); got != want {
			t.Errorf("%q: %q, want %q", pointer, got, want)
		}
	}
}

// Making a request allocates nothing once its buffer has grown.
func TestRequestsAllocateNothing(t *testing.T) {
	_, m, err := compileText(sound)
	if err != nil {
		t.Fatal(err)
	}
	r := Row{Values: make([]row.Value, len(m.Columns))}
	for i, name := range m.Columns {
		r.Values[i] = valueOf(map[string]any{"asset": 1, "shape": "C", "diameter": 300, "material": "concrete", "up": 10.5, "down": 10.0, "length": 100, "flow": 50}[name])
	}
	w, buffer := m.NewWriter(), make([]byte, 0, 1024)
	if n := testing.AllocsPerRun(100, func() {
		if _, problems := w.Append(buffer, r); len(problems) > 0 {
			t.Fatal(problems)
		}
	}); n != 0 {
		t.Errorf("%v allocations", n)
	}
}
