package operation

import "testing"

// TestKindIsOfThisRequest: requests are used again, and one that cannot be read must not be told by the one before it.
func TestKindIsOfThisRequest(t *testing.T) {
	const good = `{"section":{"kind":"circular","diameter":0.6},"roughness":{"manning":0.013},"bed_slope":0.004,"discharge":0.2}`
	for _, row := range []struct{ body, kind string }{
		{good, "circular"}, {`[`, ""}, {good, "circular"}, {`{}`, ""}, {good, "circular"}, {`{"section":{"kind":"circular"}}`, "circular"},
	} {
		if solved, _ := Depths.Solve([]byte(row.body), Options{}); string(solved.Kind) != row.kind {
			t.Errorf("%s: kind %q, want %q", row.body, solved.Kind, row.kind)
		}
	}
}
