package picture

import (
	"bytes"
	"encoding/json"
	"encoding/xml"
	"io"
	"math"
	"strconv"
	"strings"
	"testing"

	"leat/api/operation"
)

// A drawing is what a reader of the SVG sees: texts and lines with their places.
type drawing struct {
	Title string `xml:"title"`
	Desc  string `xml:"desc"`
	Role  string `xml:"role,attr"`
	Texts []struct {
		Class  string  `xml:"class,attr"`
		X      float64 `xml:"x,attr"`
		Y      float64 `xml:"y,attr"`
		Anchor string  `xml:"text-anchor,attr"`
		Text   string  `xml:",chardata"`
	} `xml:"text"`
	Paths []struct {
		Class string `xml:"class,attr"`
		D     string `xml:"d,attr"`
	} `xml:"path"`
}

func read(t *testing.T, svg []byte) drawing {
	t.Helper()
	decoder := xml.NewDecoder(bytes.NewReader(svg))
	for {
		if _, err := decoder.Token(); err == io.EOF {
			break
		} else if err != nil {
			t.Fatalf("the SVG is no XML: %v", err)
		}
	}
	var d drawing
	if err := xml.Unmarshal(svg, &d); err != nil {
		t.Fatal(err)
	}
	return d
}

// points reads the path of a line or an area.
func points(t *testing.T, d string) (out [][2]float64) {
	t.Helper()
	fields := strings.FieldsFunc(d, func(r rune) bool { return r == 'M' || r == 'L' || r == 'Z' || r == ' ' })
	for i := 0; i+1 < len(fields); i += 2 {
		x, err := strconv.ParseFloat(fields[i], 64)
		y, err2 := strconv.ParseFloat(fields[i+1], 64)
		if err != nil || err2 != nil || math.IsNaN(x+y) {
			t.Fatalf("%q is no path", d)
		}
		out = append(out, [2]float64{x, y})
	}
	return out
}

// An axis reads values off the paper by two of its own ticks.
type axis struct{ a, b float64 }

func (s axis) value(place float64) float64 { return s.a + s.b*place }

// readAxes finds the first upright and the first level axis by their numbers: those that end left of the plot, and those below it.
func readAxes(t *testing.T, d drawing) (across, up axis) {
	t.Helper()
	var level, upright [][2]float64
	height := 0.0 // of the numbers of the level axis
	for _, text := range d.Texts {
		value, err := strconv.ParseFloat(text.Text, 64)
		switch {
		case err != nil:
		case text.Anchor == "end" && (len(upright) == 0 || text.Y < upright[len(upright)-1][0]):
			upright = append(upright, [2]float64{text.Y - 4, value})
		case text.Anchor == "middle" && (len(level) == 0 || text.X > level[len(level)-1][0] && text.Y == height):
			height = text.Y
			level = append(level, [2]float64{text.X, value})
		}
	}
	fit := func(name string, marks [][2]float64) axis {
		if len(marks) < 2 {
			t.Fatalf("no %s axis can be read", name)
		}
		first, last := marks[0], marks[len(marks)-1]
		slope := (last[1] - first[1]) / (last[0] - first[0])
		s := axis{first[1] - slope*first[0], slope}
		for _, m := range marks {
			if got := s.value(m[0]); !(math.Abs(got-m[1]) <= 0.02*math.Abs(slope)) {
				t.Errorf("the %s axis is not straight: %g stands where %g belongs", name, m[1], got)
			}
		}
		return s
	}
	return fit("level", level), fit("upright", upright)
}

// TestLinesStandWhereTheNumbersAre reads depths off the paper, by the numbers at the axis alone, and compares them with those that the answer tells as JSON.
func TestLinesStandWhereTheNumbersAre(t *testing.T) {
	compared := 0
	for _, s := range golden(t) {
		if s.op != &operation.Depths {
			continue
		}
		solved := s.solved(t)
		var answer map[string]any
		if err := json.Unmarshal(solved.AppendJSON(nil, true), &answer); err != nil {
			t.Fatal(err)
		}
		d := read(t, s.svg(t))
		_, up := readAxes(t, d)
		for class, member := range map[string]string{"normal": "normal_depth", "critical": "critical_depth", "given": "", "alternate": "alternate_depth", "sequent": "sequent_depth"} {
			want, given := answer[member].(float64)
			if inside, ok := answer["given"].(map[string]any); ok && !given {
				if want, given = answer[member].(float64); !given {
					want, given = inside[member].(float64)
				}
				if class == "given" {
					want, given = inside["depth"].(float64)
				}
			}
			if !given {
				continue
			}
			found := false
			for _, p := range d.Paths {
				if line := points(t, p.D); p.Class == class && len(line) == 2 && line[0][1] == line[1][1] && math.Abs(up.value(line[0][1])-want) <= 0.03*math.Abs(up.b) {
					found = true
				}
			}
			if !found {
				t.Errorf("%s: no line of class %s stands at %g", s.name, class, want)
			}
			compared++
		}
	}
	if compared < 20 {
		t.Errorf("only %d lines were compared", compared)
	}
}

