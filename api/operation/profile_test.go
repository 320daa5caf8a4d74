package operation

import (
	"encoding/json"
	"errors"
	"fmt"
	"math"
	"strings"
	"testing"

	"github.com/google/go-cmp/cmp"
	"github.com/google/go-cmp/cmp/cmpopts"

	"leat/api/wire"
	"leat/compute"
	"leat/compute/flow"
	"leat/compute/profile"
	"leat/compute/section"
)

const chainOfTwo = `{"id":"OST-MD","discharge":3,"gravity":9.8,"energy_coefficient":1.1,"reaches":[
	{"id":"upper","length":300,"bed_slope":0.002,"section":{"kind":"rectangular","bottom_width":3},"roughness":{"manning":0.015},"drop":0.5,"loss_coefficient":0.25},
	{"length":80,"bed_slope":0,"barrels":2,"section":{"kind":"box","width":1.5,"height":1},"roughness":{"manning":0.013},"inflow":0.5,"lateral_inflow":0.001,
		"entry_loss_coefficient":0.5}],
	"upstream":{"gate":{"opening":0.3}},"downstream":{"weir":{"kind":"broad_crested","crest_height":0.4,"crest_width":3,"discharge_coefficient":0.9}},
	"datum":100,"report":{"at":[0,190,380.0000001]}}`

// solveWith runs a request through an operation with a solver of the test's.
func solveWith(t *testing.T, body string, options Options, solve func(*profile.Run) (*profile.Answer, error)) (string, *wire.Problem) {
	t.Helper()
	op := newProfile(solve)
	answer, _, problem := op.Answer(nil, []byte(body), options)
	if problem == nil && !json.Valid(answer) {
		t.Fatalf("no JSON: %s", answer)
	}
	return string(answer), problem
}

var errSeen = errors.New("seen")

// seen returns the run that a request makes.
func seen(t *testing.T, body string) profile.Run {
	t.Helper()
	var run profile.Run
	if _, problem := solveWith(t, body, Options{}, func(r *profile.Run) (*profile.Answer, error) { run = *r; return nil, errSeen }); problem.Status != 500 {
		t.Fatal(problem, problem.Errors)
	}
	return run
}

// Every member of a request reaches the solver.
func TestProfileRun(t *testing.T) {
	got := seen(t, chainOfTwo)
	channels := cmpopts.IgnoreFields(flow.Channel{}, "Section", "Law")
	want := profile.Run{
		Discharge: 3, Datum: 100,
		Reaches: []profile.Reach{
			{Channel: flow.Channel{Slope: 0.002, Gravity: 9.8, Barrels: 1, EnergyCoefficient: 1.1}, Length: 300, Drop: 0.5, Loss: 0.25},
			{Channel: flow.Channel{Gravity: 9.8, Barrels: 2, EnergyCoefficient: 1.1}, Length: 80, Inflow: 0.5, Lateral: 0.001, Entry: 0.5},
		},
		Upstream:   profile.Boundary{Kind: profile.Gate, Opening: 0.3, Contraction: 0.61},
		Downstream: profile.Boundary{Kind: profile.BroadCrested, CrestHeight: 0.4, CrestWidth: 3, Coefficient: 0.9},
		Report:     profile.Report{At: []float64{0, 190, 380}, Most: wire.DefaultLimits().ReportPoints},
	}
	if diff := cmp.Diff(want, got, channels); diff != "" {
		t.Error(diff)
	}
	for i, height := range []float64{math.Inf(1), 1} {
		if c := got.Reaches[i].Channel; c.Section.Height() != height || c.Law == nil {
			t.Errorf("reach %d: %+v", i, c)
		}
	}
	got = seen(t, `{"discharge":4,"stations":[
		{"chainage":100,"section":{"kind":"surveyed","points":[[0,12],[2,10],[5,9.5],[8,12.4]]},"roughness":{"manning":0.035}},
		{"chainage":250,"bed_level":9,"section":{"kind":"rectangular","bottom_width":3},"roughness":{"strickler":40}},
		{"chainage":300,"bed_level":9.1,"section":{"kind":"rectangular","bottom_width":3},"roughness":{"strickler":40},"barrels":3}],
		"upstream":{"control":"normal"},"downstream":{"rating":[[0.5,1],[2,9]]},"report":{"spacing":10}}`)
	want = profile.Run{
		Discharge: 4,
		Stations: []profile.Station{
			{Channel: flow.Channel{Gravity: 9.80665, Barrels: 1}, Chainage: 0, BedLevel: 9.5},
			{Channel: flow.Channel{Gravity: 9.80665, Barrels: 1}, Chainage: 150, BedLevel: 9},
			{Channel: flow.Channel{Gravity: 9.80665, Barrels: 3}, Chainage: 200, BedLevel: 9.1},
		},
		Upstream:   profile.Boundary{Kind: profile.Normal},
		Downstream: profile.Boundary{Kind: profile.Rating, Curve: [][2]float64{{0.5, 1}, {2, 9}}},
		Report:     profile.Report{Spacing: 10, Most: wire.DefaultLimits().ReportPoints},
	}
	if diff := cmp.Diff(want, got, channels); diff != "" {
		t.Error(diff)
	}
	if a, b := got.Stations[1].Channel, got.Stations[2].Channel; a.Section != b.Section || a.Law != b.Law {
		t.Error("stations that say the same do not share section and law")
	}
	if _, ok := got.Stations[0].Channel.Section.(section.Surveyed); !ok {
		t.Error("the surveyed section is none")
	}
	for form, kind := range map[string]profile.BoundaryKind{
		`{"depth":0.7}`: profile.Depth, `{"level":0.7}`: profile.Level, `{"control":"critical"}`: profile.CriticalFlow, `{"control":"free_overfall"}`: profile.FreeOverfall,
		`{"weir":{"kind":"sharp_crested","crest_height":1,"crest_width":1}}`: profile.SharpCrested,
	} {
		if got := seen(t, oneReach(`"downstream":`+form)); got.Downstream.Kind != kind || got.Upstream.Kind != profile.LeftOut || len(form) < 14 && got.Downstream.Value != 0.7 {
			t.Errorf("%s: %+v", form, got.Downstream)
		}
	}
}

