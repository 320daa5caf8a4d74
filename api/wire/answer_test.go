package wire

import (
	"encoding/json"
	"math"
	"strconv"
	"strings"
	"testing"

	"github.com/go-json-experiment/json/jsontext"
)

func fullState() State {
	return State{
		Members: WithConveyance | WithUniform | WithFlow | WithFriction,
		Depth:   0.25, Area: 0.5, WettedPerimeter: 2.5, HydraulicRadius: 0.2, TopWidth: 2, HydraulicDepth: 0.25, CentroidDepth: 0.125,
		Conveyance: 17.099759466766968, UniformDischarge: 0.5, Discharge: 1, Velocity: 2, VelocityHead: 0.2039432426159, FroudeNumber: 1.277,
		SpecificEnergy: 0.4539432426159, SpecificForce: 0.266, Regime: Supercritical, FrictionSlope: 3.42e-3, BedShearStress: 6.7, StreamPower: 13.4,
	}
}

// TestStateMembers holds which members a state has after what was given, and their order.
func TestStateMembers(t *testing.T) {
	const geometry = "depth area wetted_perimeter hydraulic_radius top_width hydraulic_depth centroid_depth"
	const flow = " velocity velocity_head froude_number specific_energy specific_force regime"
	for _, c := range []struct {
		members StateMembers
		want    string
	}{
		{0, geometry},
		{WithConveyance, geometry + " conveyance"},
		{WithConveyance | WithUniform, geometry + " conveyance uniform_discharge"},
		{WithFlow, geometry + flow},
		{WithConveyance | WithFlow | WithFriction, geometry + " conveyance" + flow + " friction_slope bed_shear_stress stream_power"},
		{WithDischarge, "discharge " + geometry},
	} {
		s := fullState()
		s.Members = c.members
		if got := strings.Join(memberNames(t, s.AppendJSON(nil, SI)), " "); got != c.want {
			t.Errorf("%b:\n got %s\nwant %s", c.members, got, c.want)
		}
	}
}

// memberNames returns the names of a JSON object's members in order; it fails on anything else, duplicates included.
func memberNames(t *testing.T, text []byte) []string {
	t.Helper()
	if !jsontext.Value(text).IsValid() {
		t.Fatalf("not I-JSON: %s", text)
	}
	d := jsontext.NewDecoder(strings.NewReader(string(text)))
	if k, err := d.ReadToken(); err != nil || k.Kind() != '{' {
		t.Fatalf("no object: %s", text)
	}
	var names []string
	for d.PeekKind() != '}' {
		name, err := d.ReadToken()
		if err != nil {
			t.Fatal(err)
		}
		names = append(names, name.String())
		if err := d.SkipValue(); err != nil {
			t.Fatal(err)
		}
	}
	return names
}

func TestStateInUnits(t *testing.T) {
	s := fullState()
	var si, us map[string]any
	if err := json.Unmarshal(s.AppendJSON(nil, SI), &si); err != nil {
		t.Fatal(err)
	}
	if err := json.Unmarshal(s.AppendJSON(nil, US), &us); err != nil {
		t.Fatal(err)
	}
	for name, divisor := range map[string]float64{
		"depth": 0.3048, "area": 0.09290304, "wetted_perimeter": 0.3048, "hydraulic_radius": 0.3048, "top_width": 0.3048, "hydraulic_depth": 0.3048,
		"centroid_depth": 0.3048, "conveyance": 0.028316846592, "uniform_discharge": 0.028316846592, "velocity": 0.3048, "velocity_head": 0.3048,
		"froude_number": 1, "specific_energy": 0.3048, "specific_force": 0.028316846592, "friction_slope": 1,
		"bed_shear_stress": 0.45359237 * 9.80665 / 0.09290304, "stream_power": 0.45359237 * 9.80665 / 0.3048,
	} {
		a, b := si[name].(float64), us[name].(float64)
		if !(math.Abs(a/divisor/b-1) <= 1e-15) {
			t.Errorf("%s: %v in SI, %v in US units", name, a, b)
		}
		delete(us, name)
	}
	if len(us) != 1 || us["regime"] != Supercritical {
		t.Errorf("not checked: %v", us)
	}
}

