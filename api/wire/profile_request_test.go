package wire

import (
	"fmt"
	"slices"
	"strings"
	"testing"

	"github.com/google/go-cmp/cmp"
)

const (
	drainProfile = `{"id":"OST-MD","units":"us","discharge":60,"reaches":[
		{"id":"upper","length":1200,"bed_slope":0.001,"section":{"kind":"trapezoidal","bottom_width":6,"side_slope":1.5},"roughness":{"manning":0.03},"drop":1.5,"loss_coefficient":0.5},
		{"id":7,"length":80,"bed_slope":0,"barrels":2,"section":{"kind":"box","width":5,"height":4},"roughness":{"manning":0.014},"inflow":10,"lateral_inflow":0.01,"entry_loss_coefficient":0.5}],
		"upstream":{"gate":{"opening":1.5,"contraction_coefficient":0.6}},"downstream":{"weir":{"kind":"sharp_crested","crest_height":2,"crest_width":10}},
		"datum":100,"report":{"at":[0,600,1280]},"gravity":32.2,"energy_coefficient":1.1,"geometry":{"type":"LineString","coordinates":[[0,0],[300,40,12.5],[390,40,11,1]]}}`
	surveyedProfile = `{"discharge":4,"stations":[
		{"chainage":100,"section":{"kind":"surveyed","points":[[0,12],[2,10],[5,10.2],[8,12.4]]},"roughness":{"manning":0.035}},
		{"chainage":250,"bed_level":9.7,"section":{"kind":"rectangular","bottom_width":3},"roughness":{"strickler":40},"barrels":1}],
		"downstream":{"rating":[[0.5,1],[1,3],[2,9]]},"report":{"spacing":10}}`
)

func TestDecodeProfile(t *testing.T) {
	given := func(v float64) Number { return Number{v, true} }
	ft := 0.3048
	ft2, ft3 := 0.09290304, 0.028316846592
	r, p := decodeAs("profile", drainProfile)
	if p != nil {
		t.Fatal(p, p.Errors)
	}
	want := &ProfileRequest{
		Common:    Common{ID: ID(`"OST-MD"`), Units: "us", System: US, Gravity: given(32.2 * ft), EnergyCoefficient: given(1.1)},
		Discharge: given(60 * ft3),
		Reaches: []Reach{
			{ID: ID(`"upper"`), Length: given(1200 * ft), BedSlope: given(0.001), Drop: given(1.5 * ft), LossCoefficient: given(0.5),
				Section:   Section{Given: true, Kind: Trapezoidal, BottomWidth: given(6 * ft), SideSlope: given(1.5)},
				Roughness: Roughness{Given: true, Law: Manning, Manning: given(0.03)}},
			{ID: ID(`7`), Length: given(80 * ft), BedSlope: given(0), Barrelled: Barrelled{Whole{2, true}},
				Section:   Section{Given: true, Kind: Box, Width: given(5 * ft), Height: given(4 * ft)},
				Roughness: Roughness{Given: true, Law: Manning, Manning: given(0.014)},
				Inflow:    given(10 * ft3), LateralInflow: given(0.01 * ft2), EntryLossCoefficient: given(0.5)},
		},
		Upstream: Boundary{Given: true, Form: "gate", Gate: Gate{Given: true, Opening: given(1.5 * ft), ContractionCoefficient: given(0.6)}},
		Downstream: Boundary{Given: true, Form: "weir",
			Weir: Weir{Given: true, Kind: SharpCrested, CrestHeight: given(2 * ft), CrestWidth: given(10 * ft)}},
		Datum:  given(100 * ft),
		Report: Report{Given: true, At: []float64{0, 600 * ft, 1280 * ft}},
		Geometry: Geometry{Given: true, Type: "LineString", Coordinates: []Position{
			{[4]float64{0, 0}, 2}, {[4]float64{300, 40, 12.5}, 3}, {[4]float64{390, 40, 11, 1}, 4}}},
	}
	if diff := cmp.Diff(want, r); diff != "" {
		t.Error(diff)
	}
	if faults := Check(r); faults != nil {
		t.Error(faults)
	}
	r, p = decodeAs("profile", surveyedProfile)
	if p != nil {
		t.Fatal(p, p.Errors)
	}
	if length, start := r.(*ProfileRequest).Run(); length != 150 || start != 100 {
		t.Errorf("length %v from %v, want 150 from 100", length, start)
	}
	if got := r.(*ProfileRequest).Downstream; got.Form != "rating" || !slices.Equal(got.Rating, [][2]float64{{0.5, 1}, {1, 3}, {2, 9}}) {
		t.Errorf("downstream %+v", got)
	}
}

