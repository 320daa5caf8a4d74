package format

import (
	"bytes"
	"encoding/csv"
	"fmt"
	"os"
	"strings"
	"testing"

	"github.com/go-json-experiment/json/jsontext"

	"leat/api/operation"
	"leat/api/wire"
)

// registerRows returns n nested requests: those of the register of Ostermere that can be told in any format, again and again, each with an id of its own;
// of every hundred one is bad.
func registerRows(t testing.TB, n int) (rows []string) {
	t.Helper()
	text, err := os.ReadFile("../../testdata/ostermere.ndjson")
	if err != nil {
		t.Fatal(err)
	}
	var good []string
	for line := range strings.Lines(string(text)) {
		line = strings.TrimSpace(line)
		if _, _, problem := operation.Depths.Answer(nil, []byte(line), operation.Options{}); problem == nil && strings.HasPrefix(line, `{"id":"`) {
			_, rest, _ := strings.Cut(line, `","`)
			good = append(good, `"`+rest)
		}
	}
	if len(good) < 400 {
		t.Fatalf("%d rows of the register can be used", len(good))
	}
	for i := range n {
		row := fmt.Sprintf(`{"id":"row %d",%s`, i+1, good[i%len(good)])
		if i%100 == 37 {
			row = strings.Replace(row, `"bed_slope":`, `"bed_slope":7`, 1)
		}
		rows = append(rows, row)
	}
	return rows
}

// A pairOf is a member of a flat row: its name and its value as JSON.
type pairOf struct{ name, value string }

// flattened returns a JSON object's members by flat name, lists as they are.
func flattened(t testing.TB, object string) (pairs []pairOf) {
	t.Helper()
	d := jsontext.NewDecoder(strings.NewReader(object))
	if _, err := d.ReadToken(); err != nil {
		t.Fatalf("%s: %v", object, err)
	}
	for d.PeekKind() != '}' {
		token, err := d.ReadToken()
		if err != nil {
			t.Fatal(err)
		}
		name := token.String()
		value, err := d.ReadValue()
		if err != nil {
			t.Fatal(err)
		}
		if value.Kind() == '{' {
			for _, p := range flattened(t, string(value)) {
				pairs = append(pairs, pairOf{name + "_" + p.name, p.value})
			}
			continue
		}
		pairs = append(pairs, pairOf{name, string(value)})
	}
	return pairs
}

// plain is a JSON value as the text of a cell.
func plain(value string) string {
	switch {
	case value == "null":
		return ""
	case value[0] != '"':
		return value
	}
	text, err := jsontext.AppendUnquote(nil, value)
	if err != nil {
		panic(err)
	}
	return string(text)
}

// bodies tells the rows in every way in which requests may come. The CSV is written by encoding/csv.
func bodies(t testing.TB, rows []string, prefix string) map[string]string {
	var flat, features, flatFeatures []string
	var header []string
	known := map[string]bool{}
	for i, row := range rows {
		pairs := flattened(t, row)
		members := make([]string, len(pairs))
		for j, p := range pairs {
			if members[j] = fmt.Sprintf("%q:%s", prefix+p.name, p.value); p.value[0] == '[' && i%2 == 0 { // lists may be JSON text, too
				text, _ := jsontext.AppendQuote(nil, p.value)
				members[j] = fmt.Sprintf("%q:%s", prefix+p.name, text)
			}
			if !known[p.name] {
				known[p.name] = true
				header = append(header, prefix+p.name)
			}
		}
		flat = append(flat, "{"+strings.Join(members, ",")+"}")
		id, rest, _ := strings.Cut(row[1:], ",")
		features = append(features, fmt.Sprintf(`{"type":"Feature",%s,"geometry":{"type":"Point","coordinates":[%d,0.10]},"properties":{%s}`, id, i, rest))
		flatFeatures = append(flatFeatures, fmt.Sprintf(`{"type":"Feature",%s,"properties":{%s},"geometry":null}`, id, strings.Join(members[1:], ",")))
	}
	var table bytes.Buffer
	w := csv.NewWriter(&table)
	w.Write(header)
	for _, row := range rows {
		cells := make([]string, len(header))
		for _, p := range flattened(t, row) {
			for i, name := range header {
				if name == prefix+p.name {
					cells[i] = plain(p.value)
				}
			}
		}
		w.Write(cells)
	}
	w.Flush()
	collection := func(features []string) string {
		return `{"type":"FeatureCollection","features":[` + strings.Join(features, ",\n ") + `],"name":"Ostermere"}`
	}
	return map[string]string{
		"NDJSON": strings.Join(rows, "\n"), "array": "[" + strings.Join(rows, " ,\n") + "]",
		"flat NDJSON": strings.Join(flat, "\n"), "flat array": "[" + strings.Join(flat, ",") + "]\n",
		"features": collection(features), "flat features": collection(flatFeatures), "CSV": table.String(),
	}
}

