package wire

import (
	"math"
	"strings"
	"testing"
)

func TestProfileAnswer(t *testing.T) {
	nan, ft := math.NaN(), 0.3048
	a := ProfileAnswer{
		Stations: []ProfileStation{
			{Chainage: 0, Reach: ID(`"u"`), BedLevel: 10 * ft, WaterLevel: 11 * ft, EnergyLevel: 12 * ft, Curve: "S2", State: State{Members: WithDischarge, Depth: ft, Discharge: 0.028316846592}},
			{Chainage: ft, Reach: ID(`1`), BedLevel: nan, WaterLevel: nan, EnergyLevel: nan, State: State{Depth: 2 * ft}},
		},
		Reaches:  []ProfileReach{{ID: ID(`"u"`), NormalDepth: ft, CriticalDepth: nan, SlopeClass: "mild"}, {ID: ID(`1`), NormalDepth: nan, CriticalDepth: 2 * ft}},
		Curves:   []ProfileCurve{{From: 0, To: ft, Reach: ID(`"u"`), Curve: "S2"}, {From: ft, To: 2 * ft, Reach: ID(`1`)}},
		Jumps:    []ProfileJump{{Chainage: ft, Reach: ID(`1`), UpstreamDepth: ft, DownstreamDepth: 2 * ft, FroudeNumber: 2, EnergyLoss: 3 * ft, Length: nan, Form: "weak"}},
		Controls: []ProfileControl{{Chainage: 2 * ft, Kind: "rating", Depth: 5 * ft}},
		Extent:   8 * ft, Balance: ProfileBalance{Energy: ft, Momentum: 0.028316846592},
		Warnings: []Warning{{Code: "a", Detail: "b", Pointer: "/reaches/1"}},
	}
	const rest = `,"area":0,"wetted_perimeter":0,"hydraulic_radius":0,"top_width":0,"hydraulic_depth":0,"centroid_depth":0}`
	const run = `"controls":[{"chainage":2,"kind":"rating","depth":5}],"extent":8,"balance":{"energy":1,"momentum":1},"warnings":[{"code":"a","detail":"b","pointer":"/reaches/1"}]}`
	const chain = `"reaches":[{"id":"u","normal_depth":1,"critical_depth":null,"slope_class":"mild"},{"id":1,"normal_depth":null,"critical_depth":2,"slope_class":null}],` +
		`"curves":[{"from":0,"to":1,"reach":"u","curve":"S2"},{"from":1,"to":2,"reach":1,"curve":null}],`
	got := string(a.AppendJSON([]byte("kept"), US, ID(`7.50`)))
	want := `kept{"id":7.50,"units":"us","stations":[` +
		`{"chainage":0,"reach":"u","bed_level":10,"water_level":11,"energy_level":12,"curve":"S2","discharge":1,"depth":1` + rest + `,` +
		`{"chainage":1,"reach":1,"bed_level":null,"water_level":null,"energy_level":null,"curve":null,"depth":2` + rest + `],` + chain +
		`"jumps":[{"chainage":1,"reach":1,"upstream_depth":1,"downstream_depth":2,"froude_number":2,"energy_loss":3,"length":null,"form":"weak"}],` + run
	if got != want {
		t.Errorf("got  %s\nwant %s", got, want)
	}
	if got, want := string(a.AppendRest([]byte("kept"), US, nil)), `kept,"units":"us",`+chain+strings.TrimSuffix(run, "}"); got != want {
		t.Errorf("got  %s\nwant %s", got, want)
	}
	if got, want := string(a.AppendProperties(nil, 2, US)), `{"feature":"jump","chainage":1,`; !strings.HasPrefix(got, want) || a.Places() != 3 {
		t.Errorf("%d places, the last %s", a.Places(), got)
	}
	empty := ProfileAnswer{Extent: nan}
	if got, want := string(empty.AppendJSON(nil, SI, nil)), `{"units":"si","stations":[],"reaches":[],"curves":[],"jumps":[],"controls":[],"extent":null,"balance":{"energy":0,"momentum":0},"warnings":[]}`; got != want {
		t.Errorf("got  %s\nwant %s", got, want)
	}
}