// oneReach is a request of one reach.
func oneReach(members string) string {
	return `{"discharge":3,"reaches":[{"length":300,"bed_slope":0.002,"section":{"kind":"rectangular","bottom_width":3},"roughness":{"manning":0.015}}],` + members + `}`
}

// Faults of the channels have the pointers of their reaches and stations, all of them in one answer.
func TestProfileChannelFaults(t *testing.T) {
	for body, want := range map[string]string{
		`{"discharge":1,"reaches":[
			{"length":1,"bed_slope":0,"section":{"kind":"surveyed","points":[[0,1],[1,0],[0.5,1]]},"roughness":{"manning":0.02}},
			{"length":1,"bed_slope":0,"section":{"kind":"box","width":1,"height":1,"haunch":0.6},"roughness":{"manning":0.02}},
			{"length":1,"bed_slope":0,"section":{"kind":"two_stage","bottom_width":1,"side_slope":1,"bench_height":1,"bench_width":1,"upper_side_slope":1},
				"roughness":{"zones":[{"until":1,"manning":0.02},{"until":0,"manning":0.02},{"manning":0.03}]}}],"downstream":{"depth":1}}`: "/reaches/0/section/points/2/0 /reaches/1/section/haunch /reaches/2/roughness/zones/1/until",
		`{"discharge":1,"stations":[
			{"chainage":0,"bed_level":0,"section":{"kind":"tabulated","rows":[[1,1,3,1],[0.5,2,4,1]]},"roughness":{"manning":0.02}},
			{"chainage":5,"bed_level":5,"section":{"kind":"rectangular","bottom_width":1},"roughness":{"manning":0.02}},
			{"chainage":7,"bed_level":7.5,"section":{"kind":"rectangular","bottom_width":1},"roughness":{"manning":0.02}}],"downstream":{"depth":1}}`: "/stations/0/section/rows/1/0 /stations/1/chainage /stations/2/chainage",
	} {
		_, problem := solveWith(t, body, Options{}, profile.Solve)
		if problem == nil || problem.Status != 422 {
			t.Errorf("%s: %v", body, problem)
			continue
		}
		var got []string
		for _, f := range problem.Errors {
			got = append(got, f.Pointer)
		}
		if strings.Join(got, " ") != want {
			t.Errorf("got %v\nwant %s\n%v", got, want, problem.Errors)
		}
	}
}

