package flow_test

import (
	"bufio"
	"bytes"
	"encoding/json"
	"fmt"
	"maps"
	"math"
	"os"
	"slices"
	"strconv"
	"strings"
	"testing"

	"leat/compute/flow"
	"leat/compute/friction"
	"leat/compute/section"
)

// stateMembers are the members of a reference's state, in order.
var stateMembers = []string{"area", "wetted_perimeter", "top_width", "moment", "perimeter_rate", "top_width_rate", "hydraulic_radius", "hydraulic_depth",
	"centroid_depth", "conveyance", "uniform_discharge", "velocity", "velocity_head", "froude_number", "specific_energy",
	"specific_force", "friction_slope", "bed_shear_stress", "stream_power"}

// stateValues returns the same of a state.
func stateValues(s *flow.State) []float64 {
	g := s.Geometry
	return []float64{g.Area, g.Perimeter, g.TopWidth, g.Moment, g.PerimeterRate, g.TopWidthRate, s.Radius, s.HydraulicDepth,
		s.CentroidDepth, s.Conveyance, s.UniformDischarge, s.Velocity, s.VelocityHead, s.FroudeNumber, s.SpecificEnergy,
		s.SpecificForce, s.FrictionSlope, s.BedShearStress, s.StreamPower}
}

// want is what a reference says of a number: nothing, that there is none, or its value.
type want struct {
	given, absent bool
	value         float64
}

// UnmarshalJSON reads null or a decimal in a string, of which it refuses any that is no finite number.
func (w *want) UnmarshalJSON(text []byte) error {
	*w = want{given: true, absent: bytes.Equal(text, []byte("null"))}
	if w.absent {
		return nil
	}
	var decimal string
	if err := json.Unmarshal(text, &decimal); err != nil {
		return err
	}
	var err error
	w.value, err = strconv.ParseFloat(decimal, 64)
	return err
}

// reference is one line of flow.jsonl.
type reference struct {
	Kind    string           `json:"kind"`
	Section referenceSection `json:"section"`
	Law     *referenceLaw    `json:"law"`

	Gravity             float64 `json:"gravity"`
	BedSlope            float64 `json:"bed_slope"`
	Discharge           float64 `json:"discharge"`
	Depth               float64 `json:"depth"`
	Barrels             int     `json:"barrels"`
	EnergyCoefficient   float64 `json:"energy_coefficient"`
	MomentumCoefficient float64 `json:"momentum_coefficient"`
	BankHeight          float64 `json:"bank_height"`

	Normal            *[]want `json:"normal"`
	NormalAbsent      string  `json:"normal_absent"`
	Critical          *[]want `json:"critical"`
	CriticalAbsent    string  `json:"critical_absent"`
	SlopeClass        *string `json:"slope_class"`
	CriticalSlope     want    `json:"critical_slope"`
	Capacity          []want  `json:"capacity"` // discharge and depth
	Ratio             want    `json:"ratio"`
	FullDischarge     want    `json:"full_discharge"`
	FullFrictionSlope want    `json:"full_friction_slope"`
	Surcharged        *bool   `json:"surcharged"`
	Freeboard         want    `json:"freeboard"`
	Fill              want    `json:"fill"`
	State             []want  `json:"state"`
	Regime            *string `json:"regime"`
	AlternateDepth    want    `json:"alternate_depth"`
	SequentDepth      want    `json:"sequent_depth"`
	Curve             *string `json:"curve"`
}

