package profile_test

import (
	"bufio"
	"bytes"
	"encoding/json"
	"errors"
	"fmt"
	"math"
	"os"
	"slices"
	"strings"
	"testing"

	"leat/compute/flow"
	"leat/compute/friction"
	"leat/compute/profile"
	"leat/compute/section"
)

// gravity is the standard acceleration of free fall, m/s2.
const gravity = 9.80665

// reference is one line of profiles.jsonl: a run with what SciPy makes of it.
type reference struct {
	Name       string             `json:"name"`
	Discharge  float64            `json:"discharge"`
	Reaches    []referenceReach   `json:"reaches"`
	Stations   []referenceReach   `json:"stations"`
	Upstream   *referenceBoundary `json:"upstream"`
	Downstream *referenceBoundary `json:"downstream"`
	Datum      float64            `json:"datum"`

	Expect   []expectedDepth   `json:"expect"`
	Jumps    [][3]float64      `json:"jumps"` // chainage, depths upstream and downstream
	Controls []expectedControl `json:"controls"`
}

// referenceReach describes a reach, or a station.
type referenceReach struct {
	Kind     string           `json:"kind"`
	Section  referenceSection `json:"section"`
	Law      referenceLaw     `json:"law"`
	BedSlope float64          `json:"bed_slope"`
	Barrels  int              `json:"barrels"`
	Alpha    float64          `json:"energy_coefficient"`
	Beta     float64          `json:"momentum_coefficient"`

	Length  float64 `json:"length"`
	Inflow  float64 `json:"inflow"`
	Lateral float64 `json:"lateral"`
	Drop    float64 `json:"drop"`
	Loss    float64 `json:"loss"`
	Entry   float64 `json:"entry"`

	Chainage float64 `json:"chainage"`
	BedLevel float64 `json:"bed_level"`
}

type referenceSection struct {
	BottomWidth     float64      `json:"bottom_width"`
	SideSlope       float64      `json:"side_slope"`
	LeftSideSlope   float64      `json:"left_side_slope"`
	RightSideSlope  float64      `json:"right_side_slope"`
	TopWidth        float64      `json:"top_width"`
	Width           float64      `json:"width"`
	Height          float64      `json:"height"`
	Diameter        float64      `json:"diameter"`
	BenchHeight     float64      `json:"bench_height"`
	LeftBenchWidth  float64      `json:"left_bench_width"`
	RightBenchWidth float64      `json:"right_bench_width"`
	UpperSideSlope  float64      `json:"upper_side_slope"`
	Points          [][2]float64 `json:"points"`
}

type referenceLaw struct {
	Manning            float64      `json:"manning"`
	Strickler          float64      `json:"strickler"`
	Chezy              float64      `json:"chezy"`
	SandRoughness      float64      `json:"sand_roughness"`
	KinematicViscosity float64      `json:"kinematic_viscosity"`
	ManningByDepth     [][2]float64 `json:"manning_by_depth"`
	Bed                float64      `json:"bed"`
	Sides              float64      `json:"sides"`
	Until              []float64    `json:"until"`
	Zones              []float64    `json:"zones"`
	Combine            string       `json:"combine"`
}

type referenceBoundary struct {
	Kind        string       `json:"kind"`
	Value       float64      `json:"value"`
	Opening     float64      `json:"opening"`
	Contraction float64      `json:"contraction"`
	CrestHeight float64      `json:"crest_height"`
	CrestWidth  float64      `json:"crest_width"`
	Coefficient float64      `json:"coefficient"`
	Curve       [][2]float64 `json:"curve"`
}

// expectedDepth is [chainage, depth, curve], curve null where none is claimed.
type expectedDepth struct {
	chainage, depth float64
	curve           string
	named           bool
}

func (e *expectedDepth) UnmarshalJSON(text []byte) error {
	var curve *string
	row := []any{&e.chainage, &e.depth, &curve}
	if err := json.Unmarshal(text, &row); err != nil {
		return err
	}
	if len(row) != 3 || !(e.depth > 0) {
		return fmt.Errorf("%s is no [chainage, depth, curve]", text)
	}
	if e.named = curve != nil; e.named {
		e.curve = *curve
	}
	return nil
}

