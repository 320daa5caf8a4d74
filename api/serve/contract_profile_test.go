package serve_test

import (
	"bytes"
	"encoding/csv"
	"encoding/json"
	"fmt"
	"image/png"
	"strings"
	"testing"

	"leat/api/operation"
	"leat/api/serve"
)

// profileBases are valid profiles that have every member between them.
func profileBases(t *testing.T) map[string]map[string]any {
	t.Helper()
	out := map[string]map[string]any{}
	for name, text := range map[string]string{
		"chain": `{"id":"OST-MD-01","discharge":2,"gravity":9.81,"energy_coefficient":1.05,"momentum_coefficient":1.02,"reaches":[
			{"id":"upper","length":150,"bed_slope":0.002,"section":{"kind":"trapezoidal","bottom_width":1.5,"side_slope":1.5},"roughness":{"manning":0.03},"barrels":1,
				"lateral_inflow":0.0005,"drop":0.3,"loss_coefficient":0.4},
			{"id":2,"length":100,"bed_slope":0.001,"section":{"kind":"rectangular","bottom_width":2.5},"roughness":{"strickler":50},"inflow":0.2,"entry_loss_coefficient":0.2}],
			"upstream":{"gate":{"opening":0.4,"contraction_coefficient":0.6}},
			"downstream":{"weir":{"kind":"sharp_crested","crest_height":0.5,"crest_width":2.5,"discharge_coefficient":0.62}},"datum":10,"report":{"at":[0,120,250]},
			"geometry":{"type":"LineString","coordinates":[[0,0],[300,40,12.5],[390,40,11,1]]}}`,
		"stations": `{"units":"us","discharge":60,"stations":[
			{"chainage":0,"section":{"kind":"surveyed","points":[[0,12],[4,7],[10,6.8],[16,12.4]]},"roughness":{"manning":0.035},"barrels":1},
			{"chainage":250,"bed_level":6.1,"section":{"kind":"rectangular","bottom_width":8},"roughness":{"chezy":80}}],
			"downstream":{"rating":[[0.5,5],[2,30],[6,200]]},"report":{"spacing":50}}`,
		"depth":    oneReach(`"upstream":{"control":"critical"},"downstream":{"depth":1}`),
		"level":    oneReach(`"upstream":{"depth":0.3},"downstream":{"level":1.2}`),
		"overfall": oneReach(`"upstream":{"level":2},"downstream":{"control":"free_overfall"},"report":null`),
	} {
		out[name] = parse(t, []byte(text)).(map[string]any)
	}
	return out
}

// oneReach is a profile of one reach.
func oneReach(members string) string {
	return `{"discharge":3,"reaches":[{"length":100,"bed_slope":0.002,"section":{"kind":"rectangular","bottom_width":3},"roughness":{"manning":0.02}}],` + members + `}`
}

