package mapping

import (
	"errors"
	"fmt"
	"strings"
	"testing"

	"leat/cmd/internal/register/row"
)

// sound is a mapping file without faults; a test changes lines of it.
const sound = `operation: depths
units: si
source:
  format: csv
  path: drains.csv
  key: asset
  filter:
    status: in_use
  points:
    path: points.csv
    key: asset
    order: number
    offset: station
    level: {column: level, unit: m}
target:
  format: csv
  path: results.csv
  columns: [normal_depth, capacity_ratio]
  copy: [status]
missing: [0, -999]
columns:
  section_kind:
    column: shape
    values: {C: circular, B: box, S: surveyed}
  section_diameter: {column: diameter, unit: mm}
  section_width: {column: width, unit: mm, for: [box]}
  section_height: 1.2
  roughness_manning:
    - {column: material, values: {concrete: 0.013}}
    - 0.03
  bed_slope:
    upstream_level: up
    downstream_level: down
    length: {column: length, unit: m}
    length_along: plan
    reversed: swap
  discharge: {column: flow, unit: l/s}
`

var tableColumns = []row.Column{
	{Name: "asset"}, {Name: "status"}, {Name: "shape"}, {Name: "diameter"}, {Name: "width"}, {Name: "material"}, {Name: "up"}, {Name: "down"},
	{Name: "length"}, {Name: "flow"}, {Name: "slope"},
}

var pointColumns = []row.Column{{Name: "asset"}, {Name: "number"}, {Name: "station"}, {Name: "level"}}

// compileText parses and compiles, as a command does.
func compileText(text string) (*File, *Mapping, error) {
	f, err := Parse("m.yaml", []byte(text))
	if err != nil {
		return nil, nil, err
	}
	m, err := f.Compile(tableColumns, pointColumns)
	return f, m, err
}

func TestSoundFile(t *testing.T) {
	if _, _, err := compileText(sound); err != nil {
		t.Fatal(err)
	}
}