// TestNothingIsNotFinite holds that whatever is no number is written null.
func TestNothingIsNotFinite(t *testing.T) {
	for _, v := range []float64{math.NaN(), math.Inf(1), math.Inf(-1)} {
		s := State{Members: 0xff, Depth: v, Area: v, WettedPerimeter: v, HydraulicRadius: v, TopWidth: v, HydraulicDepth: v, CentroidDepth: v,
			Conveyance: v, UniformDischarge: v, Discharge: v, Velocity: v, VelocityHead: v, FroudeNumber: v, SpecificEnergy: v, SpecificForce: v,
			FrictionSlope: v, BedShearStress: v, StreamPower: v}
		for _, system := range []System{SI, US} {
			text := string(s.AppendJSON(nil, system))
			if n := strings.Count(text, ":null"); n != len(memberNames(t, []byte(text))) {
				t.Errorf("%v: %s", v, text)
			}
		}
	}
}

func TestDepthsAnswer(t *testing.T) {
	nan := math.NaN()
	a := DepthsAnswer{
		NormalDepth: 1.25, CriticalDepth: nan, Normal: []State{fullState()}, CriticalAbsent: `no "minimum"`,
		NormalVelocity: 2, NormalFroudeNumber: 0.5, NormalBedShearStress: 6, Fill: 0.625, SlopeClass: "mild", CriticalSlope: nan,
		Capacity: Capacity{Known: true, Discharge: 9, Depth: 1.876, FullDischarge: 8.4, Ratio: 0.5}, Freeboard: 0.75,
		Closed: true, FullFrictionSlope: 0.0003,
		Given:    DepthsGiven{Present: true, State: State{Depth: 0.5}, AlternateDepth: nan, SequentDepth: 2, Curve: "S2"},
		Warnings: []Warning{{Code: "above_crown", Detail: "x", Pointer: "/depth"}, {Code: "b", Detail: "y"}},
	}
	const scalars = "normal_depth critical_depth critical_absent normal_velocity normal_froude_number normal_bed_shear_stress fill slope_class critical_slope capacity freeboard surcharged full_friction_slope given alternate_depth sequent_depth curve"
	text := a.AppendJSON([]byte("kept"), SI, ID(`"A\u0020b"`))
	text, ok := []byte(strings.TrimPrefix(string(text), "kept")), strings.HasPrefix(string(text), "kept")
	if !ok {
		t.Fatal("what stood in dst is gone")
	}
	if got, want := strings.Join(memberNames(t, text), " "), "id units "+scalars+" normal critical warnings"; got != want {
		t.Errorf("got  %s\nwant %s", got, want)
	}
	for _, want := range []string{
		`{"id":"A\u0020b","units":"si","normal_depth":1.25,"critical_depth":null,"critical_absent":"no \"minimum\"",`,
		`"capacity":{"discharge":9,"depth":1.876,"full_discharge":8.4,"ratio":0.5},"freeboard":0.75,"surcharged":false,"full_friction_slope":0.0003,"given":{"depth":0.5,`,
		`,"alternate_depth":null,"sequent_depth":2,"curve":"S2","normal":[{"depth":0.25,`,
		`],"critical":[],"warnings":[{"code":"above_crown","detail":"x","pointer":"/depth"},{"code":"b","detail":"y"}]}`,
	} {
		if !strings.Contains(string(text), want) {
			t.Errorf("%s\nlacks %s", text, want)
		}
	}

	a.Brief = true
	brief := a.AppendJSON(nil, SI, nil)
	if got, want := strings.Join(memberNames(t, brief), " "), "units "+scalars+" warnings"; got != want {
		t.Errorf("brief: got %s\nwant %s", got, want)
	}

	open := DepthsAnswer{NormalDepth: nan, NormalAbsent: "x", CriticalDepth: 1, Fill: nan, Freeboard: nan, Traced: Traced{"0123"}}
	got := string(open.AppendJSON(nil, US, ID("7.50")))
	want := `{"id":7.50,"units":"us","fingerprint":"0123","normal_depth":null,"critical_depth":3.280839895013123` +
		`,"normal_absent":"x","normal_velocity":0,"normal_froude_number":0,"normal_bed_shear_stress":0,"fill":null,"slope_class":null,"critical_slope":0,` +
		`"capacity":null,"freeboard":null,"normal":[],"critical":[],"warnings":[]}`
	if got != want {
		t.Errorf("got  %s\nwant %s", got, want)
	}
}