// TestContractForms asks for answers in the forms beside JSON; each is judged on its way.
func TestContractForms(t *testing.T) {
	s := startService(t)
	ask := func(op, accept string, body []byte) (int, string, []byte) {
		status, header, answer := s.send("POST", "/v1/"+op, body, "Content-Type", jsonMedia, "Accept", accept)
		return status, header.Get("Content-Type"), answer
	}
	for _, op := range operation.All() {
		for _, name := range exampleFiles(t, op.Name+".", ".request.json") {
			status, media, answer := ask(op.Name, "text/csv, application/json;q=0.5", example(t, name))
			if status != 200 || media != "text/csv; charset=utf-8; header=present" {
				t.Errorf("%s as a table: %d %s %s", name, status, media, answer)
				continue
			}
			records, err := csv.NewReader(bytes.NewReader(answer)).ReadAll()
			if err != nil {
				t.Errorf("%s as a table: %v", name, err)
				continue
			}
			var whole struct {
				States, Stations, Normal, Critical []map[string]any
				Flows                              map[string]struct{ Findings []map[string]any }
			}
			if err := json.Unmarshal(example(t, strings.Replace(name, ".request.", ".answer.", 1)), &whole); err != nil {
				t.Fatal(err)
			}
			rows := len(whole.States) + len(whole.Stations) + len(whole.Normal) + len(whole.Critical)
			for _, f := range whole.Flows {
				rows += max(1, len(f.Findings))
			}
			if strings.Contains(string(example(t, name)), `"depth":`) && op.Name == "depths" {
				rows++
			}
			if len(records) != rows+1 {
				t.Errorf("%s as a table has %d lines, want %d", name, len(records), rows+1)
			}
			for i, station := range append(whole.States, whole.Stations...) {
				for j, column := range records[0] {
					if want := station[column]; column == "depth" && records[i+1][j] != fmt.Sprint(want) {
						t.Errorf("%s, line %d: depth %s, want %v", name, i+1, records[i+1][j], want)
					}
				}
			}
		}
	}

	for _, op := range operation.All() {
		for _, name := range exampleFiles(t, op.Name+".", ".request.json") {
			status, media, answer := ask(op.Name, "image/svg+xml, image/*;q=0.5", example(t, name))
			if status != 200 || media != "image/svg+xml" || !bytes.HasPrefix(answer, []byte("<svg ")) {
				t.Errorf("%s as a drawing: %d %s %.80s", name, status, media, answer)
			}
			if again, _, second := ask(op.Name, "image/svg+xml", example(t, name)); again != 200 || !bytes.Equal(answer, second) {
				t.Errorf("%s: the same request gave another drawing", name)
			}
		}
		status, media, answer := ask(op.Name, "image/png", example(t, exampleFiles(t, op.Name+".", ".request.json")[0]))
		if config, err := png.DecodeConfig(bytes.NewReader(answer)); status != 200 || media != "image/png" || err != nil || config.Width != 1280 {
			t.Errorf("%s as a PNG: %d %s %v", op.Name, status, media, err)
		}
	}

	const geo = "application/geo+json"
	placed := example(t, "profile.surveyed.request.json")
	status, media, answer := ask("profile", geo, placed)
	if status != 200 || media != geo {
		t.Fatalf("places: %d %s %s", status, media, answer)
	}
	var places struct {
		Features []struct {
			Geometry struct{ Coordinates []float64 }
		}
	}
	var stations struct {
		Stations []struct {
			Level float64 `json:"water_level"`
		}
	}
	if json.Unmarshal(answer, &places) != nil || json.Unmarshal(example(t, "profile.surveyed.answer.json"), &stations) != nil || len(places.Features) < len(stations.Stations) {
		t.Fatalf("%s", answer)
	}
	for i, station := range stations.Stations {
		if at := places.Features[i].Geometry.Coordinates; len(at) != 3 || at[2] != station.Level {
			t.Errorf("station %d stands at %v, its level is %v", i, at, station.Level)
		}
	}
	for _, row := range []struct {
		op, accept, body string
		status           int
		says             string
	}{
		{"profile", geo, oneReach(`"downstream":{"depth":1}`), 406, "geometry"},
		{"profile", geo, oneReach(`"downstream":{"depth":-1}`), 422, "/downstream/depth"},
		{"depths", geo, `{}`, 406, "application/json, text/csv"},
		{"depths", "text/csv", `{}`, 422, "/section"},
		{"profile", "image/gif", `{}`, 406, "application/json, text/csv, application/geo+json, image/svg+xml, image/png"},
		{"depths", "image/svg+xml", `{}`, 422, "/section"},
	} {
		if status, _, answer := ask(row.op, row.accept, []byte(row.body)); status != row.status || !strings.Contains(string(answer), row.says) {
			t.Errorf("%s as %s: %d %s", row.op, row.accept, status, answer)
		}
	}
}

// TestContractProfileLimits: what a profile may be long is bounded before it is solved, and the answer names the limit.
func TestContractProfileLimits(t *testing.T) {
	s := startService(t)
	limits := serve.Default()
	list := func(item string, n int) string { return strings.TrimSuffix(strings.Repeat(item+",", n), ",") }
	reach := `{"length":1,"bed_slope":0,"section":{"kind":"circular","diameter":1},"roughness":{"manning":0.01}}`
	for name, row := range map[string]struct{ body, limit string }{
		"reaches":  {`{"discharge":1,"downstream":{"depth":1},"reaches":[` + list(reach, limits.Reaches+1) + `]}`, "reaches"},
		"stations": {`{"discharge":1,"downstream":{"depth":1},"stations":[` + list("{}", limits.Stations+1) + `]}`, "stations"},
		"at":       {oneReach(`"downstream":{"depth":1},"report":{"at":[` + list("1", limits.ReportPoints+1) + `]}`), "report_points"},
		"spacing":  {oneReach(`"downstream":{"depth":1},"report":{"spacing":0.0001}`), "report_points"},
		"geometry": {oneReach(`"downstream":{"depth":1},"geometry":{"type":"LineString","coordinates":[` + list("[1,2]", limits.ArrayItems+1) + `]}`), "array_items"},
		"body":     {strings.Repeat(" ", int(limits.ProfileBytes)+1), "profile_body_bytes"},
	} {
		if status, answer := s.post("/v1/profile", jsonMedia, []byte(row.body)); status != 413 || !strings.Contains(string(answer), row.limit) {
			t.Errorf("%s: %d %.300s, want 413 naming %s", name, status, answer, row.limit)
		}
	}
	// More than other bodies may have is no fault of a profile.
	long := oneReach(`"downstream":{"depth":1}` + strings.Repeat(" ", int(limits.BodyBytes)))
	if status, answer := s.post("/v1/profile", jsonMedia, []byte(long)); status != 200 {
		t.Errorf("a long profile: %d %.300s", status, answer)
	}
	if status, _ := s.post("/v1/depths", jsonMedia, []byte(long)); status != 413 {
		t.Errorf("long depths: %d, want 413", status)
	}
}
