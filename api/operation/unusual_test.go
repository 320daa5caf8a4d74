package operation

import (
	"strings"
	"testing"

	"leat/api/wire"
)

// The commonest mistakes of registers (common practice): Strickler's coefficient given as Manning's n, a diameter in millimetres, a slope in per cent, a side slope
// in degrees. Each is answered, with a warning at the member.
func TestUnusualValuesAreDoubted(t *testing.T) {
	for _, c := range []struct{ body, pointer string }{
		{`{"section":{"kind":"rectangular","bottom_width":1},"roughness":{"manning":30},"bed_slope":0.001,"discharge":1}`, "/roughness/manning"},
		{`{"section":{"kind":"rectangular","bottom_width":1},"roughness":{"strickler":0.03},"bed_slope":0.001,"discharge":1}`, "/roughness/strickler"},
		{`{"section":{"kind":"circular","diameter":600},"roughness":{"manning":0.013},"bed_slope":0.001,"discharge":1}`, "/section/diameter"},
		{`{"section":{"kind":"rectangular","bottom_width":1200},"roughness":{"manning":0.013},"bed_slope":0.001,"discharge":1}`, "/section/bottom_width"},
		{`{"section":{"kind":"rectangular","bottom_width":1.2,"bank_height":900},"roughness":{"manning":0.013},"bed_slope":0.001,"discharge":1}`, "/section/bank_height"},
		{`{"section":{"kind":"trapezoidal","bottom_width":1,"side_slope":45},"roughness":{"manning":0.03},"bed_slope":0.001,"discharge":1}`, "/section/side_slope"},
		{`{"section":{"kind":"rectangular","bottom_width":1},"roughness":{"manning":0.03},"bed_slope":0.3,"discharge":1}`, "/bed_slope"},
		{`{"section":{"kind":"rectangular","bottom_width":1},"roughness":{"sand_roughness":1.5},"bed_slope":0.01,"discharge":100}`, "/roughness/sand_roughness"},
	} {
		answer, _, problem := Depths.Answer(nil, []byte(c.body), Options{Units: wire.SI, Inside: true})
		if problem != nil {
			t.Errorf("%s: %v", c.body, problem)
			continue
		}
		if !strings.Contains(string(answer), `"code":"unusual_value"`) || !strings.Contains(string(answer), `"pointer":"`+c.pointer+`"`) {
			t.Errorf("%s: no warning at %s in %s", c.body, c.pointer, answer)
		}
	}
	plain := `{"section":{"kind":"trapezoidal","bottom_width":1,"side_slope":2},"roughness":{"manning":0.03},"bed_slope":0.001,"discharge":1}`
	if answer, _, _ := Depths.Answer(nil, []byte(plain), Options{Units: wire.SI}); strings.Contains(string(answer), "unusual") {
		t.Errorf("a common ditch is doubted: %s", answer)
	}
}