func TestTableAnswers(t *testing.T) {
	states := []State{{Depth: 0.5, Members: WithDischarge, Discharge: 3}, {Depth: 1}}
	section := SectionAnswer{States: states}
	rating := RatingAnswer{States: states, Warnings: []Warning{{Code: "a", Detail: "b"}}}
	for want, got := range map[string][]byte{
		`{"units":"si","states":[{"discharge":3,"depth":0.5,"area":0,"wetted_perimeter":0,"hydraulic_radius":0,"top_width":0,"hydraulic_depth":0,"centroid_depth":0},` +
			`{"depth":1,"area":0,"wetted_perimeter":0,"hydraulic_radius":0,"top_width":0,"hydraulic_depth":0,"centroid_depth":0}],"warnings":[]}`: section.AppendJSON(nil, SI, nil),
		`{"id":1,"units":"si","states":[{"discharge":3,"depth":0.5,"area":0,"wetted_perimeter":0,"hydraulic_radius":0,"top_width":0,"hydraulic_depth":0,"centroid_depth":0},` +
			`{"depth":1,"area":0,"wetted_perimeter":0,"hydraulic_radius":0,"top_width":0,"hydraulic_depth":0,"centroid_depth":0}],"warnings":[{"code":"a","detail":"b"}]}`: rating.AppendJSON(nil, SI, ID("1")),
	} {
		if string(got) != want {
			t.Errorf("got  %s\nwant %s", got, want)
		}
	}
}

// TestAppendNumber holds the form of numbers against RFC 8785, appendix B, and that every one reads back as the same bits.
func TestAppendNumber(t *testing.T) {
	for bits, want := range map[uint64]string{ // from RFC 8785, appendix B
		0x0000000000000000: "0",
		0x8000000000000000: "0",
		0x0000000000000001: "5e-324",
		0x8000000000000001: "-5e-324",
		0x7fefffffffffffff: "1.7976931348623157e+308",
		0xffefffffffffffff: "-1.7976931348623157e+308",
		0x4340000000000000: "9007199254740992",
		0xc340000000000000: "-9007199254740992",
		0x4430000000000000: "295147905179352830000",
		0x7fffffffffffffff: "null", // NaN, which the RFC refuses
		0x7ff0000000000000: "null", // Infinity
		0x44b52d02c7e14af5: "9.999999999999997e+22",
		0x44b52d02c7e14af6: "1e+23",
		0x44b52d02c7e14af7: "1.0000000000000001e+23",
		0x444b1ae4d6e2ef4e: "999999999999999700000",
		0x444b1ae4d6e2ef4f: "999999999999999900000",
		0x444b1ae4d6e2ef50: "1e+21",
		0x3eb0c6f7a0b5ed8c: "9.999999999999997e-7",
		0x3eb0c6f7a0b5ed8d: "0.000001",
		0x41b3de4355555553: "333333333.3333332",
		0x41b3de4355555554: "333333333.33333325",
		0x41b3de4355555555: "333333333.3333333",
		0x41b3de4355555556: "333333333.3333334",
		0x41b3de4355555557: "333333333.33333343",
		0xbecbf647612f3696: "-0.0000033333333333333333",
		0x43143ff3c1cb0959: "1424953923781206.2",
	} {
		v := math.Float64frombits(bits)
		got := string(appendNumber(nil, v))
		if got != want {
			t.Errorf("%x: %s, want %s", bits, got, want)
		}
		if back, err := strconv.ParseFloat(got, 64); want != "null" && v != 0 && (err != nil || math.Float64bits(back) != bits) {
			t.Errorf("%s does not read back: %v %v", got, back, err)
		}
	}
}

func BenchmarkAppend(b *testing.B) {
	a := DepthsAnswer{
		NormalDepth: 0.8712345678901234, CriticalDepth: 0.5612345678901234, Normal: []State{fullState()}, Critical: []State{fullState()},
		NormalVelocity: 1.4312345678901234, NormalFroudeNumber: 0.5612345678901234, NormalBedShearStress: 6.712345678901234, Fill: 0.4812345678901234,
		SlopeClass: "mild", CriticalSlope: 0.006712345678901234,
		Capacity: Capacity{Known: true, Discharge: 18.712345678901234, Depth: 1.8, Ratio: 0.25312345678901234}, Freeboard: 0.9312345678901234,
	}
	for _, brief := range []bool{true, false} {
		for _, system := range []System{SI, US} {
			b.Run("brief="+strconv.FormatBool(brief)+"/"+system.String(), func(b *testing.B) {
				a.Brief = brief
				var dst []byte
				b.ReportAllocs()
				for b.Loop() {
					dst = a.AppendJSON(dst[:0], system, nil)
				}
				b.SetBytes(int64(len(dst)))
			})
		}
	}
}