// TestProfileFaults holds all faults of profiles that break rules.
func TestProfileFaults(t *testing.T) {
	const (
		section = `"section":{"kind":"rectangular","bottom_width":2}`
		channel = section + `,"roughness":{"manning":0.02}`
		reach   = `"length":100,"bed_slope":0.001,` + channel
	)
	// top is a sound request but for what is added.
	top := func(members string) string { return `{"discharge":1,` + members + `}` }
	chain := func(members string) string {
		return top(`"reaches":[{` + reach + `},{` + reach + `}],"downstream":{"depth":1},` + members)
	}
	upstream := func(b string) string {
		return top(`"reaches":[{` + reach + `}],"downstream":{"depth":1},"upstream":` + b)
	}
	downstream := func(b string) string { return top(`"reaches":[{` + reach + `}],"downstream":` + b) }
	reaches := func(list string) string { return top(`"downstream":{"depth":1},"reaches":[` + list + `]`) }
	stations := func(list string) string { return top(`"downstream":{"depth":1},"stations":[` + list + `]`) }
	station := func(chainage int, members string) string { return fmt.Sprintf(`{"chainage":%d,%s}`, chainage, members) }
	level := `"bed_level":3,` + channel
	pipe := `"bed_level":3,"roughness":{"manning":0.013},"section":{"kind":"circular","diameter":0.6}`
	many := func(n int, item string) string { return strings.TrimSuffix(strings.Repeat(item+",", n), ",") }
	var rising []string
	for i := range 56 {
		rising = append(rising, fmt.Sprint(i))
	}
	for _, c := range []struct {
		body   string
		status int
		want   []string // pointer and code
	}{
		{`{}`, 422, []string{"/discharge missing_member", "/downstream missing_member", "/reaches missing_member"}},
		{`{"discharge":0,"reaches":[],"downstream":{"depth":1}}`, 422, []string{"/discharge not_positive", "/reaches too_few_items"}},
		{`{"discharge":"1","reaches":{},"downstream":[]}`, 422, []string{"/discharge wrong_type", "/reaches wrong_type", "/downstream not_an_object"}},
		{chain(`"stations":[]`), 422, []string{"/stations conflicting_member", "/stations too_few_items"}[:1]},
		{chain(`"barrels":2`), 422, []string{"/barrels unknown_member"}},
		{chain(`"section":{},"depth":1`), 422, []string{"/section unknown_member", "/depth unknown_member"}},

		// Reaches.
		{reaches(`{}`), 422, []string{"/reaches/0/length missing_member", "/reaches/0/bed_slope missing_member", "/reaches/0/section missing_member",
			"/reaches/0/roughness missing_member"}},
		{reaches(`null,3,{` + reach + `}`), 422, []string{"/reaches/0 not_an_object", "/reaches/1 not_an_object"}},
		{reaches(`{"length":0,"bed_slope":1,` + channel + `,"barrels":0,"lateral_inflow":-1}`), 422,
			[]string{"/reaches/0/length not_positive", "/reaches/0/bed_slope out_of_range", "/reaches/0/barrels not_positive", "/reaches/0/lateral_inflow out_of_range"}},
		{reaches(`{` + reach + `,"inflow":1,"entry_loss_coefficient":0.5,"loss_coefficient":1.5,"drop":1},{` + reach +
			`,"inflow":-1,"entry_loss_coefficient":2.5,"drop":1,"loss_coefficient":0.3,"id":[]}`), 422,
			[]string{"/reaches/1/id wrong_type", "/reaches/0/inflow misplaced_member", "/reaches/0/entry_loss_coefficient misplaced_member",
				"/reaches/1/drop misplaced_member", "/reaches/1/loss_coefficient misplaced_member", "/reaches/0/loss_coefficient out_of_range",
				"/reaches/1/inflow out_of_range", "/reaches/1/entry_loss_coefficient out_of_range"}},
		{reaches(`{` + reach + `,"bed_level":3,"chainage":1}`), 422, []string{"/reaches/0/bed_level unknown_member", "/reaches/0/chainage unknown_member"}},
		{reaches(`{"length":1,"bed_slope":0,"section":{"kind":"circular","diameter":1},"roughness":{"zones":[{"manning":0.03}]}}`), 422,
			[]string{"/reaches/0/roughness/zones foreign_member"}},
		{reaches(many(9, `{`+reach+`}`)), 413, []string{"/reaches too_many_items"}},

		// Stations.
		{stations(station(0, level)), 422, []string{"/stations too_few_items"}},
		{stations(station(0, level) + `,` + station(0, level) + `,` + station(-1, level)), 422, []string{"/stations/1/chainage not_rising", "/stations/2/chainage not_rising"}},
		{stations(station(0, channel) + `,` + station(1, `"bed_level":2,"roughness":{"manning":0.02},"section":{"kind":"surveyed","points":[[0,1],[1,0],[2,1]]}`)), 422,
			[]string{"/stations/0/bed_level missing_member", "/stations/1/bed_level conflicting_member"}},
		{stations(station(0, pipe) + `,` + station(1, pipe) + `,` + station(2, level)), 422, []string{"/stations/2/section section_differs"}},
		{stations(station(0, pipe) + `,` + station(1, strings.Replace(pipe, "0.6", "0.7", 1))), 422, []string{"/stations/1/section section_differs"}},
		{stations(station(0, level) + `,` + station(1, pipe)), 422, []string{"/stations/1/section section_differs"}},
		{stations(`{"chainage":"0",` + level + `},` + station(-5, level) + `,{}`), 422,
			[]string{"/stations/0/chainage wrong_type", "/stations/2/chainage missing_member", "/stations/2/section missing_member", "/stations/2/roughness missing_member",
				"/stations/1/chainage not_rising"}},
		{stations(many(10, station(0, level))), 413, []string{"/stations too_many_items"}},
		{top(`"datum":1,"downstream":{"depth":1},"stations":[` + station(0, level) + `,` + station(1, level) + `]`), 422, []string{"/datum conflicting_member"}},

		// Boundaries.
		{downstream(`{}`), 422, []string{"/downstream missing_member"}},
		{downstream(`{"deph":1}`), 422, []string{"/downstream/deph unknown_member", "/downstream missing_member"}},
		{downstream(`{"depth":1,"level":2}`), 422, []string{"/downstream/level foreign_member"}},
		{downstream(`{"depth":0}`), 422, []string{"/downstream/depth not_positive"}},
		{downstream(`{"control":"overfall"}`), 422, []string{"/downstream/control unknown_value"}},
		{downstream(`{"control":7}`), 422, []string{"/downstream/control wrong_type"}},
		{downstream(`{"gate":{"contraction_coefficient":0}}`), 422, []string{"/downstream/gate/opening missing_member", "/downstream/gate/contraction_coefficient not_positive"}},
		{downstream(`{"gate":0.5}`), 422, []string{"/downstream/gate not_an_object"}},
		{downstream(`{"weir":{}}`), 422, []string{"/downstream/weir/kind missing_member", "/downstream/weir/crest_height missing_member", "/downstream/weir/crest_width missing_member"}},
		{downstream(`{"weir":{"kind":"sharp_crested","crest_height":0,"crest_width":1}}`), 422, []string{"/downstream/weir/crest_height not_positive"}},
		{downstream(`{"weir":{"kind":"sharp","crest_height":-1,"crest_width":1,"discharge_coefficient":0}}`), 422,
			[]string{"/downstream/weir/kind unknown_value", "/downstream/weir/crest_height out_of_range", "/downstream/weir/discharge_coefficient not_positive"}},
		{downstream(`{"rating":[[1,2]]}`), 422, []string{"/downstream/rating too_few_items"}},
		{downstream(`{"rating":[[1,2],[1,2],[2,1],[3]]}`), 422, []string{"/downstream/rating/3 wrong_length", "/downstream/rating/1/0 not_rising",
			"/downstream/rating/1/1 not_rising", "/downstream/rating/2/1 not_rising"}},
		{upstream(`{"weir":{"kind":"broad_crested","crest_height":1,"crest_width":1}}`), 422, []string{"/upstream/weir foreign_member"}},
		{upstream(`{"rating":[[1,2],[2,3]]}`), 422, []string{"/upstream/rating foreign_member"}},
		{upstream(`{"control":"free_overfall"}`), 422, []string{"/upstream/control unknown_value"}},

		// Report and geometry.
		{chain(`"report":{}`), 422, []string{"/report missing_member"}},
		{chain(`"report":{"spacing":10,"at":[1]}`), 422, []string{"/report/at foreign_member"}},
		{chain(`"report":{"spacing":0}`), 422, []string{"/report/spacing not_positive"}},
		{chain(`"report":{"spacing":3.7}`), 413, []string{"/report/spacing too_many_items"}},
		{chain(`"report":{"at":[]}`), 422, []string{"/report/at too_few_items"}},
		{chain(`"report":{"at":[-1,5,5,4,"6",201]}`), 422, []string{"/report/at/4 wrong_type", "/report/at/2 not_rising", "/report/at/3 not_rising",
			"/report/at/5 out_of_range", "/report/at/0 out_of_range"}},
		{chain(`"report":{"at":[` + strings.Join(rising, ",") + `]}`), 413, []string{"/report/at too_many_items"}},
		{chain(`"geometry":{"type":"Point","coordinates":[0,0]}`), 422, []string{"/geometry/type unknown_value", "/geometry/coordinates/0 wrong_type", "/geometry/coordinates/1 wrong_type"}},
		{chain(`"geometry":{"type":"LineString","coordinates":[[0,0]],"bbox":[0]}`), 422, []string{"/geometry/bbox unknown_member", "/geometry/coordinates too_few_items"}},
		{chain(`"geometry":{"type":"LineString","coordinates":[[0],[0,1,2,3,4],[1e10,0,0,-2e9]]}`), 422,
			[]string{"/geometry/coordinates/0 wrong_length", "/geometry/coordinates/1 wrong_length", "/geometry/coordinates/2/0 out_of_range", "/geometry/coordinates/2/3 out_of_range"}},
		{chain(`"geometry":{"type":"LineString","coordinates":[[1,2,3],[1,2,4]]}`), 422, []string{"/geometry/coordinates no_length"}},
		{chain(`"geometry":{}`), 422, []string{"/geometry/type missing_member", "/geometry/coordinates missing_member"}},
	} {
		_, p := decodeAs("profile", c.body)
		got := strings.Split(strings.TrimSuffix(places(p), "\n"), "\n")
		if p == nil || p.Status != c.status || !slices.Equal(got, c.want) {
			t.Errorf("%s\n got %d %q\nwant %d %q", c.body, status(p), got, c.status, c.want)
			continue
		}
		for _, f := range p.Errors {
			if !strings.HasSuffix(f.Detail, ".") && !strings.HasSuffix(f.Detail, "?") || f.Detail != strings.TrimSpace(f.Detail) {
				t.Errorf("%s: no sentence: %q", c.body, f.Detail)
			}
		}
	}
	for _, body := range []string{chain(`"report":{"spacing":3.8}`), chain(`"report":{"at":[0,200.00000001]}`), chain(`"datum":-3,"upstream":null,"report":null`),
		reaches(many(8, `{`+reach+`}`)), stations(station(0, pipe) + `,` + station(1, pipe)), downstream(`{"weir":{"kind":"sharp_crested","crest_height":0,"crest_width":1,"discharge_coefficient":0.6}}`)} {
		if _, p := decodeAs("profile", body); p != nil {
			t.Errorf("%s: %v", body, p)
		}
	}
}

