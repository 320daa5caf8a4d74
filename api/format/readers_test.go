package format

import (
	"bytes"
	"encoding/csv"
	"errors"
	"fmt"
	"io"
	"slices"
	"strings"
	"testing"
	"testing/iotest"

	"github.com/go-json-experiment/json/jsontext"
	"pgregory.net/rapid"

	"leat/api/operation"
	"leat/api/stream"
)

// A recordFound is what a reader says of one record.
type recordFound struct {
	line     int64
	text     string
	overlong bool
}

// readRecords reads all records, asking Ready before each as whim has it.
func readRecords(r stream.Reader, whim func() bool) (records []recordFound, err error) {
	dst := []byte("before")
	for {
		if whim() {
			r.Ready()
		}
		out, line, err := r.Next(dst)
		var overlong *stream.Overlong
		switch {
		case errors.As(err, &overlong):
			records = append(records, recordFound{line: line, overlong: true})
		case err != nil:
			return records, err
		default:
			records = append(records, recordFound{line: line, text: string(out[len(dst):])})
		}
		if string(out[:len(dst)]) != "before" || err != nil && len(out) != len(dst) {
			return records, errors.New("dst is not as it was")
		}
	}
}

// inPieces gives a body in pieces of whatever sizes.
type inPieces struct {
	body io.Reader
	size func() int
}

func (p inPieces) Read(b []byte) (int, error) { return p.body.Read(b[:min(len(b), p.size())]) }

// jsonItem draws one JSON value, with strings that hold what a careless reader would take for structure.
func jsonItem(t *rapid.T, depth int) string {
	switch rapid.IntRange(0, 6).Draw(t, "kind") {
	case 0:
		return rapid.SampledFrom([]string{"0", "-1.5e3", "true", "null", `""`}).Draw(t, "scalar")
	case 1, 2:
		text, _ := jsontext.AppendQuote(nil, rapid.StringOfN(rapid.SampledFrom([]rune(`",[]{}\ :ä`+"\n")), 0, 30, -1).Draw(t, "text"))
		return string(text)
	}
	if depth == 0 {
		return "{}"
	}
	var items []string
	for range rapid.IntRange(0, 4).Draw(t, "items") {
		items = append(items, jsonItem(t, depth-1))
	}
	if rapid.Bool().Draw(t, "list") {
		return "[" + strings.Join(items, " , ") + "]"
	}
	for i := range items {
		items[i] = fmt.Sprintf(`"member %d" : %s`, i, items[i])
	}
	return "{" + strings.Join(items, ",") + "}"
}

// The items of an array are found as they stand, in whatever pieces the body comes; so are the features of a collection, with all that stands around them.
func TestItemsAreFound(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		limit := rapid.IntRange(20, 200).Draw(t, "limit")
		var items []string
		var want []recordFound
		for i := range rapid.IntRange(0, 20).Draw(t, "items") {
			item := jsonItem(t, 3)
			items = append(items, item)
			if len(item) > limit {
				want = append(want, recordFound{line: int64(i + 1), overlong: true})
			} else {
				want = append(want, recordFound{line: int64(i + 1), text: item})
			}
		}
		space := rapid.SampledFrom([]string{"", " ", "\r\n\t"})
		open, close := " [", "] \n"
		features := rapid.Bool().Draw(t, "features")
		if features {
			open = `{ "name":"a \"features\":[ b","features_of":[1,[2]],"type":"FeatureCollection" , "features" : [`
			close = `] , "more":{"features":[]} }` + "\n"
		}
		list := strings.Join(items, ",")
		body := open + space.Draw(t, "space") + list + close
		in := inPieces{strings.NewReader(body), func() int { return rapid.IntRange(1, 40).Draw(t, "piece") }}
		var r stream.Reader = newArrayReader(in, limit)
		if features {
			limit = max(limit, len(open)+1) // the collection's own members are held to it, too
			want = want[:0]
			for i, item := range items {
				want = append(want, recordFound{line: int64(i + 1), text: item})
				if len(item) > limit {
					want[i] = recordFound{line: int64(i + 1), overlong: true}
				}
			}
			r = newFeatureReader(in, mustBulk(Choice{In: GeoJSON}, limit))
		}
		got, err := readRecords(r, func() bool { return rapid.Bool().Draw(t, "ready") })
		if err != io.EOF || !slices.Equal(got, want) {
			t.Fatalf("%v\ngot  %v\nwant %v\nof %s", err, got, want, body)
		}
		if f, is := r.(*featureReader); is && (string(f.head) != open || string(f.tail) != close) {
			t.Fatalf("head %q, tail %q", f.head, f.tail)
		}
	})
}

