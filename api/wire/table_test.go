package wire

import (
	"encoding/json"
	"fmt"
	"math"
	"strings"
	"testing"
)

// TestStateColumns holds the columns of tables to the members of JSON: the same names in the same order, the same values.
func TestStateColumns(t *testing.T) {
	full := fullState()
	full.Members = WithConveyance | WithUniform | WithFlow | WithFriction | WithDischarge
	for _, members := range []StateMembers{full.Members, 0, WithFlow, WithConveyance | WithFlow | WithFriction} {
		for _, system := range []System{SI, US} {
			s := full
			s.Members = members
			s.HydraulicDepth = math.NaN()
			text := s.AppendJSON(nil, system)
			names := memberNames(t, text)
			var values map[string]any
			if err := json.Unmarshal(text, &values); err != nil {
				t.Fatal(err)
			}
			var got []string
			for i, c := range stateColumns {
				cell := string(s.appendCell(nil, i, system))
				value, has := values[c.name]
				if has {
					got = append(got, c.name)
				}
				switch {
				case !has || value == nil:
					if cell != "" {
						t.Errorf("%s is %q, not in the JSON", c.name, cell)
					}
				case c.text != nil:
					if cell != value {
						t.Errorf("%s is %q, %v in the JSON", c.name, cell, value)
					}
				default:
					if !strings.Contains(string(text), fmt.Sprintf("%q:%s", c.name, cell)) {
						t.Errorf("%s is %s, %v in the JSON", c.name, cell, value)
					}
				}
			}
			if strings.Join(got, " ") != strings.Join(names, " ") {
				t.Errorf("columns %v\nmembers %v", got, names)
			}
		}
	}
	if len(columnNames()) != 19 {
		t.Errorf("columns %v", columnNames())
	}
}

// TestTables holds which rows the tables of answers have.
func TestTables(t *testing.T) {
	at := func(depth float64) State { s := fullState(); s.Depth = depth; return s }
	rows := func(table Table, columns ...int) string {
		var out []string
		for row := range table.Rows {
			var cells []string
			for _, column := range columns {
				cells = append(cells, string(table.Cell(nil, row, column)))
			}
			out = append(out, strings.Join(cells, " "))
		}
		return strings.Join(out, "|")
	}
	depths := &DepthsAnswer{Normal: []State{at(1), at(2)}, Critical: []State{at(3)}, Given: DepthsGiven{Present: true, State: at(4)}}
	profile := &ProfileAnswer{Stations: []ProfileStation{
		{Chainage: 0, Reach: ID(`"up\u0070er, \"old\""`), BedLevel: 3.048, WaterLevel: math.NaN(), EnergyLevel: 6.096, Curve: "M2", State: at(1)},
		{Chainage: 304.8, Reach: ID(`12.50`), State: at(2)},
	}}
	for name, c := range map[string]struct{ got, want string }{
		"section": {rows((&SectionAnswer{States: []State{at(1), at(2)}}).Table(SI), 1), "1|2"},
		"rating":  {rows((&RatingAnswer{States: []State{at(1)}}).Table(SI), 1), "1"},
		"depths":  {rows(depths.Table(SI), 0, 2), "normal 1|normal 2|critical 3|given 4"},
		"none":    {rows((&DepthsAnswer{}).Table(SI), 0), ""},
		"profile": {rows(profile.Table(US), 0, 1, 2, 3, 4, 5), `0 upper, "old" 10  20 M2|1000 12.50 0 0 0 `},
	} {
		if c.got != c.want {
			t.Errorf("%s: got %q, want %q", name, c.got, c.want)
		}
	}
	if table := profile.Table(SI); len(table.Columns) != 25 || table.Columns[0] != "chainage" || table.Columns[7] != "depth" {
		t.Errorf("columns %v", table.Columns)
	}
}