// TestProfilesStandWhereTheNumbersAre does the same with every station of a long section: chainage, water level and energy level.
func TestProfilesStandWhereTheNumbersAre(t *testing.T) {
	compared := 0
	for _, s := range golden(t) {
		if s.op != &operation.Profile {
			continue
		}
		solved := s.solved(t)
		var answer struct {
			Stations []struct {
				Chainage float64
				Water    float64 `json:"water_level"`
				Energy   float64 `json:"energy_level"`
				Bed      float64 `json:"bed_level"`
			}
			Jumps []struct{ Chainage float64 }
		}
		if err := json.Unmarshal(solved.AppendJSON(nil, true), &answer); err != nil {
			t.Fatal(err)
		}
		d := read(t, s.svg(t))
		across, up := readAxes(t, d)
		longest := func(class string) (out [][2]float64) {
			for _, p := range d.Paths {
				if line := points(t, p.D); p.Class == class && len(line) > 1 && line[len(line)-1][0]-line[0][0] > 300 {
					return line
				}
			}
			t.Fatalf("%s has no line of class %s", s.name, class)
			return nil
		}
		// near reports whether a line passes within some hundredths of a unit of a place.
		near := func(line [][2]float64, chainage, level float64) bool {
			x, y := (chainage-across.a)/across.b, (level-up.a)/up.b
			for i := 1; i < len(line); i++ {
				if distance(line[i-1], line[i], x, y) < 0.35 {
					return true
				}
			}
			return false
		}
		water, energy, bed := longest("water-line"), longest("energy"), longest("bed")
		for _, station := range answer.Stations {
			for class, row := range map[string]struct {
				line  [][2]float64
				level float64
			}{"water-line": {water, station.Water}, "energy": {energy, station.Energy}, "bed": {bed, station.Bed}} {
				if !near(row.line, station.Chainage, row.level) {
					t.Errorf("%s: the line of class %s does not pass %g at chainage %g", s.name, class, row.level, station.Chainage)
				}
				compared++
			}
		}
		for _, jump := range answer.Jumps {
			found := false
			for _, p := range d.Paths {
				if line := points(t, p.D); p.Class == "jump" && len(line) == 2 && math.Abs(across.value(line[0][0])-jump.Chainage) <= 0.05*across.b {
					found = true
				}
			}
			if !found {
				t.Errorf("%s: no jump stands at %g", s.name, jump.Chainage)
			}
		}
	}
	if compared < 80 {
		t.Errorf("only %d places were compared", compared)
	}
}

// distance returns how far a place is from a piece of line.
func distance(a, b [2]float64, x, y float64) float64 {
	dx, dy := b[0]-a[0], b[1]-a[1]
	share := 0.0
	if dx != 0 || dy != 0 {
		share = max(0, min(1, ((x-a[0])*dx+(y-a[1])*dy)/(dx*dx+dy*dy)))
	}
	return math.Hypot(x-a[0]-share*dx, y-a[1]-share*dy)
}

// TestPicturesCanBeReadAloud: a title, a description and a role; a caller's id stands in them as text, whatever it holds.
func TestPicturesCanBeReadAloud(t *testing.T) {
	for _, s := range golden(t) {
		d := read(t, s.svg(t))
		if d.Title == "" || len(d.Desc) < 40 || d.Role != "img" || strings.Contains(d.Desc, "NaN") {
			t.Errorf("%s: title %q, description %q, role %q", s.name, d.Title, d.Desc, d.Role)
		}
	}
	id, err := json.Marshal("</title><script>\u0001\uFFFE\U0001F600&'\"" + strings.Repeat("long ", 40))
	if err != nil {
		t.Fatal(err)
	}
	s := sample{"id", &operation.Section, []byte(`{"id":` + string(id) + `,"section":{"kind":"circular","diameter":1},"depth":0.4}`)}
	d := read(t, s.svg(t))
	if !strings.HasPrefix(d.Title, "Section of </title><script>\uFFFD\uFFFD\U0001F600&'\"long") {
		t.Errorf("%q", d.Title)
	}
}

