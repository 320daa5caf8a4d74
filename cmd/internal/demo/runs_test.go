package demo_test

import (
	"bytes"
	"encoding/json"
	"math"
	"os"
	"slices"
	"strings"
	"testing"

	"leat/api/operation"
	"leat/cmd/internal/demo"
)

const runsFile = "../../../testdata/ostermere_profiles.ndjson"

func operationNamed(t *testing.T, name string) *operation.Operation {
	t.Helper()
	for _, o := range operation.All() {
		if o.Name == name {
			return o
		}
	}
	t.Fatalf("there is no operation %q", name)
	return nil
}

// profileAnswer is what the tests read of an answer.
type profileAnswer struct {
	Stations []struct {
		Chainage    float64
		Reach       json.RawMessage
		BedLevel    float64  `json:"bed_level"`
		WaterLevel  float64  `json:"water_level"`
		EnergyLevel *float64 `json:"energy_level"`
		Depth       float64
		Energy      *float64 `json:"specific_energy"`
		Regime      string
		Curve       *string
	}
	Curves []struct {
		From, To float64
		Reach    json.RawMessage
		Curve    *string
	}
	Jumps []struct {
		Chainage        float64
		Reach           json.RawMessage
		UpstreamDepth   float64 `json:"upstream_depth"`
		DownstreamDepth float64 `json:"downstream_depth"`
		EnergyLoss      float64 `json:"energy_loss"`
		Form            string
	}
	Controls []struct {
		Chainage, Depth float64
		Kind            string
	}
	Extent   *float64
	Balance  struct{ Energy, Momentum float64 }
	Warnings []struct{ Code, Detail string }
}

// story tells an answer in the words of demo.Run.
func (a *profileAnswer) story() string {
	var words []string
	say := func(w string) {
		if n := len(words); n == 0 || words[n-1] != w {
			words = append(words, w)
		}
	}
	jumps := a.Jumps
	for _, c := range a.Curves {
		for len(jumps) > 0 && jumps[0].Chainage <= c.From {
			say("jump")
			jumps = jumps[1:]
		}
		switch {
		case c.Curve != nil:
			say(*c.Curve)
		case a.full(c.From, c.To):
			say("full")
		default:
			say("free")
		}
	}
	return strings.Join(words, " ")
}

// full reports whether every station inside a stretch runs full.
func (a *profileAnswer) full(from, to float64) bool {
	some := false
	for _, s := range a.Stations {
		if s.Chainage > from && s.Chainage < to || s.Chainage == from && s.Curve == nil {
			some = true
			if s.Regime != "full" {
				return false
			}
		}
	}
	return some
}

// Every run tells the story that the table promises, with small residuals; those that are wrong on purpose get the problem that it promises.
func TestEveryRunIsAnswered(t *testing.T) {
	const tolerance = 1e-11 // of the energy balance in m, of the momentum balance in m3
	profile := operationNamed(t, "profile")
	told := map[string]bool{}
	wrong, choked, partly := 0, 0, 0
	for _, r := range demo.Runs() {
		answer, id, problem := profile.Answer(nil, []byte(r.Text), operation.Options{})
		if string(id) != r.ID {
			t.Errorf("%s comes back as %s", r.ID, id)
		}
		if r.Status != 200 {
			wrong++
			if problem == nil {
				t.Errorf("%s (%s): answered %s", r.ID, r.Told, answer)
				continue
			}
			var pointers []string
			for _, f := range problem.Errors {
				pointers = append(pointers, f.Pointer)
			}
			slices.Sort(pointers)
			if problem.Status != r.Status || !slices.Equal(pointers, r.Pointers) {
				t.Errorf("%s (%s): status %d at %q, want %d at %q: %s", r.ID, r.Told, problem.Status, pointers, r.Status, r.Pointers, problem.Detail)
			}
			continue
		}
		if problem != nil {
			t.Errorf("%s (%s): %d %s %+v", r.ID, r.Told, problem.Status, problem.Detail, problem.Errors)
			continue
		}
		var a profileAnswer
		if err := json.Unmarshal(answer, &a); err != nil {
			t.Errorf("%s: the answer is no JSON: %v", r.ID, err)
			continue
		}
		if got := a.story(); got != r.Story {
			t.Errorf("%s (%s): %s, want %s", r.ID, r.Told, got, r.Story)
		}
		var kinds []string
		last := a.Curves[len(a.Curves)-1].To
		for _, c := range a.Controls {
			kinds = append(kinds, c.Kind)
			told["control "+c.Kind] = true
			if c.Kind == "critical" && c.Chainage > 0 && c.Chainage < last {
				choked++
			}
		}
		if got := strings.Join(kinds, " "); got != r.Controls {
			t.Errorf("%s (%s): controls %s, want %s", r.ID, r.Told, got, r.Controls)
		}
		if !(a.Balance.Energy <= tolerance && a.Balance.Momentum <= tolerance) {
			t.Errorf("%s (%s): balance %+v", r.ID, r.Told, a.Balance)
		}
		for _, w := range strings.Fields(r.Story) {
			told[w] = true
		}
		if strings.Contains(r.Story, "full") && r.Story != "full" {
			partly++
		}
		a.check(t, &r)
	}
	for _, want := range []string{"M1", "M2", "M3", "S1", "S2", "S3", "C1", "C3", "H2", "H3", "A2", "A3", "uniform", "jump", "full", "free",
		"control critical", "control depth", "control level", "control normal", "control free_overfall", "control gate", "control sharp_crested",
		"control broad_crested", "control rating"} {
		if !told[want] {
			t.Errorf("no run tells of %s", want)
		}
	}
	if wrong != 2 || choked < 2 || partly < 2 {
		t.Errorf("%d runs wrong on purpose, %d critical controls inside a run, %d barrels full over a part; want 2, at least 2, at least 2", wrong, choked, partly)
	}
}