// What the solver refuses has a status, a code and the pointer of the request's own member.
func TestProfileRefusals(t *testing.T) {
	late := wire.TimeLimit("late")
	downstream := `"downstream":{"weir":{"kind":"broad_crested","crest_height":1,"crest_width":1}},"upstream":{"level":4}`
	for _, c := range []struct {
		err    error
		status int
		want   string
	}{
		{&profile.NoSolution{Code: "no_steady_flow", Detail: "d", Member: ""}, 422, " no_steady_flow"},
		{&profile.NoSolution{Code: "weir_head", Detail: "d", Member: "downstream"}, 422, "/downstream/weir weir_head"},
		{&profile.NoSolution{Code: "level_below_bed", Detail: "d", Member: "upstream/level"}, 422, "/upstream/level level_below_bed"},
		{&profile.NoSolution{Code: "c", Detail: "d", Member: "upstream/value"}, 422, "/upstream/level c"},
		{&profile.NoSolution{Code: "c", Detail: "d", Member: "downstream/crest_height"}, 422, "/downstream/weir/crest_height c"},
		{compute.Faults{{Member: "reaches/2/loss", Code: "x", Detail: "d"}, {Member: "reaches/0/length", Code: "y", Detail: "d"}, {Member: "discharge", Code: "z", Detail: "d"}}, 422,
			"/reaches/2/loss_coefficient x,/reaches/0/length y,/discharge z"},
		{compute.Faults{{Member: "report", Code: "too_many_stations", Detail: "d"}}, 413, "/report too_many_stations"},
		{late, 504, ""},
		{fmt.Errorf("solve: %w", late), 504, ""},
		{errors.New("not converged"), 500, ""},
	} {
		_, problem := solveWith(t, oneReach(downstream), Options{}, func(*profile.Run) (*profile.Answer, error) { return nil, c.err })
		var got []string
		for _, f := range problem.Errors {
			got = append(got, f.Pointer+" "+f.Code)
		}
		if problem.Status != c.status || strings.Join(got, ",") != c.want {
			t.Errorf("%v: %d %q, want %d %q", c.err, problem.Status, got, c.status, c.want)
		}
	}
	begun := 0
	_, problem := solveWith(t, oneReach(downstream), Options{Begin: func(int) func() error { begun++; return func() error { return late } }},
		func(r *profile.Run) (*profile.Answer, error) { return nil, r.Checkpoint() })
	if problem != late || begun != 1 {
		t.Errorf("%v after %d beginnings, want the checkpoint's problem", problem, begun)
	}
	calls := 0
	_, problem = solveWith(t, oneReach(downstream), Options{Begin: func(int) func() error {
		return func() error {
			if calls++; calls > 1 {
				return late
			}
			return nil
		}
	}}, func(r *profile.Run) (*profile.Answer, error) { return nil, r.Checkpoint() })
	if problem != late || calls != 2 {
		t.Errorf("%v after %d calls, want the solver's second call to end it", problem, calls)
	}
}

// Every part of a solver's answer has its place.
func TestProfileAnswer(t *testing.T) {
	nan := math.NaN()
	text, problem := solveWith(t, chainOfTwo, Options{Inside: true}, func(r *profile.Run) (*profile.Answer, error) {
		upper, lower := r.Reaches[0].Channel.State(0.25, 3), r.Reaches[1].Channel.State(1, 3.5)
		return &profile.Answer{
			Stations: []profile.Point{
				{Chainage: 0, Reach: 0, BedLevel: 101.1, WaterLevel: 101.35, EnergyLevel: 102, State: upper, Curve: "M3"},
				{Chainage: 300, Reach: 0, BedLevel: 100.5, WaterLevel: 100.75, EnergyLevel: 101, State: upper, Curve: "M3"},
				{Chainage: 300, Reach: 1, BedLevel: 100, WaterLevel: 101, EnergyLevel: 101.5, State: lower},
			},
			Reaches:  []profile.ReachSummary{{NormalDepth: 0.6, CriticalDepth: 0.5, Class: flow.Mild}, {NormalDepth: nan, CriticalDepth: 0.8, Class: flow.HorizontalSlope}},
			Curves:   []profile.CurveSpan{{From: 0, To: 300, Reach: 0, Curve: "M3"}, {From: 300, To: 380, Reach: 1}},
			Jumps:    []profile.Jump{{Chainage: 300, Reach: 1, UpstreamDepth: 0.25, DownstreamDepth: 1, FroudeNumber: 3, EnergyLoss: 0.4, Length: 6, Form: "oscillating"}},
			Controls: []profile.Control{{Chainage: 0, Kind: "gate", Depth: 0.183}},
			Extent:   nan, Balance: profile.Balance{Energy: 1e-12, Momentum: 2e-12},
			Notes: []profile.Note{
				{Code: "boundary_does_not_govern", Detail: "It does not govern.", Chainage: nan, End: "downstream"},
				{Code: "not_rectangular", Detail: "The length is for rectangular sections.", Chainage: 310},
				{Code: "not_rectangular", Detail: "The length is for rectangular sections.", Chainage: 320},
			},
		}, nil
	})
	if problem != nil {
		t.Fatal(problem)
	}
	var got map[string]any
	if err := json.Unmarshal([]byte(text), &got); err != nil {
		t.Fatal(err)
	}
	first := got["stations"].([]any)[0].(map[string]any)
	for name, want := range map[string]any{"chainage": 0.0, "reach": "upper", "bed_level": 101.1, "water_level": 101.35, "energy_level": 102.0, "curve": "M3",
		"discharge": 3.0, "depth": 0.25, "velocity": 4.0, "regime": "supercritical", "area": 0.75} {
		if first[name] != want {
			t.Errorf("%s is %v, want %v", name, first[name], want)
		}
	}
	if first["uniform_discharge"] == nil {
		t.Error("a station on a falling bed has no uniform_discharge")
	}
	last := got["stations"].([]any)[2].(map[string]any)
	if _, has := last["uniform_discharge"]; has || last["regime"] != "full" || last["froude_number"] != nil || last["curve"] != nil || last["reach"] != 1.0 {
		t.Errorf("full station %v", last)
	}
	delete(got, "stations")
	var want map[string]any
	if err := json.Unmarshal([]byte(`{"id":"OST-MD","units":"si",
		"reaches":[{"id":"upper","normal_depth":0.6,"critical_depth":0.5,"slope_class":"mild"},{"id":1,"normal_depth":null,"critical_depth":0.8,"slope_class":"horizontal"}],
		"curves":[{"from":0,"to":300,"reach":"upper","curve":"M3"},{"from":300,"to":380,"reach":1,"curve":null}],
		"jumps":[{"chainage":300,"reach":1,"upstream_depth":0.25,"downstream_depth":1,"froude_number":3,"energy_loss":0.4,"length":6,"form":"oscillating"}],
		"controls":[{"chainage":0,"kind":"gate","depth":0.183}],"extent":null,"balance":{"energy":1e-12,"momentum":2e-12},
		"warnings":[{"code":"boundary_does_not_govern","detail":"It does not govern.","pointer":"/downstream/weir"},
			{"code":"not_rectangular","detail":"The length is for rectangular sections. This is at chainage 310 m. The same holds at 1 other place of this answer.","pointer":"/reaches/1"}]}`), &want); err != nil {
		t.Fatal(err)
	}
	if diff := cmp.Diff(want, got); diff != "" {
		t.Error(diff)
	}
}

