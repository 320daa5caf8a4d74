package run

import (
	"context"
	"encoding/json"
	"errors"
	"fmt"
	"math"
	"math/rand/v2"
	"slices"
	"strings"
	"testing"

	"leat/api/operation"
	"leat/api/wire"
	"leat/cmd/internal/register/mapping"
	"leat/cmd/internal/register/row"
	"leat/cmd/internal/register/store"
)

// file maps the registers of these tests. Their rows are made by drain.
const file = `operation: depths
source: {format: postgres, table: drains, key: asset}
target: {format: postgres, table: results, copy: [name]}
missing: -999
columns:
  section_kind: {column: shape, values: {C: circular, T: trapezoidal}}
  section_diameter: {column: size, unit: mm}
  section_bottom_width: {column: size, unit: mm}
  section_side_slope: {column: side, unit: 1:x}
  section_bank_height: 1.5
  roughness_manning: {column: material, values: {concrete: 0.013, earth: 0.025}}
  bed_slope: {column: fall, unit: permille}
  discharge: {column: flow, unit: l/s}
`

var columns = []row.Column{
	{Name: "asset", Kind: row.Int}, {Name: "name", Kind: row.Text}, {Name: "shape", Kind: row.Text}, {Name: "size", Kind: row.Int}, {Name: "side", Kind: row.Float},
	{Name: "material", Kind: row.Text}, {Name: "fall", Kind: row.Float}, {Name: "flow", Kind: row.Float},
}

// A drain is a row of the tests' register; bad is the column that is wrong.
type drain struct {
	key        int64
	shape      string
	size       int64
	material   string
	fall, flow float64
	bad        string
}

func (d *drain) cells() []row.Value {
	cells := []row.Value{
		row.OfInt(d.key), row.OfString(fmt.Sprintf("drain %d", d.key)), row.OfString(d.shape), row.OfInt(d.size), row.OfFloat(2),
		row.OfString(d.material), row.OfFloat(d.fall), row.OfFloat(d.flow),
	}
	switch d.bad {
	case "shape":
		cells[2] = row.OfString("X")
	case "size":
		cells[3] = row.OfInt(-3)
	case "material":
		cells[5] = row.OfString("wood")
	case "fall":
		cells[6] = row.Value{}
	case "flow":
		cells[7] = row.OfFloat(math.NaN())
	}
	return cells
}

// request is the nested request of a drain, written by another program than the mapping: encoding/json.
func (d *drain) request() []byte {
	n := map[string]float64{"concrete": 0.013, "earth": 0.025}[d.material]
	tangent := d.fall / 1000
	section := map[string]any{"kind": "circular", "diameter": float64(d.size) / 1000}
	if d.shape == "T" {
		section = map[string]any{"kind": "trapezoidal", "bottom_width": float64(d.size) / 1000, "side_slope": 2, "bank_height": 1.5}
	}
	body, err := json.Marshal(map[string]any{
		"section": section, "roughness": map[string]any{"manning": n}, "bed_slope": tangent / math.Sqrt(1+tangent*tangent), "discharge": d.flow / 1000,
	})
	if err != nil {
		panic(err)
	}
	return body
}

// drains makes a register; one in a hundred rows is bad.
func drains(n int) []drain {
	random := rand.New(rand.NewPCG(7, 7))
	out := make([]drain, n)
	for i := range out {
		out[i] = drain{
			key: int64(3 * i), shape: []string{"C", "T"}[random.IntN(2)], size: int64(150 + 25*random.IntN(60)), material: []string{"concrete", "earth"}[random.IntN(2)],
			fall: 0.5 + 30*random.Float64(), flow: 1 + 400*random.Float64(),
		}
		if i%100 == 41 {
			out[i].bad = []string{"shape", "size", "material", "fall", "flow"}[random.IntN(5)]
		}
	}
	return out
}