// TestProfileSentences holds some of the sentences, in the caller's units.
func TestProfileSentences(t *testing.T) {
	const reach = `"discharge":1,"reaches":[{"length":100,"bed_slope":0.001,"section":{"kind":"rectangular","bottom_width":2},"roughness":{"manning":0.02}}]`
	for _, c := range []struct{ body, want string }{
		{`{"units":"us",` + reach + `,"downstream":{"depth":1},"report":{"at":[101]}}`, "This chainage lies beyond the end of the run, which is 100 ft long."},
		{`{` + reach + `,"downstream":{"depth":1,"level":2}}`, "level does not belong to a boundary by depth, whose members are depth; leave it out or give null."},
		{`{` + reach + `,"downstream":{"level":1},"report":{"spacing":0.001}}`, "Stations so close would be more than 55, the limit `report_points` of this service (GET /v1/limits); give a greater spacing."},
		{`{` + reach + `,"downstream":{"rating":[1,2]}}`, "This must be a list of two numbers, not a number."},
		{`{` + reach + `,"downstream":{"depth":1},"geometry":{"type":"LineString","coordinates":7}}`, "This must be a list of lists of two to four numbers, not a number."},
		{`{` + reach + `,"downstream":{"depth":1},"geometry":{"type":"LineString","coordinates":[[0,0],[0,1e10]]}}`, "This number must be from -1000000000 to 1000000000, not 10000000000."},
	} {
		_, p := decodeAs("profile", c.body)
		if p == nil || p.Errors[0].Detail != c.want {
			t.Errorf("%s\n got %v\nwant %s", c.body, p, c.want)
		}
	}
}
