package csvfile

import (
	"context"
	"encoding/csv"
	"errors"
	"io"
	"math"
	"os"
	"path/filepath"
	"slices"
	"strings"
	"testing"
	"time"

	"leat/cmd/internal/register/row"
	"leat/cmd/internal/register/store"
)

func write(t *testing.T, text string) string {
	t.Helper()
	path := filepath.Join(t.TempDir(), "register.csv")
	if err := os.WriteFile(path, []byte(text), 0o600); err != nil {
		t.Fatal(err)
	}
	return path
}

func openText(t *testing.T, text string, spec store.SourceSpec) store.Source {
	t.Helper()
	spec.Path, spec.Key = write(t, text), "asset"
	s, err := OpenSource(context.Background(), &spec)
	if err != nil {
		t.Fatal(err)
	}
	return s
}

// all reads a query to its end, page by page, as text: cells joined by a bar, faults behind a cross.
func all(t *testing.T, s store.Source, q store.Query, limit int) []string {
	t.Helper()
	r, err := s.Read(context.Background(), &q)
	if err != nil {
		t.Fatal(err)
	}
	defer r.Close()
	var out []string
	var page row.Page
	for {
		err := r.Next(context.Background(), &page, limit)
		if errors.Is(err, io.EOF) {
			if page.Rows() != 0 {
				t.Error("rows behind the end")
			}
			return out
		}
		if err != nil {
			t.Fatal(err)
		}
		if page.Rows() > limit {
			t.Errorf("%d rows, limit %d", page.Rows(), limit)
		}
		for i := range page.Rows() {
			var cells []string
			for _, v := range page.Row(i) {
				cells = append(cells, v.String())
			}
			for _, v := range page.Children(i) {
				cells = append(cells, "+"+v.String())
			}
			for _, f := range r.Faults() {
				if f.Row == i {
					cells = append(cells, "x "+f.Column+f.Detail)
				}
			}
			out = append(out, strings.Join(cells, "|"))
		}
	}
}

const drains = "asset,kind,width\r\nA1,box,300\r\nA2,\"a \"\"b\"\", c\",\r\n\r\nA3,\"two\nlines\",5\r\n"

func TestRows(t *testing.T) {
	for _, text := range []string{drains, "\xef\xbb\xbf" + drains} {
		s := openText(t, text, store.SourceSpec{})
		for _, limit := range []int{1, 2, 100} {
			got := all(t, s, store.Query{Columns: []string{"asset", "width", "kind"}}, limit)
			if want := []string{"A1|300|box", `A2||a "b", c`, "A3|5|two\nlines"}; !slices.Equal(got, want) {
				t.Errorf("%q", got)
			}
		}
		if err := s.CheckKey(context.Background(), nil); err != nil || s.Ordered() {
			t.Error(err)
		}
		if len(s.Columns()) != 3 || s.Columns()[0].Name != "asset" || s.ChildColumns() != nil {
			t.Errorf("%v", s.Columns())
		}
	}
	s := openText(t, "asset;kind\nA;x,y\n", store.SourceSpec{CSV: store.CSVSpec{Delimiter: ';'}})
	if got := all(t, s, store.Query{Columns: []string{"asset", "kind"}}, 10); !slices.Equal(got, []string{"A|x,y"}) {
		t.Errorf("%q", got)
	}
	if n, err := s.Count(context.Background(), &store.Query{}); n != 1 || err != nil {
		t.Error(n, err)
	}
	if n, err := openText(t, "asset\nA\nB", store.SourceSpec{}).Count(context.Background(), &store.Query{}); n != 2 || err != nil {
		t.Error(n, err)
	}
}

// A line that is not CSV costs that line.
func TestUnreadableLines(t *testing.T) {
	s := openText(t, "asset,kind\nA1,x\nA2\nA3,y,z\nA4,\"x\"y\nA5,w\nA6,\xff\nA7,v\n", store.SourceSpec{})
	got := all(t, s, store.Query{Columns: []string{"asset", "kind"}}, 3)
	want := []string{"A1|x", "A2||x The line has 1 cells, the header 2.", "A3||x The line has 3 cells, the header 2.", "", "A5|w", "", "A7|v"}
	if len(got) != len(want) {
		t.Fatalf("%q", got)
	}
	for i := range want {
		switch i {
		case 3:
			if !strings.Contains(got[i], "not CSV") {
				t.Errorf("%q", got[i])
			}
		case 5:
			if !strings.Contains(got[i], "A6") || !strings.Contains(got[i], "x kindThe cell is not UTF-8") {
				t.Errorf("%q", got[i])
			}
		default:
			if got[i] != want[i] {
				t.Errorf("%q, want %q", got[i], want[i])
			}
		}
	}
}