type referenceSection struct {
	BottomWidth     float64      `json:"bottom_width"`
	LeftSideSlope   float64      `json:"left_side_slope"`
	RightSideSlope  float64      `json:"right_side_slope"`
	TopWidth        float64      `json:"top_width"`
	Width           float64      `json:"width"`
	Height          float64      `json:"height"`
	Diameter        float64      `json:"diameter"`
	Haunch          float64      `json:"haunch"`
	Inverted        bool         `json:"inverted"`
	CrossSlope      float64      `json:"cross_slope"`
	CurbHeight      float64      `json:"curb_height"`
	GutterWidth     float64      `json:"gutter_width"`
	GutterSlope     float64      `json:"gutter_slope"`
	BenchHeight     float64      `json:"bench_height"`
	LeftBenchWidth  float64      `json:"left_bench_width"`
	RightBenchWidth float64      `json:"right_bench_width"`
	UpperSideSlope  float64      `json:"upper_side_slope"`
	Points          [][2]float64 `json:"points"`
	Rows            [][4]float64 `json:"rows"`
}

// compile builds the section of a kind.
func (s *referenceSection) compile(kind string) (section.Section, error) {
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
	case "box":
		return section.NewBox(s.Width, s.Height, s.Haunch)
	case "elliptical":
		return section.NewElliptical(s.Width, s.Height)
	case "egg":
		return section.NewEgg(s.Height, s.Inverted)
	case "horseshoe":
		return section.NewHorseshoe(s.Height)
	case "gutter":
		return section.NewGutter(s.CrossSlope, s.CurbHeight, s.GutterWidth, s.GutterSlope)
	case "two_stage":
		return section.NewTwoStage(section.TwoStage{BottomWidth: s.BottomWidth, LeftSideSlope: s.LeftSideSlope, RightSideSlope: s.RightSideSlope,
			BenchHeight: s.BenchHeight, LeftBenchWidth: s.LeftBenchWidth, RightBenchWidth: s.RightBenchWidth, UpperSideSlope: s.UpperSideSlope})
	case "surveyed":
		return section.NewSurveyed(s.Points)
	case "tabulated":
		return section.NewTabulated(s.Rows)
	}
	return nil, fmt.Errorf("unknown kind %q", kind)
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

// name returns the law's name with its rule of combination.
func (l *referenceLaw) name() string {
	switch {
	case l == nil:
		return "none"
	case l.Manning > 0:
		return "manning"
	case l.Strickler > 0:
		return "strickler"
	case l.Chezy > 0:
		return "chezy"
	case l.SandRoughness > 0:
		return "sand_roughness"
	case l.ManningByDepth != nil:
		return "manning_by_depth"
	case l.Bed > 0:
		return "bed and sides " + l.Combine
	case l.Zones != nil:
		return "zones " + l.Combine
	}
	return "unknown"
}

// compile binds the law to a section.
func (l *referenceLaw) compile(s section.Section, gravity float64) (friction.Law, error) {
	how := map[string]friction.Combination{"divided": friction.Divided, "horton_einstein": friction.HortonEinstein, "lotter": friction.Lotter,
		"pavlovskii": friction.Pavlovskii}
	switch name, _, _ := strings.Cut(l.name(), " "); name {
	case "none":
		return nil, nil
	case "manning":
		return friction.NewManning(l.Manning)
	case "strickler":
		return friction.NewStrickler(l.Strickler)
	case "chezy":
		return friction.NewChezy(l.Chezy)
	case "sand_roughness":
		return friction.NewSandRoughness(l.SandRoughness, l.KinematicViscosity, gravity)
	case "manning_by_depth":
		return friction.NewManningByDepth(l.ManningByDepth)
	case "bed":
		bedded, ok := s.(section.Bedded)
		if !ok {
			return nil, fmt.Errorf("%T has no bed", s)
		}
		return friction.NewBedAndSides(bedded, l.Bed, l.Sides, how[l.Combine])
	case "zones":
		zoned, ok := s.(section.Zoned)
		if !ok {
			return nil, fmt.Errorf("%T has no zones", s)
		}
		return friction.NewZones(zoned, l.Until, l.Zones, how[l.Combine])
	}
	return nil, fmt.Errorf("unknown law")
}