// mustBulk is newBulk where there is no testing.TB.
func mustBulk(choice Choice, lineBytes int) *Bulk {
	b, problem := New(&operation.Depths, operation.Options{}, choice, lineBytes)
	if problem != nil {
		panic(problem)
	}
	return b
}

// Bodies in which records cannot be found say where and why.
func TestBodiesWithoutRecords(t *testing.T) {
	depths := func(in Kind) *Bulk { return newBulk(t, &operation.Depths, operation.Options{}, Choice{In: in}, 200) }
	for _, c := range []struct {
		in         Kind
		body, says string
		before     int // records found before
	}{
		{JSONArray, ``, "list of requests is expected", 0},
		{JSONArray, ` {"id":1}`, "put requests into brackets", 0},
		{JSONArray, "\ufeff[]", "byte order mark", 0},
		{JSONArray, `"x"`, "list of requests", 0},
		{JSONArray, `[{},{}`, "ends inside record 2", 1},
		{JSONArray, `[{},{"a":"]}`, "ends inside record 2", 1},
		{JSONArray, `[{},]`, "comma before the closing bracket", 1},
		{JSONArray, `[{}] {}`, "after the closing bracket", 1},
		{JSONArray, `[`, "ends inside record 1", 0},
		{GeoJSON, ``, "FeatureCollection is expected", 0},
		{GeoJSON, `[{"type":"Feature"}]`, "plain list of requests is application/json", 0},
		{GeoJSON, `{"type":"Feature","properties":{}}`, "must be FeatureCollection", 0},
		{GeoJSON, `{"type":"FeatureCollection"}`, "no member features", 0},
		{GeoJSON, `{"type":"FeatureCollection","features":null}`, "must be a list", 0},
		{GeoJSON, `{"type":"FeatureCollection","a":NaN,"features":[]}`, "NaN", 0},
		{GeoJSON, `{"type":"FeatureCollection" "features":[]}`, "comma", 0},
		{GeoJSON, `{"features":[{}]}`, "must be FeatureCollection", 1},
		{GeoJSON, `{"features":[{}],"type":"Topology"}`, "must be FeatureCollection", 1},
		{GeoJSON, `{"type":"FeatureCollection","features":[{}],"features":[]}`, "after its features", 1},
		{GeoJSON, `{"type":"FeatureCollection","features":[{}]`, "after its features", 1},
		{GeoJSON, `{"type":"FeatureCollection","features":[{}`, "ends inside record 1", 0},
		{GeoJSON, `{"type":"FeatureCo`, "ends before the features", 0},
		{GeoJSON, "\ufeff{}", "byte order mark", 0},
		{GeoJSON, `{"name":"` + strings.Repeat("x", 300) + `"`, "line_bytes", 0},
		{CSV, ``, "no header line", 0},
		{CSV, "\r\n\n", "no header line", 0},
		{CSV, "id;section_kind;discharge\n1;box;3,5\n", "semicolons", 0},
		{CSV, "\ufeffid;discharge\n1;3,5\n", "semicolons", 0},
		{CSV, "id\tdischarge\n", "tabs", 0},
		{CSV, "id,discharge\r1,2\r", "carriage returns", 0},
		{CSV, "\xff\xfei\x00d\x00", "UTF-16", 0},
		{CSV, "id,gef\xe4lle\n", "not UTF-8", 0},
		{CSV, "id,discharge,id\n", "Two columns are called id", 0},
		{CSV, "id,,discharge\n", "no name", 0},
		{CSV, "id,Discharge\n", "Did you mean discharge?", 0},
		{CSV, "id,normal_depth\n", "name of the answer", 0},
		{CSV, "id,discharge\n1,2\n\"3,4\n5,6\n", "never closed", 1},
		{CSV, `id,dis"charge` + "\n", "quotation mark", 0},
		{CSV, strings.Repeat("x", 300) + "\n", "line_bytes", 0},
	} {
		for _, in := range []io.Reader{strings.NewReader(c.body), iotest.OneByteReader(strings.NewReader(c.body))} {
			got, err := readRecords(depths(c.in).Open(in).Reader, func() bool { return true })
			var refusal *Refusal
			if !errors.As(err, &refusal) || len(got) != c.before || !strings.Contains(refusal.Problem.Detail, c.says) {
				t.Errorf("%s %q: %d records, %v, want %q", c.in.MediaType(), c.body, len(got), err, c.says)
				continue
			}
			if s := refusal.Problem.Status; s != 400 && s != 422 && s != 413 || !strings.HasSuffix(refusal.Problem.Detail, ".") {
				t.Errorf("%q: %+v", c.body, refusal.Problem)
			}
		}
	}
}

