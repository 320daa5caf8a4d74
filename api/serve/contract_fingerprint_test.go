package serve_test

import (
	"bytes"
	"encoding/json"
	"testing"

	"leat/api/operation"
)

// TestContractFingerprint: unary answers tell the fingerprint unless they are told not to, bulk ones only when they are told to, and it is
// the same in every form.
func TestContractFingerprint(t *testing.T) {
	s := startService(t)
	for _, op := range operation.All() {
		body := example(t, exampleFiles(t, op.Name+".", ".request.json")[0])
		var line bytes.Buffer
		if err := json.Compact(&line, body); err != nil {
			t.Fatal(err)
		}
		options := operation.Options{}
		want, problem := op.Fingerprint(body, options)
		if problem != nil {
			t.Fatal(problem)
		}
		for _, row := range []struct {
			path, media string
			told        bool
		}{
			{"/v1/" + op.Name, jsonMedia, true},
			{"/v1/" + op.Name + "?fingerprint=true", jsonMedia, true},
			{"/v1/" + op.Name + "?detail=brief", jsonMedia, true},
			{"/v1/" + op.Name + "?fingerprint=false", jsonMedia, false},
			{"/v1/bulk/" + op.Name, ndjsonMedia, false},
			{"/v1/bulk/" + op.Name + "?fingerprint=false", ndjsonMedia, false},
			{"/v1/bulk/" + op.Name + "?fingerprint=true", ndjsonMedia, true},
		} {
			status, answer := s.post(row.path, row.media, line.Bytes())
			if status != 200 {
				t.Fatalf("%s: %d %s", row.path, status, answer)
			}
			first, _, _ := bytes.Cut(answer, []byte("\n"))
			var told struct {
				Fingerprint string
				Result      struct{ Fingerprint string }
			}
			if err := json.Unmarshal(first, &told); err != nil {
				t.Fatal(err)
			}
			got := told.Fingerprint + told.Result.Fingerprint
			if row.told && got != want || !row.told && got != "" {
				t.Errorf("%s: fingerprint %q; that of the request is %q", row.path, got, want)
			}
		}
	}
	drain := example(t, "profile.drain.request.json")
	var request map[string]any
	if err := json.Unmarshal(drain, &request); err != nil {
		t.Fatal(err)
	}
	request["geometry"] = map[string]any{"type": "LineString", "coordinates": [][]float64{{0, 0}, {100, 0}}}
	body, err := json.Marshal(request)
	if err != nil {
		t.Fatal(err)
	}
	want, _ := operation.Profile.Fingerprint(body, operation.Options{})
	status, _, answer := s.send("POST", "/v1/profile", body, "Content-Type", jsonMedia, "Accept", "application/geo+json")
	if status != 200 || !bytes.Contains(answer, []byte(`"fingerprint":"`+want+`"`)) {
		t.Errorf("GeoJSON: %d, without the fingerprint %s", status, want)
	}
}