func sourceOf(all []drain) *memorySource {
	s := &memorySource{columns: columns, rows: map[int64][]row.Value{}}
	for i := range all {
		s.rows[all[i].key] = all[i].cells()
	}
	return s
}

func prepare(t *testing.T, text string, source store.Source, options Options) *Job {
	t.Helper()
	f, err := mapping.Parse("m.yaml", []byte(text))
	if err != nil {
		t.Fatal(err)
	}
	job, err := Prepare(f, source, options)
	if err != nil {
		t.Fatal(err)
	}
	return job
}

func runOnce(t *testing.T, source store.Source, target store.Target, rows int) *Report {
	t.Helper()
	report, err := prepare(t, file, source, Options{Rows: rows}).Run(context.Background(), target)
	if err != nil {
		t.Fatal(err)
	}
	return report
}

// Ten thousand rows with one in a hundred bad: every result is the unary answer bit for bit, every bad row is told with its column.
func TestResultsAreTheUnaryAnswers(t *testing.T) {
	all := drains(10_000)
	target := newMemoryTarget()
	report := runOnce(t, sourceOf(all), target, 777)
	if report.Counts.Bad != 100 || report.Counts.Computed != 9900 || report.Counts.Read != 10_000 || report.Counts != target.counts {
		t.Errorf("%+v, target %+v", report.Counts, target.counts)
	}
	if len(target.results) != 9900 || len(target.problems) != 100 {
		t.Fatalf("%d results, %d rows with problems", len(target.results), len(target.problems))
	}
	for i := range all {
		d := &all[i]
		if d.bad != "" {
			if target.results[d.key] != nil || len(target.problems[d.key]) == 0 || target.problems[d.key][0].Column != d.bad {
				t.Errorf("row %d is bad in %s: %v", d.key, d.bad, target.problems[d.key])
			}
			continue
		}
		answer, _, problem := operation.Depths.Answer(nil, d.request(), operation.Options{Fingerprint: true})
		if problem != nil {
			t.Fatal(problem)
		}
		compareResult(t, target.layout, target.results[d.key], answer)
	}
}

// compareResult holds a result row against the JSON of the unary answer.
func compareResult(t *testing.T, layout *store.Layout, cells []row.Value, answer []byte) {
	t.Helper()
	var nested map[string]any
	if err := json.Unmarshal(answer, &nested); err != nil {
		t.Fatal(err)
	}
	flat := map[string]any{}
	for name, v := range nested {
		if object, ok := v.(map[string]any); ok {
			for below, v := range object {
				flat[name+"_"+below] = v
			}
			continue
		}
		flat[name] = v
	}
	numbers := 0
	for i, c := range layout.Columns {
		want, given := flat[c.Name]
		switch {
		case c.Role == store.RoleFingerprint:
			if cells[i].String() != want {
				t.Errorf("asset %v: fingerprint %v, unary %v", cells[0], cells[i], want)
			}
		case c.Role != store.RoleAnswer || c.Name == "warnings":
		case want == nil:
			if !cells[i].IsNull() {
				t.Errorf("asset %v: %s is %v, unary null (%v)", cells[0], c.Name, cells[i], given)
			}
		case c.Kind == row.Float:
			numbers++
			if math.Float64bits(want.(float64)) != math.Float64bits(cells[i].Float()) {
				t.Errorf("asset %v: %s is %v, unary %v", cells[0], c.Name, cells[i].Float(), want)
			}
		default:
			if cells[i].String() != fmt.Sprint(want) {
				t.Errorf("asset %v: %s is %v, unary %v", cells[0], c.Name, cells[i], want)
			}
		}
	}
	if numbers < 8 {
		t.Errorf("only %d numbers compared", numbers)
	}
}