// TestSizesAtTheLimits draws what is as small, as large and as long as requests may have it: every coordinate is a number on or near the paper.
func TestSizesAtTheLimits(t *testing.T) {
	for _, row := range []struct {
		op   *operation.Operation
		body string
	}{
		{&operation.Section, `{"section":{"kind":"rectangular","bottom_width":1e-9},"depth":1e9}`},
		{&operation.Section, `{"section":{"kind":"rectangular","bottom_width":1e9},"depth":1e-18}`},
		{&operation.Section, `{"section":{"kind":"triangular","side_slope":1e6},"depths":[1e-18,1e-9,1,1e9]}`},
		{&operation.Section, `{"section":{"kind":"tabulated","rows":[[1,1,2,0.001]]},"depth":1}`},
		{&operation.Section, `{"section":{"kind":"surveyed","points":[[0,-1e9],[0,1e9],[1e-9,-1e9]]},"depth":1e-9}`},
		{&operation.Section, `{"section":{"kind":"gutter","cross_slope":1e-6,"curb_height":1e9},"depth":1e-9}`},
		{&operation.Section, `{"section":{"kind":"egg","height":1e-9},"depth":1e-9}`},
		{&operation.Depths, `{"section":{"kind":"trapezoidal","bottom_width":1e-6,"side_slope":0},"roughness":{"manning":1e3},"bed_slope":1e-15,"discharge":1e-15}`},
		{&operation.Depths, `{"section":{"kind":"parabolic","top_width":1e9,"height":1e-9},"roughness":{"manning":0.01},"bed_slope":0.9,"discharge":1e12,"depth":1e-18}`},
		{&operation.Depths, `{"section":{"kind":"circular","diameter":1},"roughness":{"manning":0.01},"bed_slope":-0.1,"discharge":1e9,"depth":1}`},
		{&operation.Rating, `{"section":{"kind":"circular","diameter":1},"roughness":{"manning":0.01},"bed_slope":0.01,"kind":"critical","from_depth":0.9,"to_depth":1,"count":3}`},
		{&operation.Rating, `{"section":{"kind":"circular","diameter":1},"roughness":{"manning":0.01},"bed_slope":0.01,"kind":"uniform","discharges":[1e9]}`},
		{&operation.Rating, `{"section":{"kind":"circular","diameter":1},"roughness":{"manning":0.01},"bed_slope":0.01,"kind":"uniform","discharges":[0.5]}`},
		{&operation.Profile, `{"discharge":1,"reaches":[{"length":1e-9,"bed_slope":0,"section":{"kind":"rectangular","bottom_width":1},"roughness":{"manning":0.01}}],"downstream":{"depth":1}}`},
		{&operation.Profile, `{"discharge":1,"reaches":[{"length":1e4,"bed_slope":-0.5,"section":{"kind":"rectangular","bottom_width":1},"roughness":{"manning":0.01}}],"downstream":{"control":"critical"}}`},
		{&operation.Profile, `{"discharge":1,"datum":1e9,"reaches":[{"length":10,"bed_slope":0.01,"section":{"kind":"rectangular","bottom_width":1},"roughness":{"manning":0.01}}],"downstream":{"depth":2}}`},
	} {
		solved, problem := row.op.Solve([]byte(row.body), operation.Options{})
		if problem != nil {
			t.Errorf("%s: %v", row.body, problem)
			continue
		}
		svg, problem := AppendSVG(nil, &solved)
		if problem != nil {
			t.Errorf("%s: %v", row.body, problem)
			continue
		}
		for _, p := range read(t, svg).Paths {
			for _, at := range points(t, p.D) {
				if !(math.Abs(at[0]) < 3000 && math.Abs(at[1]) < 3000) {
					t.Errorf("%s: a line of class %s goes to %v", row.body, p.Class, at)
				}
			}
		}
		if _, problem := AppendPNG(nil, &solved); problem != nil {
			t.Errorf("%s: %v", row.body, problem)
		}
	}
}
