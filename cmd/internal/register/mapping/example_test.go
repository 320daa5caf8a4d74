package mapping

import (
	"os"
	"path/filepath"
	"regexp"
	"strings"
	"testing"

	"leat/cmd/internal/register/row"
)

var examples = filepath.Join("..", "..", "..", "..", "deploy", "register")

// The example that shows everything is sound, and so are the others.
func TestExamples(t *testing.T) {
	f, err := Load(filepath.Join(examples, "mapping.yaml"))
	if err != nil {
		t.Fatal(err)
	}
	var columns, points []row.Column
	for _, name := range strings.Fields("asset status district closed year owner surveyed street shape size height width side bank pipes material up down length q10 q100 class least_velocity") {
		columns = append(columns, row.Column{Name: name})
	}
	for _, name := range strings.Fields("drain number station height") {
		points = append(points, row.Column{Name: name})
	}
	m, err := f.Compile(columns, points)
	if err != nil {
		t.Fatal(err)
	}
	r := Row{Values: make([]row.Value, len(m.Columns))}
	for i, name := range m.Columns {
		r.Values[i] = valueOf(map[string]any{
			"asset": "A", "shape": "SURVEY", "material": "brick", "up": "12,5", "down": "12,25", "length": "50", "q10": "120", "q100": "300,5", "class": "trunk",
		}[name])
	}
	r.Children = []row.Value{row.OfString("0"), row.OfString("1,5"), row.OfString("250"), row.OfString("0"), row.OfString("500"), row.OfString("1,5")}
	body, problems := m.NewWriter().Append(nil, r)
	const want = `{"barrels":1,"bed_slope":0.004999937501171851,"criteria":{"critical_band":[0.86,1.13],"greatest_velocity":3,"least_freeboard":0.3},` +
		`"flows":{"hundred_years":0.3005,"ten_years":0.12},"roughness":{"sand_roughness":0.003},` +
		`"section":{"kind":"surveyed","points":[[0,1.5],[2.5,0],[5,1.5]]},"units":"si"}`
	if string(body) != want || len(problems) > 0 {
		t.Errorf("%s %v", body, problems)
	}
	others, _ := filepath.Glob(filepath.Join(examples, "*.yaml"))
	if len(others) < 3 {
		t.Errorf("only %v", others)
	}
	for _, path := range others {
		if _, err := Load(path); err != nil {
			t.Error(err)
		}
	}
}

// The description names every member that may stand in a file, and every unit.
func TestDescriptionIsWhole(t *testing.T) {
	text, err := os.ReadFile(filepath.Join(examples, "MAPPING.md"))
	if err != nil {
		t.Fatal(err)
	}
	described := map[string]bool{}
	for _, word := range regexp.MustCompile("`[^`]+`").FindAllString(string(text), -1) {
		described[strings.Trim(word, "`")] = true
	}
	// What a file with a wrong member is told that there is.
	for _, wrong := range []struct{ old, new string }{
		{"units: si", "zzzzzzzz: 1"},
		{"  path: drains.csv", "  path: drains.csv\n  zzzzzzzz: 1"},
		{"  path: results.csv", "  path: results.csv\n  zzzzzzzz: 1"},
		{"    order: number", "    zzzzzzzz: 1"},
		{"    status: in_use", "    status: {zzzzzzzz: 1}"},
		{"unit: mm, for", "zzzzzzzz: mm, for"},
		{"    reversed: swap", "    zzzzzzzz: swap"},
		{"  discharge: {", "  discharge: {zzzzzzzz: 1, "},
	} {
		_, err := Parse("m.yaml", []byte(strings.Replace(sound, wrong.old, wrong.new, 1)))
		_, names, found := strings.Cut(err.Error(), "; there are ")
		if !found {
			t.Fatal(err)
		}
		names, _, _ = strings.Cut(names, ".\n")
		for _, name := range strings.Split(strings.TrimSuffix(names, "."), ", ") {
			if !described[name] {
				t.Errorf("%s is not described", name)
			}
		}
	}
	for q, units := range scales {
		for _, u := range units {
			if q.String() != "area" && q.String() != "discharge_per_length" && q.String() != "power_per_area" && q.String() != "manning" && q.String() != "strickler" && !described[u.name] {
				t.Errorf("the unit %s of %v is not described", u.name, q)
			}
		}
	}
	for _, u := range slopeUnits {
		if !described[u.name] {
			t.Errorf("the unit %s of slopes is not described", u.name)
		}
	}
}