// expectedControl is [chainage, depth, kind].
type expectedControl struct {
	chainage, depth float64
	kind            string
}

func (e *expectedControl) UnmarshalJSON(text []byte) error {
	row := []any{&e.chainage, &e.depth, &e.kind}
	if err := json.Unmarshal(text, &row); err != nil {
		return err
	}
	if len(row) != 3 || e.kind == "" {
		return fmt.Errorf("%s is no [chainage, depth, kind]", text)
	}
	return nil
}

// section builds a section of a kind.
func (s *referenceSection) build(kind string) (section.Section, error) {
	switch kind {
	case "rectangular":
		return section.NewRectangular(s.BottomWidth)
	case "trapezoidal":
		return section.NewTrapezoidal(s.BottomWidth, s.LeftSideSlope, s.RightSideSlope)
	case "triangular":
		return section.NewTriangular(s.LeftSideSlope, s.RightSideSlope)
	case "parabolic":
		return section.NewParabolic(s.TopWidth, s.Height)
	case "u_shaped":
		return section.NewUShaped(s.Width)
	case "circular":
		return section.NewCircular(s.Diameter)
	case "egg":
		return section.NewEgg(s.Height, false)
	case "horseshoe":
		return section.NewHorseshoe(s.Height)
	case "box":
		return section.NewBox(s.Width, s.Height, 0)
	case "surveyed":
		return section.NewSurveyed(s.Points)
	case "two_stage":
		return section.NewTwoStage(section.TwoStage{BottomWidth: s.BottomWidth, LeftSideSlope: s.SideSlope, RightSideSlope: s.SideSlope, BenchHeight: s.BenchHeight,
			LeftBenchWidth: s.LeftBenchWidth, RightBenchWidth: s.RightBenchWidth, UpperSideSlope: s.UpperSideSlope})
	}
	return nil, fmt.Errorf("unknown kind %q", kind)
}

func (l *referenceLaw) build(s section.Section) (friction.Law, error) {
	switch {
	case l.ManningByDepth != nil:
		return friction.NewManningByDepth(l.ManningByDepth)
	case l.Bed > 0 && l.Combine == "horton_einstein":
		return friction.NewBedAndSides(s.(section.Bedded), l.Bed, l.Sides, friction.HortonEinstein)
	case l.Zones != nil && l.Combine == "divided":
		return friction.NewZones(s.(section.Zoned), l.Until, l.Zones, friction.Divided)
	case l.Manning > 0:
		return friction.NewManning(l.Manning)
	case l.Strickler > 0:
		return friction.NewStrickler(l.Strickler)
	case l.Chezy > 0:
		return friction.NewChezy(l.Chezy)
	case l.SandRoughness > 0:
		return friction.NewSandRoughness(l.SandRoughness, l.KinematicViscosity, gravity)
	}
	return nil, errors.New("no law")
}

func (r *referenceReach) channel() (flow.Channel, error) {
	s, err := r.Section.build(r.Kind)
	if err != nil {
		return flow.Channel{}, err
	}
	law, err := r.Law.build(s)
	return flow.Channel{Section: s, Law: law, Slope: r.BedSlope, Gravity: gravity, Barrels: r.Barrels, EnergyCoefficient: r.Alpha, MomentumCoefficient: r.Beta}, err
}

var boundaryKinds = map[string]profile.BoundaryKind{"depth": profile.Depth, "level": profile.Level, "normal": profile.Normal, "critical": profile.CriticalFlow,
	"free_overfall": profile.FreeOverfall, "gate": profile.Gate, "sharp_crested": profile.SharpCrested, "broad_crested": profile.BroadCrested, "rating": profile.Rating}

func (b *referenceBoundary) build() (profile.Boundary, error) {
	if b == nil {
		return profile.Boundary{}, nil
	}
	kind, known := boundaryKinds[b.Kind]
	if !known {
		return profile.Boundary{}, fmt.Errorf("unknown boundary %q", b.Kind)
	}
	return profile.Boundary{Kind: kind, Value: b.Value, Opening: b.Opening, Contraction: b.Contraction, CrestHeight: b.CrestHeight, CrestWidth: b.CrestWidth,
		Coefficient: b.Coefficient, Curve: b.Curve}, nil
}

