package operation

import (
	"strings"
	"testing"
)

// Check finds what Solve refuses, without solving; what physics forbids is left to Solve.
func TestCheck(t *testing.T) {
	const good = `{"section":{"kind":"surveyed","points":[[0,1],[1,0],[2,1]]},"roughness":{"manning":0.03},"bed_slope":0.001,"discharge":1,"depth":0.5,` +
		`"criteria":{"least_freeboard":0.1},"flows":{"a":1}}`
	without := map[string][]string{
		"section": {`,"criteria":{"least_freeboard":0.1},"flows":{"a":1}`}, "depths": {`,"criteria":{"least_freeboard":0.1},"flows":{"a":1}`},
		"appraisal": {`,"discharge":1`},
	}
	for _, o := range All() {
		cuts, found := without[o.Name]
		if !found {
			continue
		}
		body := good
		for _, cut := range cuts {
			body = strings.Replace(body, cut, "", 1)
		}
		if problem := o.Check([]byte(body), Options{}); problem != nil {
			t.Errorf("%s: %v", o.Name, problem)
		}
		for _, bad := range []string{
			strings.Replace(body, `[1,0]`, `[3,0]`, 1), // offsets fall
			strings.Replace(body, `0.03`, `-0.03`, 1),
			strings.Replace(body, `"manning"`, `"maning"`, 1),
		} {
			checked := o.Check([]byte(bad), Options{})
			_, solved := o.Solve([]byte(bad), Options{})
			if checked == nil || solved == nil || checked.Error() != solved.Error() {
				t.Errorf("%s: %s: %v, solved %v", o.Name, bad, checked, solved)
			}
		}
	}
	for _, o := range []*Operation{&Rating, &Profile} {
		if o.Check([]byte(`{}`), Options{}) == nil {
			t.Errorf("%s takes an empty request", o.Name)
		}
	}
}