// Every fault names the line where it stands and says what would be accepted.
func TestEveryFaultHasItsLine(t *testing.T) {
	for _, c := range []struct {
		name, old, new string
		line           int
		want           string
	}{
		{"not YAML", "operation: depths", "operation: [depths", 0, "This is not YAML"},
		{"no mapping", sound, "depths", 1, "must have members"},
		{"empty", sound, "", 0, "one YAML document"},
		{"member twice", "units: si", "operation: depths", 2, "already defined"},
		{"unknown top member", "units: si", "unit: si", 2, `did you mean "units"`},
		{"unknown operation", "operation: depths", "operation: depth", 1, `did you mean "depths"`},
		{"operation without flat answers", "operation: depths", "operation: profile", 1, "it is one of"},
		{"no operation", "operation: depths\n", "", 1, "operation is missing"},
		{"operation of another type", "operation: depths", "operation: 3", 1, "the number 3"},
		{"unknown units", "units: si", "units: metric", 2, "it is one of si, us"},
		{"unknown source member", "  key: asset\n  filter", "  keys: asset\n  filter", 6, `did you mean "key"`},
		{"unknown format", "source:\n  format: csv", "source:\n  format: cvs", 4, `did you mean "csv"`},
		{"no format", "source:\n  format: csv", "source:", 3, "source has no format"},
		{"no key", "  key: asset\n  filter", "  filter", 3, "source has no key"},
		{"no path", "  path: drains.csv\n", "", 3, "source has no path"},
		{"table of a file", "  path: drains.csv", "  path: drains.csv\n  table: x", 6, "has no tables"},
		{"no table", "target:\n  format: csv", "target:\n  format: postgres", 15, "target has no table"},
		{"password", "  path: results.csv", "  path: results.csv\n  password: secret", 18, "PGPASSWORD"},
		{"path of another type", "  path: drains.csv", "  path: [drains.csv]", 5, "a list"},
		{"delimiter", "  path: drains.csv", "  path: drains.csv\n  delimiter: x", 6, "delimiter must be one of"},
		{"decimal", "  path: drains.csv", "  path: drains.csv\n  decimal: x", 6, "decimal must be"},
		{"unknown key column", "  key: asset\n  filter", "  key: aset\n  filter", 6, `did you mean "asset"`},
		{"unknown filter column", "    status: in_use", "    staus: in_use", 8, `did you mean "status"`},
		{"unknown comparison", "    status: in_use", "    status: {atleast: 3}", 8, `did you mean "at_least"`},
		{"comparison with a list", "    status: in_use", "    status: {at_least: [1, 2]}", 8, "must be one value"},
		{"null in a filter's list", "    status: in_use", "    status: [a, null]", 8, "cannot hold null"},
		{"points without a key", "    key: asset\n    order", "    order", 9, "points has no key"},
		{"unknown column of points", "    offset: station", "    offset: statoin", 13, `did you mean "station"`},
		{"unknown order of points", "    order: number", "    order: numbr", 12, `did you mean "number"`},
		{"points in a wrong unit", "unit: m}\ntarget", "unit: l/s}\ntarget", 14, "it may be in m, mm"},
		{"overwrite of another type", "  path: results.csv", "  path: results.csv\n  overwrite: 1", 18, "true or false"},
		{"unknown copied column", "  copy: [status]", "  copy: [stats]", 19, `did you mean "status"`},
		{"copied key", "  copy: [status]", "  copy: [asset]", 19, "as asset"},
		{"columns empty", "columns:\n  section_kind:", "columns:\nflows:\n  section_kind:", 21, "columns is empty"},
		{"unknown member", "  section_diameter:", "  section_diametr:", 25, `did you mean "section_diameter"`},
		{"id", "  section_diameter:", "  id: asset\n  section_diameter:", 25, "key column"},
		{"units as a column", "  section_diameter:", "  units: status\n  section_diameter:", 25, "top of the mapping"},
		{"object as a member", "  section_diameter:", "  section: status\n  section_diameter:", 25, "no member"},
		{"many depths", "  discharge: {column: flow, unit: l/s}", "  depths: flow", 37, "feed depth, not depths"},
		{"unknown column", "{column: diameter, unit: mm}", "{column: diamter, unit: mm}", 25, `did you mean "diameter"`},
		{"kind as a column", "  section_kind:\n    column: shape\n    values: {C: circular, B: box, S: surveyed}\n", "  section_kind: circular\n", 22, "{constant: circular}"},
		{"unknown column, short", "    upstream_level: up", "    upstream_level: upp", 32, `did you mean "up"`},
		{"unknown unit", "{column: diameter, unit: mm}", "{column: diameter, unit: milimetre}", 25, "it may be in m, mm"},
		{"unit of another quantity", "{column: flow, unit: l/s}", "{column: flow, unit: mm}", 37, "it may be in m3/s, l/s"},
		{"unit of no number", "    column: shape", "    column: shape\n    unit: m", 24, "has no unit"},
		{"constant beyond its bounds", "    - 0.03", "    - -0.03", 30, "manning must be from 1e-6"},
		{"value of a table beyond its bounds", "{concrete: 0.013}", "{concrete: 1300}", 29, "manning must be from 1e-6"},
		{"converted constant beyond its bounds", "section_height: 1.2", "section_height: {constant: 1e13, unit: mm}", 27, "not 10000000000"},
		{"unknown kind in a table", "S: surveyed", "S: surveied", 24, `did you mean "surveyed"`},
		{"number for a name", "S: surveyed", "S: 3", 24, "section_kind cannot be"},
		{"text for a number in a table", "concrete: 0.013", "concrete: smooth", 29, "must be a number"},
		{"unknown kind in for", "for: [box]", "for: [Box]", 26, `did you mean "box"`},
		{"kind without the member", "for: [box]", "for: [circular]", 26, "no member of the kind circular"},
		{"unknown member of a column", "unit: mm, for", "units: mm, for", 26, `did you mean "unit"`},
		{"neither column nor constant", "{column: width, unit: mm, for: [box]}", "{unit: mm}", 26, "needs a column or a constant"},
		{"both", "{column: width, unit: mm, for: [box]}", "{column: width, constant: 3}", 26, "not from both"},
		{"values of a constant", "{column: width, unit: mm, for: [box]}", "{constant: 3, default: 4}", 26, "belong to columns"},
		{"true for a number", "section_height: 1.2", "section_height: true", 27, "must be a number"},
		{"null for a number", "section_height: 1.2", "section_height: null", 27, "must be a number"},
		{"length_along missing", "    length_along: plan\n", "", 32, "length_along is missing"},
		{"length missing", "    length: {column: length, unit: m}\n", "", 32, "length is missing"},
		{"unknown reversal", "reversed: swap", "reversed: mend", 36, "report, swap, keep"},
		{"column and levels", "    reversed: swap", "    column: slope", 32, "not from both"},
		{"table of values for levels", "    reversed: swap", "    values: {a: 1}", 32, "belong to upstream_level"},
		{"member fed twice", "  discharge:", "  section_height: 2\n  discharge:", 37, "already defined"},
		{"nothing feeds discharge", "  discharge: {column: flow, unit: l/s}\n", "", 21, "Nothing feeds discharge"},
		{"nothing feeds the kind", "  section_kind:\n    column: shape\n    values: {C: circular, B: box, S: surveyed}\n", "", 21, "Nothing feeds section_kind"},
		{"missing of another type", "missing: [0, -999]", "missing: [[0]]", 20, "must be a number, a text"},
		{"anchor", "section_height: 1.2", "section_height: &h 1.2", 27, "anchor"},
		{"points fed twice", "  section_height: 1.2", "  section_height: 1.2\n  section_points: [[0, 1], [1, 0]]", 28, "already"},
		{"criteria of an operation without", "  discharge:", "  criteria_least_freeboard: 0.3\n  discharge:", 37, "no member of a request"},
	} {
		t.Run(c.name, func(t *testing.T) {
			if !strings.Contains(sound, c.old) {
				t.Fatalf("the sound file has no %q", c.old)
			}
			text := strings.Replace(sound, c.old, c.new, 1)
			if c.name == "many depths" {
				text = strings.Replace(text, "operation: depths", "operation: section", 1)
			}
			_, _, err := compileText(text)
			var faults Faults
			if !errors.As(err, &faults) {
				t.Fatalf("no fault, but %v", err)
			}
			for _, f := range faults {
				if (c.line == 0 || f.Line == c.line) && strings.Contains(f.Detail, c.want) && strings.HasPrefix(f.Error(), "m.yaml") {
					if !strings.HasSuffix(f.Detail, ".") && !strings.HasSuffix(f.Detail, "?") {
						t.Errorf("no sentence: %s", f.Detail)
					}
					return
				}
			}
			t.Errorf("want line %d, %q; got\n%v", c.line, c.want, err)
		})
	}
}

// All faults of a file are told at once, in the order of the lines.
func TestAllFaultsAtOnce(t *testing.T) {
	text := strings.NewReplacer("units: si", "units: metric", "diameter, unit: mm", "diameter, unit: mile", "for: [box]", "for: [bx]").Replace(sound)
	_, _, err := compileText(text)
	var faults Faults
	if !errors.As(err, &faults) || len(faults) != 3 {
		t.Fatal(err)
	}
	for i, line := range []int{2, 25, 26} {
		if faults[i].Line != line {
			t.Errorf("fault %d: %v", i, faults[i])
		}
	}
}

// No text of a fault repeats a secret.
func TestFaultsTellNoPassword(t *testing.T) {
	for _, line := range []string{"  password: hunter2hunter2", "  database: postgres://u:hunter2@h/d", "  host: h password=hunter2", "  host: {password: hunter2hunter2}"} {
		_, _, err := compileText(strings.Replace(sound, "  path: results.csv", "  path: results.csv\n"+line, 1))
		if err == nil || strings.Contains(fmt.Sprint(err), "hunter2") {
			t.Errorf("%v", err)
		}
	}
}