// run builds the run, reported at the chainages of which something is expected.
func (r *reference) run() (*profile.Run, error) {
	run := &profile.Run{Discharge: r.Discharge, Datum: r.Datum}
	for i := range r.Reaches {
		d := &r.Reaches[i]
		channel, err := d.channel()
		if err != nil {
			return nil, err
		}
		run.Reaches = append(run.Reaches, profile.Reach{Channel: channel, Length: d.Length, Inflow: d.Inflow, Lateral: d.Lateral, Drop: d.Drop, Loss: d.Loss, Entry: d.Entry})
	}
	for i := range r.Stations {
		d := &r.Stations[i]
		channel, err := d.channel()
		if err != nil {
			return nil, err
		}
		run.Stations = append(run.Stations, profile.Station{Channel: channel, Chainage: d.Chainage, BedLevel: d.BedLevel})
	}
	var err error
	if run.Upstream, err = r.Upstream.build(); err != nil {
		return nil, err
	}
	if run.Downstream, err = r.Downstream.build(); err != nil {
		return nil, err
	}
	for _, e := range r.Expect {
		run.Report.At = append(run.Report.At, e.chainage)
	}
	if !slices.IsSorted(run.Report.At) {
		return nil, errors.New("chainages do not rise")
	}
	return run, nil
}

// length returns the length of a run.
func length(run *profile.Run) float64 {
	if n := len(run.Stations); n > 0 {
		return run.Stations[n-1].Chainage - run.Stations[0].Chainage
	}
	sum := 0.0
	for i := range run.Reaches {
		sum += run.Reaches[i].Length
	}
	return sum
}

// readReferences reads profiles.jsonl. It refuses unknown members and runs that assert nothing.
func readReferences(data []byte) ([]reference, error) {
	var references []reference
	lines := bufio.NewScanner(bytes.NewReader(data))
	lines.Buffer(nil, 1<<20)
	names := map[string]bool{}
	for n := 1; lines.Scan(); n++ {
		decoder := json.NewDecoder(bytes.NewReader(lines.Bytes()))
		decoder.DisallowUnknownFields()
		if n == 1 {
			var header struct {
				About string `json:"about"`
			}
			if err := decoder.Decode(&header); err != nil || header.About == "" {
				return nil, fmt.Errorf("no header: %v", err)
			}
			continue
		}
		var r reference
		if err := decoder.Decode(&r); err != nil {
			return nil, fmt.Errorf("line %d: %w", n, err)
		}
		if r.Name == "" || names[r.Name] || len(r.Expect) == 0 || len(r.Controls) == 0 || r.Downstream == nil {
			return nil, fmt.Errorf("line %d: %q has no name of its own, no boundary, or asserts nothing", n, r.Name)
		}
		names[r.Name] = true
		references = append(references, r)
	}
	return references, lines.Err()
}

func TestReferencesAreReadStrictly(t *testing.T) {
	const header = `{"about":"x"}` + "\n"
	const good = `{"name":"a","discharge":1,"downstream":{"kind":"depth","value":1},"expect":[[0,1,"M1"]],"jumps":[],"controls":[[0,1,"depth"]]}`
	if got, err := readReferences([]byte(header + good)); err != nil || len(got) != 1 || got[0].Expect[0] != (expectedDepth{0, 1, "M1", true}) {
		t.Fatalf("%v %v", got, err)
	}
	for _, bad := range []string{
		good,
		header + good + "\n" + good,
		header + strings.Replace(good, `[[0,1,"M1"]]`, `[]`, 1),
		header + strings.Replace(good, `[0,1,"M1"]`, `[0,"1","M1"]`, 1),
		header + strings.Replace(good, `[0,1,"M1"]`, `[0,null,"M1"]`, 1),
		header + strings.Replace(good, `[0,1,"M1"]`, `[0,1]`, 1),
		header + strings.Replace(good, `[[0,1,"depth"]]`, `[]`, 1),
		header + strings.Replace(good, `"name"`, `"nam"`, 1),
	} {
		if _, err := readReferences([]byte(bad)); err == nil {
			t.Errorf("accepted: %s", bad)
		}
	}
}