// channel builds the channel that a reference describes.
func (r *reference) channel() (*flow.Channel, error) {
	s, err := r.Section.compile(r.Kind)
	if err != nil {
		return nil, err
	}
	law, err := r.Law.compile(s, r.Gravity)
	if err != nil {
		return nil, err
	}
	return &flow.Channel{Section: s, Law: law, Slope: r.BedSlope, Gravity: r.Gravity, Barrels: r.Barrels,
		EnergyCoefficient: r.EnergyCoefficient, MomentumCoefficient: r.MomentumCoefficient, Bank: r.BankHeight}, nil
}

// readReferences reads flow.jsonl. It refuses unknown members and cases that assert nothing.
func readReferences(data []byte) ([]reference, []string, error) {
	var references []reference
	var lines []string
	lineOf := bufio.NewScanner(bytes.NewReader(data))
	lineOf.Buffer(nil, 1<<20)
	for lineOf.Scan() {
		decoder := json.NewDecoder(bytes.NewReader(lineOf.Bytes()))
		decoder.DisallowUnknownFields()
		if len(lines) == 0 {
			var header struct {
				About string   `json:"about"`
				State []string `json:"state"`
			}
			if err := decoder.Decode(&header); err != nil {
				return nil, nil, err
			}
			if !slices.Equal(header.State, stateMembers) {
				return nil, nil, fmt.Errorf("states hold %v", header.State)
			}
			lines = append(lines, "")
			continue
		}
		var r reference
		if err := decoder.Decode(&r); err != nil {
			return nil, nil, fmt.Errorf("line %d: %w", len(lines)+1, err)
		}
		asserted := 0
		for _, w := range r.State {
			if w.given {
				asserted++
			}
		}
		if asserted != len(stateMembers) {
			return nil, nil, fmt.Errorf("line %d: a state of %d members", len(lines)+1, asserted)
		}
		if r.Discharge > 0 && (r.Critical == nil || r.Regime == nil || r.Law != nil && (r.Normal == nil || r.SlopeClass == nil || !r.Ratio.given)) {
			return nil, nil, fmt.Errorf("line %d: a discharge without depths", len(lines)+1)
		}
		references = append(references, r)
		lines = append(lines, lineOf.Text())
	}
	return references, lines[min(1, len(lines)):], lineOf.Err()
}

func TestReferencesAreReadStrictly(t *testing.T) {
	header, err := json.Marshal(map[string]any{"about": "", "state": stateMembers})
	if err != nil {
		t.Fatal(err)
	}
	for _, line := range []string{
		`{"kind":"circular","section":{"diameter":1},"depth":0.5}`,
		`{"kind":"circular","section":{"diameter":1},"depth":0.5,"state":["1"]}`,
		`{"kind":"circular","section":{"diameter":1},"depth":0.5,"sate":[]}`,
		`{"kind":"circular","section":{"diameter":1},"depth":0.5,"discharge":1,"state":["1"` + strings.Repeat(",null", len(stateMembers)-1) + `]}`,
		`{"kind":"circular","section":{"diameter":1},"depth":0.5,"state":["one"` + strings.Repeat(",null", len(stateMembers)-1) + `]}`,
	} {
		if _, _, err := readReferences([]byte(string(header) + "\n" + line + "\n")); err == nil {
			t.Errorf("accepted: %s", line)
		}
	}
}

// Relative tolerances of states and of what solves an equation.
const (
	stateTolerance = 1e-10
	rootTolerance  = 1e-9
)

// judge compares numbers with references and keeps the worst of each member.
type judge struct {
	t     *testing.T
	worst map[string]float64
	where string
	line  string
	count *int
	fails *int
}

func (j *judge) fail(format string, arguments ...any) {
	j.t.Helper()
	*j.fails++
	j.t.Errorf("%s: %s\n    %.900s", j.where, fmt.Sprintf(format, arguments...), j.line)
}