// text is all that a target holds, but for run and computed_at.
func (t *memoryTarget) text() string {
	var b strings.Builder
	for _, key := range slices.Sorted(func(yield func(int64) bool) {
		for key := range t.results {
			if !yield(key) {
				return
			}
		}
	}) {
		for i, c := range t.layout.Columns {
			if c.Role != store.RoleRun && c.Role != store.RoleComputedAt {
				fmt.Fprintf(&b, "%d %v|", t.results[key][i].Kind, t.results[key][i])
			}
		}
		b.WriteByte('\n')
	}
	for _, key := range slices.Sorted(func(yield func(int64) bool) {
		for key := range t.problems {
			if !yield(key) {
				return
			}
		}
	}) {
		fmt.Fprintln(&b, key, len(t.problems[key]))
	}
	return b.String()
}

// A run that is broken off at any commit, before it or after it, goes on and ends as an undisturbed one.
func TestBrokenRunsGoOn(t *testing.T) {
	all := drains(1000)
	undisturbed := newMemoryTarget()
	runOnce(t, sourceOf(all), undisturbed, 100)
	for at := 1; at <= 11; at++ {
		for _, how := range []struct{ past, file bool }{{false, false}, {true, false}, {false, true}, {true, true}} {
			past := how.past
			target, source := newMemoryTarget(), sourceOf(all)
			target.breakAt, target.breakPast, source.file = at, past, how.file
			job := prepare(t, file, source, Options{Rows: 100})
			if _, err := job.Run(context.Background(), target); !errors.Is(err, errBroken) {
				t.Fatalf("commit %d: %v", at, err)
			}
			report, err := job.Run(context.Background(), target)
			if err != nil || !report.Resumed || report.Run != target.run {
				t.Fatalf("commit %d: %+v %v", at, report, err)
			}
			if got, want := target.text(), undisturbed.text(); got != want {
				t.Errorf("commit %d, past %v: the results differ from those of an undisturbed run", at, past)
			}
			if how.file {
				continue // the bad rows lie elsewhere
			}
			computed := int64((at - 1) * 99)
			if past {
				computed = int64(at * 99)
			}
			if want := max(990-computed, 0); report.Counts.Computed != want {
				t.Errorf("commit %d, past %v: %d computed, want %d: %+v", at, past, report.Counts.Computed, want, report.Counts)
			}
		}
	}
}

// A row that changes before the mark while a run is broken off is computed again when the run goes on.
func TestRowsChangedMeanwhile(t *testing.T) {
	all := drains(1000)
	source, target := sourceOf(all), newMemoryTarget()
	target.breakAt = 6
	job := prepare(t, file, source, Options{Rows: 100})
	if _, err := job.Run(context.Background(), target); !errors.Is(err, errBroken) {
		t.Fatal(err)
	}
	all[3].flow *= 2   // before the mark
	all[900].flow *= 2 // behind it
	all[5].bad = "material"
	source = sourceOf(all)
	delete(source.rows, all[7].key)
	report, err := prepare(t, file, source, Options{Rows: 100}).Run(context.Background(), target)
	if err != nil {
		t.Fatal(err)
	}
	fresh := newMemoryTarget()
	runOnce(t, source, fresh, 100)
	if target.text() != fresh.text() {
		t.Error("the results differ from those of a run over the changed register")
	}
	if report.Counts.Removed != 2 {
		t.Errorf("%+v", report.Counts)
	}
}