func TestKeys(t *testing.T) {
	for text, want := range map[string]string{
		"asset\nA\nB\nA\nC\nB\n": "not unique: several rows have A, B",
		"asset,x\nA,1\n,2\n":     "empty in a row",
		"asset,x\nA,1\n,2\n,3\n": "empty in 2 rows",
	} {
		err := openText(t, text, store.SourceSpec{}).CheckKey(context.Background(), nil)
		var fault *store.KeyFault
		if !errors.As(err, &fault) || !strings.Contains(fault.Sentence("asset"), want) {
			t.Errorf("%q: %v", text, err)
		}
	}
	// Among the rows that the filter lets through.
	filter := []store.Condition{{Column: "x", Op: store.AnyOf, Values: []row.Value{row.OfInt(1)}}}
	if err := openText(t, "asset,x\nA,1\nA,2\n", store.SourceSpec{}).CheckKey(context.Background(), filter); err != nil {
		t.Error(err)
	}
}

func TestBadFiles(t *testing.T) {
	for text, want := range map[string]string{
		"":                    "is empty",
		"asset;kind\nA;b\n":   `set delimiter to ";"`,
		"asset,kind,asset\n":  `two columns "asset"`,
		"asset,,kind\n":       "Column 2 of the header has no name",
		"asset,st\xe4rke\n":   "not UTF-8",
		"asset,\"kind\nA,b\n": "cannot be read",
	} {
		_, err := OpenSource(context.Background(), &store.SourceSpec{Path: write(t, text), Key: "asset"})
		var misfit *store.Misfit
		if !errors.As(err, &misfit) || misfit.Field != "path" || !strings.Contains(misfit.Detail, want) {
			t.Errorf("%q: %v", text, err)
		}
	}
	if _, err := OpenSource(context.Background(), &store.SourceSpec{Path: "/nowhere/at/all.csv"}); err == nil {
		t.Error("a file that is not there was opened")
	}
}

func TestFilterAndBounds(t *testing.T) {
	s := openText(t, "asset,n,t\nE,1,x\nD,2.5,t\nC,,false\nB,10,y\nA,1e1,f\n", store.SourceSpec{})
	one := func(op store.Op, column string, values ...row.Value) []store.Condition {
		return []store.Condition{{Column: column, Op: op, Values: values}}
	}
	for _, c := range []struct {
		query store.Query
		want  string
	}{
		{store.Query{Filter: one(store.AnyOf, "n", row.OfInt(10), row.OfFloat(2.5))}, "DBA"},
		{store.Query{Filter: one(store.NoneOf, "n", row.OfInt(10))}, "ED"},
		{store.Query{Filter: one(store.Above, "n", row.OfInt(1))}, "DBA"},
		{store.Query{Filter: one(store.AtLeast, "n", row.OfInt(1))}, "EDBA"},
		{store.Query{Filter: one(store.Below, "n", row.OfFloat(2.5))}, "E"},
		{store.Query{Filter: one(store.AtMost, "n", row.OfFloat(2.5))}, "ED"},
		{store.Query{Filter: one(store.IsNull, "n")}, "C"},
		{store.Query{Filter: one(store.NotNull, "n")}, "EDBA"},
		{store.Query{Filter: one(store.AnyOf, "t", row.OfBool(true))}, "D"},
		{store.Query{Filter: one(store.AnyOf, "t", row.OfString("x"), row.OfString("y"))}, "EB"},
		{store.Query{Filter: append(one(store.AtLeast, "n", row.OfInt(2)), one(store.AnyOf, "t", row.OfBool(false))...)}, "A"},
		{store.Query{After: row.OfString("D")}, "CBA"},
		{store.Query{Until: row.OfString("D")}, "ED"},
		{store.Query{After: row.OfString("D"), Until: row.OfString("B")}, "CB"},
		{store.Query{After: row.OfString("gone")}, "EDCBA"},
	} {
		c.query.Columns = []string{"asset"}
		if got := strings.Join(all(t, s, c.query, 2), ""); got != c.want {
			t.Errorf("%+v: %s, want %s", c.query, got, c.want)
		}
	}
}

// Points are put into the order of their column, as numbers.
func TestPoints(t *testing.T) {
	path := write(t, "drain,no,x,z\nA,10,5,1\nB,1,0,7\nA,2,2.5,0\nA,1,0,1\nC,1,1,1\n")
	s := openText(t, "asset\nB\nA\nD\n", store.SourceSpec{Points: &store.PointsSpec{Path: path, Key: "drain", Order: "no", Offset: "x", Level: "z"}})
	got := all(t, s, store.Query{Columns: []string{"asset"}, Child: []string{"x", "z"}}, 10)
	if want := []string{"B|+0|+7", "A|+0|+1|+2.5|+0|+5|+1", "D"}; !slices.Equal(got, want) {
		t.Errorf("%q", got)
	}
	if len(s.ChildColumns()) != 4 {
		t.Errorf("%v", s.ChildColumns())
	}
}

func layout() *store.Layout {
	return &store.Layout{Columns: []store.ResultColumn{{Column: row.Column{Name: "asset"}}, {Column: row.Column{Name: "depth"}}, {Column: row.Column{Name: "text"}}}}
}