// near holds a number against a reference, relative to its size or a scale if that is greater.
func (j *judge) near(member string, got float64, w want, tolerance, scale float64) {
	j.t.Helper()
	if !w.given {
		return
	}
	*j.count++
	if w.absent {
		if !math.IsNaN(got) {
			j.fail("%s is %v, want none", member, got)
		}
		return
	}
	scale = max(scale, math.Abs(w.value))
	off := math.Abs(got - w.value)
	if scale > 0 {
		off /= scale
	}
	if !(off <= tolerance) {
		j.fail("%s is %v, want %v: off by %.3g", member, got, w.value, off)
	}
	if off > j.worst[member] {
		j.worst[member] = off
	}
}

// root holds a depth that solves an equation against its reference.
func (j *judge) root(member string, got float64, w want) {
	j.t.Helper()
	j.near(member, got, w, rootTolerance, 0)
}

func (j *judge) same(member, got, want string) {
	j.t.Helper()
	*j.count++
	if got != want {
		j.fail("%s is %q, want %q", member, got, want)
	}
}

// list holds a list of depths against its reference.
func (j *judge) list(member string, got []float64, want []want, absent flow.Absence, reason string) {
	j.t.Helper()
	j.same(member+"_absent", absent.Code(), reason)
	*j.count++
	if len(got) != len(want) {
		j.fail("%s are %v, want %v", member, got, want)
		return
	}
	for i := range got {
		j.root(member, got[i], want[i])
	}
}

// TestChannelsMeetReferences holds states and characteristic depths of all kinds of sections, under all friction laws, against values that
// testdata/references/flow.py computed at 70 digits with mpmath.
func TestChannelsMeetReferences(t *testing.T) {
	data, err := os.ReadFile("../../testdata/references/flow.jsonl")
	if err != nil {
		t.Fatal(err)
	}
	references, lines, err := readReferences(data)
	if err != nil {
		t.Fatal(err)
	}
	worst := map[string]map[string]float64{}
	kinds, laws, lists := map[string]int{}, map[string]int{}, map[string]int{}
	count, fails := 0, 0
	for i := range references {
		r := &references[i]
		kinds[r.Kind]++
		laws[r.Law.name()]++
		if worst[r.Kind] == nil {
			worst[r.Kind] = map[string]float64{}
		}
		j := &judge{t: t, worst: worst[r.Kind], where: fmt.Sprintf("line %d, %s, %s", i+2, r.Kind, r.Law.name()), line: lines[i], count: &count, fails: &fails}
		c, err := r.channel()
		if err != nil {
			j.fail("%v", err)
			continue
		}
		state := c.State(r.Depth, r.Discharge)
		for k, got := range stateValues(&state) {
			member, scale := stateMembers[k], 0.0
			switch {
			case r.State[k].absent && strings.HasSuffix(member, "_rate"):
				continue // of a full section, where they have no meaning
			case member == "top_width_rate":
				scale = state.Geometry.TopWidth / r.Depth
			case r.State[k].absent && r.Discharge == 0 && got == 0:
				continue // what a discharge would add
			}
			j.near(member, got, r.State[k], stateTolerance, scale)
		}
		if r.Discharge == 0 {
			continue
		}
		j.same("regime", state.Regime.String(), *r.Regime)

		var room flow.Room
		if r.Law == nil {
			critical, absent := c.Critical(r.Discharge, nil)
			j.list("critical", critical, *r.Critical, absent, r.CriticalAbsent)
		} else {
			d := c.Depths(r.Discharge, &room)
			j.list("normal", d.Normal, *r.Normal, d.NormalAbsent, r.NormalAbsent)
			j.list("critical", d.Critical, *r.Critical, d.CriticalAbsent, r.CriticalAbsent)
			lists[fmt.Sprintf("%d normal", len(*r.Normal))]++
			lists[fmt.Sprintf("%d critical", len(*r.Critical))]++
			j.same("slope_class", d.Class.String(), *r.SlopeClass)
			j.near("critical_slope", d.CriticalSlope, r.CriticalSlope, rootTolerance, 0)
			capacity := []want{{given: true, absent: true}, {given: true, absent: true}}
			if r.Capacity != nil {
				capacity = r.Capacity
			}
			j.near("capacity.discharge", d.Capacity.Discharge, capacity[0], stateTolerance, 0)
			j.root("capacity.depth", d.Capacity.Depth, capacity[1])
			j.near("ratio", d.Ratio, r.Ratio, stateTolerance, 0)
			j.near("full_discharge", d.FullDischarge, r.FullDischarge, stateTolerance, 0)
			j.near("full_friction_slope", d.FullFriction, r.FullFrictionSlope, stateTolerance, 0)
			if r.Surcharged != nil {
				j.same("surcharged", fmt.Sprint(d.Surcharged), fmt.Sprint(*r.Surcharged))
			}
			j.near("freeboard", d.Freeboard, r.Freeboard, rootTolerance, d.Bank)
			j.near("fill", d.Fill, r.Fill, rootTolerance, 0)
			if r.Curve != nil {
				j.same("curve", c.CurveName(&state, d.Class, d.Normal), *r.Curve)
			}
		}
		if r.AlternateDepth.given {
			y, absent := c.Alternate(r.Discharge, r.Depth)
			j.conjugate("alternate_depth", y, absent, r.AlternateDepth)
		}
		if r.SequentDepth.given {
			y, absent := c.Sequent(r.Discharge, r.Depth)
			j.conjugate("sequent_depth", y, absent, r.SequentDepth)
		}
	}
	for _, kind := range slices.Sorted(maps.Keys(worst)) {
		var b strings.Builder
		for _, member := range slices.Sorted(maps.Keys(worst[kind])) {
			fmt.Fprintf(&b, " %s %.1e", member, worst[kind][member])
		}
		t.Logf("%s, %d cases, worst:%s", kind, kinds[kind], b.String())
	}
	t.Logf("%d numbers and names, %d of them off; laws %v; lists %v", count, fails, laws, lists)
	if len(kinds) != 14 {
		t.Errorf("references of %d kinds, want all 14", len(kinds))
	}
	for kind, n := range kinds {
		if n < 100 {
			t.Errorf("only %d references of %s", n, kind)
		}
	}
	if len(laws) != 12 {
		t.Errorf("references under %d laws and rules, want 12: %v", len(laws), laws)
	}
}

