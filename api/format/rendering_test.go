package format

import (
	"encoding/csv"
	"encoding/json"
	"fmt"
	"math"
	"strings"
	"testing"

	"leat/api/operation"
	"leat/api/wire"
)

// The forms that each operation offers beside JSON.
func TestRenderings(t *testing.T) {
	for _, c := range []struct {
		op   operation.Operation
		want string
	}{
		{operation.Section, "text/csv"}, {operation.Depths, "text/csv"}, {operation.Rating, "text/csv"},
		{operation.Profile, "text/csv application/geo+json"}, {operation.Operation{}, ""},
	} {
		var got []string
		for _, r := range Renderings(&c.op) {
			got = append(got, r.MediaType)
		}
		if strings.Join(got, " ") != c.want {
			t.Errorf("%s offers %v, want %s", c.op.Name, got, c.want)
		}
	}
}

// A table is read back by the standard library's reader of RFC 4180 as what the JSON says.
func TestTableOfARating(t *testing.T) {
	body := []byte(`{"section":{"kind":"circular","diameter":1},"roughness":{"manning":0.013},"bed_slope":0.004,"kind":"critical","from_depth":0.5,"to_depth":1,"count":3}`)
	solved, problem := operation.Rating.Solve(body, operation.Options{})
	if problem != nil {
		t.Fatal(problem)
	}
	text, problem := appendTable([]byte("before"), &solved)
	if problem != nil || !strings.HasPrefix(string(text), "beforedischarge,depth,area,") || strings.Count(string(text), "\r\n") != 4 || strings.Count(string(text), "\n") != 4 {
		t.Fatalf("%s %v", text, problem)
	}
	records, err := csv.NewReader(strings.NewReader(string(text[6:]))).ReadAll()
	if err != nil {
		t.Fatal(err)
	}
	var answer struct{ States []map[string]any }
	if err := json.Unmarshal(solved.AppendJSON(nil, false), &answer); err != nil {
		t.Fatal(err)
	}
	compared := 0
	for i, state := range answer.States {
		for j, name := range records[0] {
			want := fmt.Sprint(state[name])
			if state[name] == nil {
				want = ""
			}
			if got := records[i+1][j]; got != want && fmt.Sprint(state[name]) != fmt.Sprint(number(got)) {
				t.Errorf("row %d, %s: %q, want %s", i, name, got, want)
			}
			compared++
		}
	}
	if compared != 3*19 {
		t.Errorf("%d cells compared", compared)
	}
}

func number(text string) float64 {
	var v float64
	if err := json.Unmarshal([]byte(text), &v); err != nil {
		return math.NaN()
	}
	return v
}

func TestCellsAreQuoted(t *testing.T) {
	for text, want := range map[string]string{"": "", "a b": "a b", "a,b": `"a,b"`, `a"b`: `"a""b"`, "a\nb": "\"a\nb\"", `"`: `""""`, "é": "é"} {
		if got := string(quoteCell([]byte("x,"+text), 2)); got != "x,"+want {
			t.Errorf("%q: %q, want %q", text, got, "x,"+want)
		}
	}
}

// alongLine is an answer of three stations and a jump on a run of 200 ft.
func alongLine(geometry *wire.Geometry) *operation.Solved {
	const ft = 0.3048
	station := func(chainage, level float64) wire.ProfileStation {
		return wire.ProfileStation{Chainage: chainage * ft, Reach: wire.ID(`"a"`), WaterLevel: level * ft, State: wire.State{Depth: ft}}
	}
	return &operation.Solved{Units: wire.US, ID: wire.ID(`7`), Answer: &wire.ProfileAnswer{
		Stations: []wire.ProfileStation{station(0, 12), station(50, 11), station(200, 10)},
		Jumps:    []wire.ProfileJump{{Chainage: 150 * ft, Reach: wire.ID(`"a"`), WaterLevel: math.NaN(), Form: "weak"}},
		Extent:   math.NaN(), Geometry: geometry, Length: 200 * ft,
	}}
}

// Stations and jumps stand on the geometry by their share of the whole length: here a line of 3 + 4 + 5 in three directions.
func TestPlaces(t *testing.T) {
	line := &wire.Geometry{Given: true, Type: "LineString", Coordinates: []wire.Position{
		{Ordinates: [4]float64{100, 10}, Count: 2}, {Ordinates: [4]float64{103, 10, 77}, Count: 3}, {Ordinates: [4]float64{103, 10}, Count: 2},
		{Ordinates: [4]float64{103, 14}, Count: 2}, {Ordinates: [4]float64{106, 18, 1, 2}, Count: 4}}}
	text, problem := appendPlaces(nil, alongLine(line))
	if problem != nil {
		t.Fatal(problem)
	}
	var got struct {
		Type     string
		ID       int
		Units    string
		Extent   any
		Warnings []any
		Balance  map[string]any
		Features []struct {
			Type     string
			Geometry struct {
				Type        string
				Coordinates []float64
			}
			Properties map[string]any
		}
	}
	if err := json.Unmarshal(text, &got); err != nil {
		t.Fatalf("%s: %v", text, err)
	}
	if got.Type != "FeatureCollection" || got.ID != 7 || got.Units != "us" || got.Extent != nil || got.Warnings == nil || got.Balance == nil || len(got.Features) != 4 {
		t.Fatalf("%+v", got)
	}
	for i, want := range []struct {
		feature     string
		coordinates []float64
	}{
		{"station", []float64{100, 10, 12}},
		{"station", []float64{103, 10, 11}}, // 3 of 12 along
		{"station", []float64{106, 18, 10}},
		{"jump", []float64{104.2, 15.6}}, // 9 of 12 along: 2 of 5 up the last stretch
	} {
		f := got.Features[i]
		ok := f.Type == "Feature" && f.Geometry.Type == "Point" && f.Properties["feature"] == want.feature && f.Properties["reach"] == "a" && len(f.Geometry.Coordinates) == len(want.coordinates)
		for j := range want.coordinates {
			ok = ok && math.Abs(f.Geometry.Coordinates[j]-want.coordinates[j]) <= 1e-12*want.coordinates[j]
		}
		if !ok {
			t.Errorf("feature %d: %+v, want %+v", i, f, want)
		}
	}
	if p := got.Features[0].Properties; p["depth"] != 1.0 || p["chainage"] != 0.0 {
		t.Errorf("properties %v", p)
	}
	if p := got.Features[3].Properties; p["form"] != "weak" {
		t.Errorf("properties %v", p)
	}
}

func TestPlacesNeedAGeometry(t *testing.T) {
	dst := []byte("x")
	text, problem := appendPlaces(dst, alongLine(nil))
	if problem == nil || problem.Status != 406 || !strings.Contains(problem.Detail, "geometry") || string(text) != "x" {
		t.Errorf("%s %v", text, problem)
	}
}