// What encoding/csv writes is read as it was meant, in whatever pieces it comes.
func TestCSVIsReadAsItIsWritten(t *testing.T) {
	text := rapid.StringOfN(rapid.SampledFrom([]rune(`",;'ab ä`+"\n\t")), 0, 12, -1)
	rapid.Check(t, func(t *rapid.T) {
		columns := rapid.IntRange(2, 5).Draw(t, "columns") // of one alone an empty cell is a blank line
		var want [][]string
		var body bytes.Buffer
		w := csv.NewWriter(&body)
		w.UseCRLF = rapid.Bool().Draw(t, "crlf")
		if rapid.Bool().Draw(t, "mark") {
			body.Write(markUTF8)
		}
		header := []string{"id", "own 1", "own 2", "own, 3", `own "4"`}[:columns]
		w.Write(header)
		for range rapid.IntRange(0, 20).Draw(t, "rows") {
			row := make([]string, columns)
			for i := range row {
				row[i] = text.Draw(t, "cell")
			}
			want = append(want, row)
			w.Write(row)
		}
		w.Flush()
		b := mustBulk(Choice{In: CSV, Out: CSV, Prefix: "leat_"}, 1000)
		run := b.Open(inPieces{&body, func() int { return rapid.IntRange(1, 60).Draw(t, "piece") }})
		records, err := readRecords(run.Reader, func() bool { return rapid.Bool().Draw(t, "ready") })
		if err != io.EOF || len(records) != len(want) {
			t.Fatalf("%d records of %d, %v", len(records), len(want), err)
		}
		for i, record := range records {
			cells, _ := splitCells(nil, []byte(record.text), nil)
			if len(cells) != columns {
				t.Fatalf("row %d has %d cells: %q", i, len(cells), record.text)
			}
			for j, c := range cells {
				cell := want[i][j]
				if w.UseCRLF { // as encoding/csv writes line feeds then
					cell = strings.ReplaceAll(cell, "\n", "\r\n")
				}
				if c.wrong != "" || string(c.value) != cell {
					t.Fatalf("row %d: %q %s, want %q", i, c.value, c.wrong, cell)
				}
			}
		}
		for i, name := range run.Reader.(*csvReader).columns {
			if name.name != header[i] {
				t.Fatalf("column %q, want %q", name.name, header[i])
			}
		}
	})
}

// Rows with a bound, blank lines and stray quotation marks.
func TestRowsOfCSV(t *testing.T) {
	b := newBulk(t, &operation.Depths, operation.Options{}, Choice{In: CSV}, 20)
	body := "id,discharge\r\n1,2\r\n\r\n" + strings.Repeat("x", 30) + ",1\n2,\"3\"\n" + `a"b,"c"d,""` + "\n" + strings.Repeat("y", 20) + "\r\n" + `"` + strings.Repeat("\n", 40) + `"` + "\n4,5"
	got, err := readRecords(b.Open(strings.NewReader(body)).Reader, func() bool { return true })
	want := []recordFound{{1, "1,2", false}, {2, "", true}, {3, `2,"3"`, false}, {4, `a"b,"c"d,""`, false}, {5, strings.Repeat("y", 20), false}, {6, "", true}, {7, "4,5", false}}
	if err != io.EOF || !slices.Equal(got, want) {
		t.Errorf("%v\ngot  %v\nwant %v", err, got, want)
	}
	cells, _ := splitCells(nil, []byte(want[3].text), nil)
	if len(cells) != 3 || cells[0].wrong != strayQuote || cells[1].wrong != afterCell || cells[2].wrong != "" || len(cells[2].value) != 0 || string(cells[2].raw) != `""` {
		t.Errorf("%+v", cells)
	}
}