// A second run leaves alone what has not changed, and takes in what has: rows changed, spoilt, mended, renamed, new and gone.
func TestSecondRun(t *testing.T) {
	all := drains(1000)
	source, target := sourceOf(all), newMemoryTarget()
	runOnce(t, source, target, 100)
	before := target.text()
	report := runOnce(t, source, target, 130)
	if report.Counts.Computed != 0 || report.Counts.Unchanged != 990 || report.Counts.Bad != 10 || target.text() != before {
		t.Errorf("nothing has changed: %+v", report.Counts)
	}

	all[10].flow++
	all[20].bad = "fall"
	all[41].bad = ""
	source = sourceOf(all)
	source.rows[all[30].key][1] = row.OfString("renamed") // a copied column: the request stays the same
	delete(source.rows, all[50].key)
	delete(source.rows, all[999].key) // the last one
	extra := all[60]
	extra.key++
	source.rows[extra.key] = extra.cells()
	report = runOnce(t, source, target, 130)
	if c := report.Counts; c.Computed != 4 || c.Unchanged != 985 || c.Bad != 10 || c.Removed != 3 {
		t.Errorf("%+v", report.Counts)
	}
	fresh := newMemoryTarget()
	runOnce(t, source, fresh, 77)
	if target.text() != fresh.text() {
		t.Error("the results differ from those of a first run over the changed register")
	}

	// Another layout: everything is computed anew, and what is gone goes too.
	delete(source.rows, all[70].key)
	other := strings.Replace(file, "copy: [name]", "columns: [normal_depth]", 1)
	report, err := prepare(t, other, source, Options{Rows: 100}).Run(context.Background(), target)
	if err != nil || report.Counts.Unchanged != 0 || report.Counts.Removed != 1 {
		t.Errorf("%+v %v", report.Counts, err)
	}
}

// Whatever the number of workers and the size of batches, the results are the same and commits come in order.
func TestOrderAndWorkers(t *testing.T) {
	all := drains(2000)
	want := ""
	for _, workers := range []int{1, 2, 7} {
		for _, rows := range []int{1, 64, 5000} {
			target := newMemoryTarget()
			last := int64(-1)
			target.onCommit = func(int) {
				if mark := target.mark.Int(); mark < last {
					t.Errorf("mark %d behind %d", mark, last)
				} else {
					last = mark
				}
			}
			job := prepare(t, file, sourceOf(all[:min(len(all), 200*rows)]), Options{Rows: rows, Workers: workers})
			if _, err := job.Run(context.Background(), target); err != nil {
				t.Fatal(err)
			}
			if rows == 1 {
				continue
			}
			if want == "" {
				want = target.text()
			} else if target.text() != want {
				t.Errorf("%d workers, %d rows: other results", workers, rows)
			}
		}
	}
}

// A run that is cancelled ends soon and can be gone on with.
func TestCancelledRun(t *testing.T) {
	all := drains(3000)
	target := newMemoryTarget()
	ctx, cancel := context.WithCancel(context.Background())
	target.onCommit = func(n int) {
		if n == 3 {
			cancel()
		}
	}
	job := prepare(t, file, sourceOf(all), Options{Rows: 100})
	if _, err := job.Run(ctx, target); !errors.Is(err, context.Canceled) {
		t.Fatal(err)
	}
	if _, err := job.Run(context.Background(), target); err != nil || len(target.results) != 2970 {
		t.Fatal(err, len(target.results))
	}
}

// A check computes nothing and finds what a run finds in the rows themselves; a dry run computes and writes nothing.
func TestCheckAndDryRun(t *testing.T) {
	all := drains(1000)
	var listed []store.Problem
	options := Options{Rows: 100, Progress: func(p *Progress) {
		for _, problem := range p.Problems {
			problem.Asset = problem.Asset.Clone()
			listed = append(listed, problem)
		}
		if p.Total != 1000 {
			t.Errorf("total %d", p.Total)
		}
	}}
	report, err := prepare(t, file, sourceOf(all), options).Check(context.Background())
	if err != nil || report.Counts.Bad != 10 || report.Counts.Computed != 0 {
		t.Fatalf("%+v %v", report, err)
	}
	told := map[int64]string{}
	for _, p := range listed {
		told[p.Asset.Int()] += p.Column
	}
	for i := range all {
		if told[all[i].key] != all[i].bad {
			t.Errorf("row %d is bad in %q, told %q", all[i].key, all[i].bad, told[all[i].key])
		}
	}
	target := newMemoryTarget()
	report, err = prepare(t, file, sourceOf(all), Options{DryRun: true}).Run(context.Background(), target)
	if err != nil || report.Counts.Computed != 990 || target.commits != 0 || target.run != "" {
		t.Errorf("%+v %v", report, err)
	}
	if len(report.Worst) != kept || !slices.IsSortedFunc(report.Worst, func(a, b Worst) int { return -compareFloats(a.Measure, b.Measure) }) {
		t.Errorf("%v", report.Worst)
	}
}