// TestReferences holds solved runs against independent integration: depths, also those at jumps and controls, within 1e-9 of themselves, chainages of
// jumps within 1e-9 of the run's length.
func TestReferences(t *testing.T) {
	data, err := os.ReadFile("../../testdata/references/profiles.jsonl")
	if err != nil {
		t.Fatal(err)
	}
	references, err := readReferences(data)
	if err != nil {
		t.Fatal(err)
	}
	worst := map[string]struct {
		off  float64
		name string
	}{}
	note := func(what string, off float64, name string) {
		if off > worst[what].off || math.IsNaN(off) {
			worst[what] = struct {
				off  float64
				name string
			}{off, name}
		}
	}
	counts := map[string]int{}
	for i := range references {
		r := &references[i]
		t.Run(strings.ReplaceAll(r.Name, " ", "_"), func(t *testing.T) {
			run, err := r.run()
			if err != nil {
				t.Fatal(err)
			}
			answer, err := profile.Solve(run)
			if err != nil {
				t.Fatal(err)
			}
			counts["runs"]++
			for _, e := range r.Expect {
				found := false
				for j := range answer.Stations {
					p := &answer.Stations[j]
					if !(math.Abs(p.Chainage-e.chainage) <= 1e-15*length(run)) {
						continue
					}
					found = true
					counts["depths"]++
					off := math.Abs(p.State.Geometry.Depth-e.depth) / e.depth
					note("depth", off, r.Name)
					if !(off <= 1e-9) {
						t.Errorf("depth %.17g at %g, want %.17g: off by %.2g", p.State.Geometry.Depth, e.chainage, e.depth, off)
					}
					if e.named && p.Curve != e.curve {
						t.Errorf("curve %q at %g, want %q", p.Curve, e.chainage, e.curve)
					}
				}
				if !found {
					t.Errorf("no station at %v", e.chainage)
				}
			}
			whole := length(run)
			if len(answer.Jumps) != len(r.Jumps) {
				t.Fatalf("jumps %+v, want %v", answer.Jumps, r.Jumps)
			}
			for j, want := range r.Jumps {
				got := answer.Jumps[j]
				counts["jumps"]++
				off := math.Abs(got.Chainage-want[0]) / whole
				note("jump's chainage over length", off, r.Name)
				if !(off <= 1e-9) {
					t.Errorf("jump at %.17g, want %.17g", got.Chainage, want[0])
				}
				for _, pair := range [][2]float64{{got.UpstreamDepth, want[1]}, {got.DownstreamDepth, want[2]}} {
					off := math.Abs(pair[0]-pair[1]) / pair[1]
					note("jump's depths", off, r.Name)
					if !(off <= 1e-9) {
						t.Errorf("depth %.17g at the jump, want %.17g", pair[0], pair[1])
					}
				}
			}
			for _, want := range r.Controls {
				var best *profile.Control
				for j := range answer.Controls {
					got := &answer.Controls[j]
					if got.Kind == want.kind && math.Abs(got.Chainage-want.chainage) <= 1e-6*whole {
						best = got
					}
				}
				if best == nil {
					t.Errorf("no control %q at %g among %+v", want.kind, want.chainage, answer.Controls)
					continue
				}
				counts["controls"]++
				off := math.Abs(best.Depth-want.depth) / want.depth
				note("control's depth", off, r.Name)
				if !(off <= 1e-8) {
					t.Errorf("depth %.17g at the control %q, want %.17g", best.Depth, want.kind, want.depth)
				}
			}
			for j := range answer.Controls {
				got := &answer.Controls[j]
				if !slices.ContainsFunc(r.Controls, func(c expectedControl) bool {
					return c.kind == got.Kind && math.Abs(got.Chainage-c.chainage) <= 1e-6*whole
				}) {
					t.Errorf("control %+v is not expected", *got)
				}
			}
			if !(answer.Balance.Energy <= 1e-8) || !(answer.Balance.Momentum <= 1e-8) {
				t.Errorf("balance %+v", answer.Balance)
			}
		})
	}
	t.Log(counts)
	for what, w := range worst {
		t.Logf("%s: worst %.2g in %q", what, w.off, w.name)
	}
}
