package operation_test

import (
	"strings"
	"testing"

	"leat/api/operation"
)

// Water above the bank is told of by every operation, at the member from which its depth comes, and water up to the bank is not.
func TestWaterAboveTheBank(t *testing.T) {
	const channel = `"section":{"kind":"trapezoidal","bottom_width":0.5,"side_slope":1,"bank_height":0.9},"roughness":{"manning":0.03},"bed_slope":0.001`
	for _, c := range []struct{ operation, low, high, pointer string }{
		{"section", channel + `,"depth":0.9`, channel + `,"depth":0.91`, "/depth"},
		{"section", channel + `,"depths":[0.1,0.9]`, channel + `,"depths":[0.1,0.91]`, "/depths/1"},
		{"depths", channel + `,"discharge":0.05,"depth":0.9`, channel + `,"discharge":0.05,"depth":0.91`, "/depth"},
		{"rating", channel + `,"kind":"uniform","from_depth":0.1,"to_depth":0.9,"count":3`, channel + `,"kind":"uniform","from_depth":0.1,"to_depth":0.91,"count":3`, "/section"},
		{"rating", channel + `,"kind":"critical","discharges":[0.1]`, channel + `,"kind":"critical","discharges":[0.1,9]`, "/discharges/1"},
		{"profile", `"discharge":0.05,"reaches":[{"length":9,` + channel + `}],"downstream":{"depth":0.85}`, `"discharge":0.05,"reaches":[{"length":9,` + channel + `}],"downstream":{"depth":1.5}`, "/reaches/0/section"},
	} {
		for _, o := range operation.All() {
			if o.Name != c.operation {
				continue
			}
			for _, body := range []string{c.low, c.high} {
				answer, _, problem := o.Answer(nil, []byte("{"+body+"}"), operation.Options{})
				if problem != nil {
					t.Errorf("%s %s: %s", o.Name, body, problem.Detail)
					continue
				}
				told := strings.Contains(string(answer), `{"code":"overtopped","detail":"The water stands above the bank: the section overtops there.`)
				at := strings.Contains(string(answer), `"pointer":"`+c.pointer+`"`)
				if want := body == c.high; told != want || at != want {
					t.Errorf("%s %s: told %t, at %s %t, want %t\n%s", o.Name, body, told, c.pointer, at, want, answer)
				}
			}
		}
	}
}