// The same run in US units gives the same flow: every number of the answer is the other's, converted.
func TestProfileInUSUnits(t *testing.T) {
	const foot = 0.3048
	run := func(units string, f float64) map[string]any {
		body := fmt.Sprintf(`{"units":%q,"gravity":%v,"discharge":%v,"reaches":[
			{"length":%v,"bed_slope":0.001,"section":{"kind":"trapezoidal","bottom_width":%v,"side_slope":1.5},"roughness":{"manning":0.03},"drop":%v},
			{"length":%v,"bed_slope":0.0005,"section":{"kind":"rectangular","bottom_width":%v},"roughness":{"strickler":50},"lateral_inflow":%v}],
			"downstream":{"depth":%v},"datum":%v,"report":{"spacing":%v}}`,
			units, 9.81/f, 4/(f*f*f), 300/f, 2/f, 0.2/f, 200/f, 3/f, 0.001/(f*f), 1.4/f, 20/f, 100/f)
		text, problem := solveWith(t, body, Options{}, profile.Solve)
		if problem != nil {
			t.Fatal(problem, problem.Errors)
		}
		var answer map[string]any
		if err := json.Unmarshal([]byte(text), &answer); err != nil {
			t.Fatal(err)
		}
		return answer
	}
	si, us := run("si", 1), run("us", foot)
	quantities := map[string]wire.Quantity{}
	for _, m := range wire.MemberUnits() {
		quantities[m.Member] = m.Quantity
	}
	numbers := 0
	var compare func(at, name string, a, b any)
	compare = func(at, name string, a, b any) {
		switch a := a.(type) {
		case map[string]any:
			for k := range a {
				compare(at+"/"+k, k, a[k], b.(map[string]any)[k])
			}
		case []any:
			if len(a) != len(b.([]any)) {
				t.Fatalf("%s: %d and %d items", at, len(a), len(b.([]any)))
			}
			for i := range a {
				compare(fmt.Sprint(at, "/", i), name, a[i], b.([]any)[i])
			}
		case float64:
			if name == "reach" || name == "id" || strings.HasPrefix(at, "/balance") {
				return
			}
			numbers++
			back := wire.US.ToSI(quantities[name], b.(float64))
			if !(math.Abs(back-a) <= 1e-9*math.Max(math.Abs(a), 1e-3)) {
				t.Errorf("%s: %v and %v", at, a, back)
			}
		case nil:
			if b != nil {
				t.Errorf("%s: null and %v", at, b)
			}
		}
	}
	compare("", "", si, us)
	if numbers < 100 {
		t.Errorf("only %d numbers compared", numbers)
	}
}