// conjugate holds an alternate or sequent depth against its reference.
func (j *judge) conjugate(member string, got float64, absent flow.Absence, w want) {
	j.t.Helper()
	if w.absent {
		j.same(member+" absence", absent.Code(), flow.Above.Code())
		return
	}
	if absent != flow.Present && absent != flow.Coincides {
		j.fail("%s is absent (%s), want %v", member, absent, w.value)
		return
	}
	j.root(member, got, w)
}

// TestConjugateDepthsNextToACrown holds depths on a branch so short and flat that the first guess already meets the energy to eight
// digits, against values computed by the same program.
func TestConjugateDepthsNextToACrown(t *testing.T) {
	s, err := section.NewElliptical(0.34, 0.233)
	if err != nil {
		t.Fatal(err)
	}
	c := flow.Channel{Section: s, Slope: 0.000201, Gravity: 9.80665}
	const discharge, depth = 0.9790551734972509, 0.23299576916888262
	y, absent := c.Alternate(discharge, depth)
	if !(math.Abs(y-0.2329980400115632699) <= 1e-12) || absent != flow.Present {
		t.Errorf("alternate depth %v %s", y, absent)
	}
	y, absent = c.Sequent(discharge, depth)
	if !(math.Abs(y-0.2329980400115314897) <= 1e-12) || absent != flow.Present {
		t.Errorf("sequent depth %v %s", y, absent)
	}
}
