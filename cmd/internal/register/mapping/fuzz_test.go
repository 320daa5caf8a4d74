package mapping

import (
	"errors"
	"math"
	"os"
	"path/filepath"
	"strings"
	"testing"

	"pgregory.net/rapid"

	"leat/api/operation"
	"leat/cmd/internal/register/row"
)

// Whatever a mapping file holds, it is read or told what is wrong with it, with lines that it has.
func FuzzParse(f *testing.F) {
	f.Add(sound)
	f.Add(appraised)
	paths, _ := filepath.Glob(filepath.Join(examples, "*.yaml"))
	for _, path := range paths {
		text, err := os.ReadFile(path)
		if err != nil {
			f.Fatal(err)
		}
		f.Add(string(text))
	}
	for _, text := range []string{"", "a", "- 1", "a: &b c", "a: *b", "<<: {a: 1}", "? a\n: b", "a: !!int 3", "--- 1\n--- 2", "a: |\n x", "operation: {a: b}", "\t", "a: 'b"} {
		f.Add(text)
	}
	f.Fuzz(func(t *testing.T, text string) {
		file, err := Parse("m.yaml", []byte(text))
		if err == nil {
			_, err = file.Compile(tableColumns, pointColumns)
		}
		var faults Faults
		if err != nil && !errors.As(err, &faults) {
			t.Fatalf("%v", err)
		}
		lines := strings.Count(text, "\n") + strings.Count(text, "\r") + 1
		for _, fault := range faults {
			if fault.Line < 0 || fault.Line > lines || fault.Detail == "" {
				t.Errorf("%v, of %d lines", fault, lines)
			}
		}
	})
}

// Whatever the cells of a row hold, the row has problems, or a request that the service can read: it may break rules, but never JSON's.
func TestAnyRowMakesSoundJSON(t *testing.T) {
	_, m, err := compileText(strings.Replace(sound, "  section_height: 1.2", "  section_rows: width\n  section_inverted: status\n  barrels: slope", 1))
	if err != nil {
		t.Fatal(err)
	}
	cell := rapid.OneOf(
		rapid.Just(row.Value{}),
		rapid.Map(rapid.Int64(), row.OfInt),
		rapid.Map(rapid.Float64(), row.OfFloat),
		rapid.Map(rapid.SampledFrom([]float64{math.NaN(), math.Inf(1), math.Inf(-1), 0, math.Copysign(0, -1), 5e-324, math.MaxFloat64}), row.OfFloat),
		rapid.Map(rapid.Bool(), row.OfBool),
		rapid.Map(rapid.String(), row.OfString),
		rapid.Map(rapid.SampledFrom([]string{"C", "B", "S", "concrete", "t", "1:2", "-", "1e", ".", "1e999", `"`, `[1],"x":[2]`, "[[1,2,3,4]]", "\x00", "\xff", "}", "NaN"}), row.OfString),
		rapid.Map(rapid.SliceOf(rapid.Byte()), row.OfBytes),
	)
	w := m.NewWriter()
	rapid.Check(t, func(t *rapid.T) {
		r := Row{Values: make([]row.Value, len(m.Columns))}
		for i := range r.Values {
			r.Values[i] = cell.Draw(t, "cell")
		}
		for range 2 * rapid.IntRange(0, 3).Draw(t, "points") {
			r.Children = append(r.Children, cell.Draw(t, "point"))
		}
		body, problems := w.Append(nil, r)
		if len(problems) > 0 {
			for _, p := range problems {
				if p.Code == "" || p.Text == "" || p.Column == "" {
					t.Fatalf("%+v", p)
				}
			}
			return
		}
		problem := operation.Depths.Check(body, operation.Options{})
		if problem != nil && problem.Status == 400 && !strings.HasPrefix(problem.Errors[0].Code, "number_") { // a number in a list that a cell holds
			t.Fatalf("%s: %v", body, problem)
		}
	})
}
