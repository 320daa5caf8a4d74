package wire

import (
	"testing"

	"github.com/go-json-experiment/json"
)

// BenchmarkCodecAlone is the yardstick for BenchmarkDecode: the JSON library's own strict decoding into pointers, without the
// contract's limits on numbers and lists, without bounds and units.
func BenchmarkCodecAlone(b *testing.B) {
	type section struct {
		Kind        string   `json:"kind"`
		BottomWidth *float64 `json:"bottom_width"`
		SideSlope   *float64 `json:"side_slope"`
		BankHeight  *float64 `json:"bank_height"`
	}
	type roughness struct {
		Manning *float64 `json:"manning"`
	}
	type request struct {
		ID        string    `json:"id"`
		Section   section   `json:"section"`
		Roughness roughness `json:"roughness"`
		BedSlope  *float64  `json:"bed_slope"`
		Discharge *float64  `json:"discharge"`
	}
	body := []byte(trapezoidDepths)
	b.ReportAllocs()
	b.SetBytes(int64(len(body)))
	for b.Loop() {
		var r request
		if err := json.Unmarshal(body, &r, json.RejectUnknownMembers(true)); err != nil {
			b.Fatal(err)
		}
	}
}