func compareFloats(a, b float64) int {
	switch {
	case a < b:
		return -1
	case a > b:
		return 1
	}
	return 0
}

// The stretches that processes are given, in any order, make the same results as a run.
func TestProcesses(t *testing.T) {
	all := drains(1000)
	source, target, want := sourceOf(all), newMemoryTarget(), newMemoryTarget()
	runOnce(t, source, want, 100)
	job := prepare(t, file, source, Options{})
	state, err := target.Begin(context.Background(), job.Layout(), store.Start{New: "r"})
	if err != nil {
		t.Fatal(err)
	}
	processes := job.Processes(target, state, 2)
	bounds := []row.Value{{}, row.OfInt(500), row.OfInt(501), row.OfInt(1900), {}}
	for _, i := range []int{2, 0, 3, 1, 2} { // one of them twice, as after a lost answer
		var batch store.Batch
		if err := processes[i%2](context.Background(), bounds[i], bounds[i+1], &batch); err != nil {
			t.Fatal(err)
		}
		if err := target.Commit(context.Background(), &batch); err != nil {
			t.Fatal(err)
		}
	}
	if target.text() != want.text() {
		t.Error("the results differ from those of a run")
	}
}

// A panic of the solver costs its row.
func TestPanicCostsARow(t *testing.T) {
	f, err := mapping.Parse("m.yaml", []byte(file))
	if err != nil {
		t.Fatal(err)
	}
	broken := *f.Operation
	calls := 0
	broken.Solve = func(body []byte, options operation.Options) (operation.Solved, *wire.Problem) {
		if calls++; calls == 5 {
			panic("a fault of the program")
		}
		return operation.Depths.Solve(body, options)
	}
	f.Operation = &broken
	target := newMemoryTarget()
	job, err := Prepare(f, sourceOf(drains(30)), Options{Workers: 1})
	if err != nil {
		t.Fatal(err)
	}
	report, err := job.Run(context.Background(), target)
	if err != nil || report.Counts.Computed != 29 || len(target.problems[12]) != 1 || target.problems[12][0].Code != "internal_error" {
		t.Errorf("%+v %v %v", report, err, target.problems)
	}
}

// Faults of the target's part stop before anything is written, with their line.
func TestFaultsOfResults(t *testing.T) {
	for _, c := range []struct{ target, want string }{
		{"{format: postgres, table: r, columns: [normal_dept]}", `did you mean "normal_depth"`},
		{"{format: postgres, table: r, columns: [fingerprint]}", "in any case"},
		{"{format: postgres, table: r, columns: [fill, fill]}", "twice"},
		{"{format: postgres, table: r, copy: [run]}", "give ours a prefix"},
		{"{format: postgres, table: r, copy: [Run]}", "give ours a prefix"},
	} {
		f, err := mapping.Parse("m.yaml", []byte(strings.Replace(file, "{format: postgres, table: results, copy: [name]}", c.target, 1)))
		if err != nil {
			t.Fatal(err)
		}
		source := sourceOf(nil)
		source.columns = append(slices.Clone(columns), row.Column{Name: "run", Kind: row.Text}, row.Column{Name: "Run", Kind: row.Text})
		_, err = Prepare(f, source, Options{})
		var faults mapping.Faults
		if !errors.As(err, &faults) || faults[0].Line != 3 || !strings.Contains(faults[0].Detail, c.want) {
			t.Errorf("%s: %v", c.target, err)
		}
	}
}