// check holds an answer to what is true of every run: stations and curves in order and without gaps, levels that agree, an energy line that falls.
func (a *profileAnswer) check(t *testing.T, r *demo.Run) {
	t.Helper()
	fed := strings.Contains(r.Text, "inflow")
	for i, s := range a.Stations {
		if s.EnergyLevel == nil || s.Energy == nil || !(s.Depth > 0) {
			t.Errorf("%s: a station lacks a number: %+v", r.ID, s)
			continue
		}
		if off := math.Abs(s.BedLevel + *s.Energy - *s.EnergyLevel); !(off <= 1e-12*(1+math.Abs(*s.EnergyLevel))) {
			t.Errorf("%s: at %v the energy level is off by %v", r.ID, s.Chainage, off)
		}
		if !(s.WaterLevel > s.BedLevel && s.WaterLevel <= s.BedLevel+s.Depth && s.WaterLevel < *s.EnergyLevel) {
			t.Errorf("%s: at %v bed %v, water %v and energy %v do not lie above one another", r.ID, s.Chainage, s.BedLevel, s.WaterLevel, *s.EnergyLevel)
		}
		if i == 0 {
			continue
		}
		before := a.Stations[i-1]
		if !(s.Chainage >= before.Chainage) || !fed && before.EnergyLevel != nil && !(*s.EnergyLevel <= *before.EnergyLevel+1e-9) {
			t.Errorf("%s: from %v to %v the energy level goes from %v to %v", r.ID, before.Chainage, s.Chainage, *before.EnergyLevel, *s.EnergyLevel)
		}
	}
	at := 0.0
	for _, c := range a.Curves {
		if c.From != at || !(c.To >= c.From) {
			t.Errorf("%s: a curve from %v to %v follows one to %v", r.ID, c.From, c.To, at)
		}
		at = c.To
	}
	for _, j := range a.Jumps {
		if !(j.EnergyLoss > 0) || j.Form == "" {
			t.Errorf("%s: jump %+v", r.ID, j)
		}
	}
}

func TestCommittedRunsAreTheGeneratorsOutput(t *testing.T) {
	var made bytes.Buffer
	if err := demo.WriteRuns(&made); err != nil {
		t.Fatal(err)
	}
	if *update {
		if err := os.WriteFile(runsFile, made.Bytes(), 0o644); err != nil {
			t.Fatal(err)
		}
	}
	committed, err := os.ReadFile(runsFile)
	if err != nil {
		t.Fatal(err)
	}
	if !bytes.Equal(made.Bytes(), committed) {
		t.Error("testdata/ostermere_profiles.ndjson differs from what the generator writes; if that is meant: go test ./cmd/internal/demo -update")
	}
}

// Runs that lack one of these would show less than they seem to.
func TestRunsUseEveryMember(t *testing.T) {
	var all strings.Builder
	counts := map[int]bool{}
	for i, r := range demo.Runs() {
		if r.Line != i+1 || !strings.HasPrefix(r.Text, `{"id":`+r.ID+`,`) || !json.Valid([]byte(r.Text)) || strings.ContainsAny(r.Text, "\r\n") || r.Told == "" {
			t.Errorf("run %d is not told of, or not one line of JSON that begins with its id: %s", i+1, r.Text)
		}
		all.WriteString(r.Text)
		var request struct {
			Stations []struct {
				Section struct{ Points [][2]float64 }
			}
		}
		if err := json.Unmarshal([]byte(r.Text), &request); err != nil {
			t.Fatal(err)
		}
		for _, s := range request.Stations {
			counts[len(s.Section.Points)] = true
		}
	}
	if len(counts) < 3 {
		t.Errorf("surveyed sections of %d different numbers of points, want at least 3", len(counts))
	}
	for _, word := range []string{
		"reaches", "stations", "upstream", "downstream", "datum", "report", "spacing", "at", "geometry", "length", "inflow", "lateral_inflow", "drop",
		"loss_coefficient", "entry_loss_coefficient", "barrels", "depth", "level", "control", "gate", "opening", "contraction_coefficient", "weir",
		"sharp_crested", "broad_crested", "rating", "zones", "sand_roughness", "box", "circular", "two_stage", "surveyed", "us",
	} {
		if !strings.Contains(all.String(), `"`+word+`"`) {
			t.Errorf("no run has %q", word)
		}
	}
}