// What was written reads back as the same numbers and texts, by a reader that is not ours.
func TestResultsReadBack(t *testing.T) {
	for _, form := range []store.CSVSpec{{}, {Delimiter: ';', Decimal: ','}, {Delimiter: '\t'}} {
		folder := t.TempDir()
		spec := &store.TargetSpec{Path: filepath.Join(folder, "r.csv"), Problems: filepath.Join(folder, "p.csv"), CSV: form}
		target, err := OpenTarget(context.Background(), spec)
		if err != nil {
			t.Fatal(err)
		}
		if err := target.Check(context.Background(), layout()); err != nil {
			t.Fatal(err)
		}
		state, err := target.Begin(context.Background(), layout(), store.Start{New: "r1", At: time.Now()})
		if err != nil || state.Run != "r1" || !state.Fresh || state.Resumed {
			t.Fatal(state, err)
		}
		rows := [][]row.Value{
			{row.OfString("A,1;\t"), row.OfFloat(0.1), row.OfString("say \"so\"\r\nplease, or; not")},
			{row.OfInt(7), row.OfFloat(1e-300), row.Value{}},
			{row.OfInt(-7), row.OfFloat(math.MaxFloat64), row.OfString("")},
			{row.OfInt(8), row.OfFloat(1.0 / 3), row.OfBool(true)},
		}
		err = target.Commit(context.Background(), &store.Batch{Results: rows[:2], Problems: []store.Problem{{Asset: row.OfInt(9), Line: 12, Column: "kind", Pointer: "/section/kind", Code: "c", Text: "It is, \"wrong\"."}}})
		if err != nil {
			t.Fatal(err)
		}
		if _, err := os.Stat(spec.Path); !os.IsNotExist(err) {
			t.Error("the file is there before the run is finished")
		}
		if err := target.Commit(context.Background(), &store.Batch{Results: rows[2:]}); err != nil {
			t.Fatal(err)
		}
		if err := target.Finish(context.Background(), &store.Summary{}); err != nil {
			t.Fatal(err)
		}
		if err := target.Close(); err != nil {
			t.Fatal(err)
		}
		records := readBack(t, spec.Path, form)
		if len(records) != 5 || records[1][0] != "A,1;\t" || records[1][2] != "say \"so\"\nplease, or; not" && records[1][2] != "say \"so\"\r\nplease, or; not" {
			t.Errorf("%q", records)
		}
		for i := range rows {
			number, ok := number(records[i+1][1], mark(form))
			if !ok || number != rows[i][1].Float() {
				t.Errorf("%q is not %v", records[i+1][1], rows[i][1])
			}
		}
		if problems := readBack(t, spec.Problems, form); len(problems) != 2 || strings.Join(problems[1], "|") != `r1|9|12|kind|/section/kind|c|It is, "wrong".` {
			t.Errorf("%q", problems)
		}
		left, _ := os.ReadDir(folder)
		if len(left) != 2 {
			t.Errorf("%v is left", left)
		}
		// The files are there now: without leave they are not overwritten.
		again, _ := OpenTarget(context.Background(), spec)
		var misfit *store.Misfit
		if err := again.Check(context.Background(), layout()); !errors.As(err, &misfit) || misfit.Field != "path" || !strings.Contains(misfit.Detail, "overwrite: true") {
			t.Errorf("%v", err)
		}
	}
}

func mark(form store.CSVSpec) byte {
	if form.Decimal == 0 {
		return '.'
	}
	return form.Decimal
}

func readBack(t *testing.T, path string, form store.CSVSpec) [][]string {
	t.Helper()
	f, err := os.Open(path)
	if err != nil {
		t.Fatal(err)
	}
	defer f.Close()
	r := csv.NewReader(f)
	if form.Delimiter != 0 {
		r.Comma = rune(form.Delimiter)
	}
	records, err := r.ReadAll()
	if err != nil {
		t.Fatal(err)
	}
	return records
}

// A run that is broken off leaves what was there before, and nothing else.
func TestUnfinishedRunsLeaveNothing(t *testing.T) {
	folder := t.TempDir()
	spec := &store.TargetSpec{Path: filepath.Join(folder, "r.csv"), Problems: filepath.Join(folder, "p.csv"), Overwrite: true}
	if err := os.WriteFile(spec.Path, []byte("old"), 0o640); err != nil {
		t.Fatal(err)
	}
	target, _ := OpenTarget(context.Background(), spec)
	if err := target.Check(context.Background(), layout()); err != nil {
		t.Fatal(err)
	}
	if _, err := target.Begin(context.Background(), layout(), store.Start{New: "r"}); err != nil {
		t.Fatal(err)
	}
	target.Commit(context.Background(), &store.Batch{Results: [][]row.Value{{row.OfInt(1), row.OfInt(1), row.OfInt(1)}}})
	target.Close()
	left, _ := os.ReadDir(folder)
	content, _ := os.ReadFile(spec.Path)
	if len(left) != 1 || string(content) != "old" {
		t.Errorf("%v, %q", left, content)
	}
}