// told takes an answer of some kind apart into its rows, each by flat name as JSON or, from CSV, as text.
func told(t testing.TB, kind Kind, text string) (rows []map[string]string) {
	t.Helper()
	object := func(s string) map[string]string {
		row := map[string]string{}
		for _, p := range flattened(t, s) {
			if _, twice := row[p.name]; twice {
				t.Fatalf("%s stands twice in %s", p.name, s)
			}
			row[p.name] = p.value
		}
		return row
	}
	list := func(text string) (items []string) {
		d := jsontext.NewDecoder(strings.NewReader(text))
		d.ReadToken()
		for d.PeekKind() != ']' {
			v, err := d.ReadValue()
			if err != nil {
				t.Fatalf("%v in %.300s", err, text)
			}
			items = append(items, string(v))
		}
		return items
	}
	switch kind {
	case NDJSON:
		lines := strings.Split(strings.TrimSuffix(text, "\n"), "\n")
		for _, line := range lines[:len(lines)-1] {
			rows = append(rows, object(line))
		}
	case JSONArray:
		for _, item := range list(text) {
			rows = append(rows, object(item))
		}
	case GeoJSON:
		if !jsontext.Value(text).IsValid() || !strings.HasSuffix(text, `],"name":"Ostermere"}`) {
			t.Fatalf("no FeatureCollection: %.300s", text)
		}
		_, features, _ := strings.Cut(text, `"features":`)
		for _, item := range list(features) {
			feature := object(item)
			row := map[string]string{}
			for name, value := range feature {
				if name, found := strings.CutPrefix(name, "properties_"); found {
					row[name] = value
				}
			}
			if feature["id"] != "" {
				row["id"] = feature["id"]
			}
			rows = append(rows, row)
		}
	case CSV:
		records, err := csv.NewReader(strings.NewReader(text)).ReadAll()
		if err != nil {
			t.Fatal(err)
		}
		for _, record := range records[1:] {
			row := map[string]string{}
			for i, name := range records[0] {
				row[name] = record[i]
			}
			rows = append(rows, row)
		}
	}
	return rows
}

// Every way in which requests may come goes with every way in which answers may go, and each answer is that of the unary
// operation, number by number as its literal.
func TestEveryPairGivesTheUnaryAnswer(t *testing.T) {
	const n = 1000 / share
	rows := registerRows(t, n)
	all := bodies(t, rows, "")
	unary := make([]map[string]string, n) // by flat name; nil for a problem
	bad := 0
	for i, row := range rows {
		solved, problem := operation.Depths.Solve([]byte(row), operation.Options{Brief: true, Fingerprint: true})
		if problem != nil {
			bad++
			continue
		}
		unary[i] = map[string]string{}
		for _, p := range flattened(t, string(solved.AppendJSON(nil, true))) {
			unary[i][p.name] = p.value
		}
	}
	if bad != n/100 {
		t.Fatalf("%d rows are bad", bad)
	}
	columns := wire.FlatTableOf(operation.Depths.Form).Columns()
	for _, c := range []struct {
		name string
		in   Kind
		flat bool
	}{
		{"NDJSON", NDJSON, false}, {"array", JSONArray, false}, {"flat NDJSON", NDJSON, true}, {"flat array", JSONArray, true}, {"features", GeoJSON, false},
		{"flat features", GeoJSON, false}, {"flat features", GeoJSON, true}, {"CSV", CSV, false}, {"CSV", CSV, true},
	} {
		for _, out := range Kinds {
			choice := Choice{In: c.in, Out: out, Flat: c.flat}
			b, problem := New(&operation.Depths, operation.Options{Brief: true, Fingerprint: true}, choice, 1<<20)
			if out == GeoJSON && c.in != GeoJSON {
				if problem == nil || problem.Status != 406 {
					t.Errorf("%s to features: %v", c.name, problem)
				}
				continue
			}
			if problem != nil {
				t.Fatal(problem)
			}
			text, summary := pump(t, b, strings.NewReader(all[c.name]))
			if summary.Lines != n || summary.Problems != int64(bad) {
				t.Errorf("%s to %s: %+v", c.name, out.MediaType(), summary)
			}
			got := told(t, out, text)
			if len(got) != n {
				t.Fatalf("%s to %s: %d rows", c.name, out.MediaType(), len(got))
			}
			for i, row := range got {
				comparePair(t, fmt.Sprintf("%s to %s (flat %t) row %d", c.name, out.MediaType(), c.flat, i+1), choice, row, unary[i], columns, i)
				if t.Failed() {
					return
				}
			}
		}
	}
}

// comparePair compares one row with the unary answer.
func comparePair(t *testing.T, name string, choice Choice, row, unary map[string]string, columns []wire.FlatColumn, i int) {
	t.Helper()
	id, line := fmt.Sprintf(`"row %d"`, i+1), fmt.Sprint(i+1)
	value := func(literal string) string {
		if choice.Out == CSV {
			return plain(literal)
		}
		return literal
	}
	if row["line"] != line || row["id"] != value(id) {
		t.Errorf("%s: line %s, id %s", name, row["line"], row["id"])
	}
	if !choice.flatOut() {
		if unary == nil {
			if row["problem_status"] != "422" {
				t.Errorf("%s: %v", name, row)
			}
			return
		}
		for member, want := range unary {
			if member != "id" && row["result_"+member] != want {
				t.Errorf("%s: %s is %s, want %s", name, member, row["result_"+member], want)
			}
		}
		return
	}
	if unary == nil {
		if !strings.Contains(row["problem"], "bed_slope") {
			t.Errorf("%s: problem %s", name, row["problem"])
		}
		return
	}
	for _, column := range columns {
		want, found := unary[column.Name]
		switch {
		case column.Name == "id" || column.Name == "line":
			continue
		case !found:
			want = "null"
		case column.Name == "warnings":
			// A list there and a text here: its codes must be in it.
			for _, part := range strings.Split(want, `"code":"`)[1:] {
				if code, _, _ := strings.Cut(part, `"`); !strings.Contains(row["warnings"], code+": ") {
					t.Errorf("%s: warnings %s, want %s", name, row["warnings"], want)
				}
			}
			continue
		}
		if row[column.Name] != value(want) {
			t.Errorf("%s: %s is %s, want %s", name, column.Name, row[column.Name], want)
		}
	}
}
