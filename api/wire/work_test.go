package wire

import (
	"fmt"
	"strings"
	"testing"
)

// listOf returns n items, each made by a function, with commas between.
func listOf(n int, item func(i int) string) string {
	items := make([]string, n)
	for i := range items {
		items[i] = item(i)
	}
	return strings.Join(items, ",")
}

func TestTooMuchWorkIsRefusedWithItsNumbers(t *testing.T) {
	pit := func(n int) string {
		return `{"kind":"surveyed","points":[` + listOf(n, func(i int) string { return fmt.Sprintf("[%d,%d]", i, max(i-n/2, n/2-i)) }) + `]}`
	}
	channel := `"roughness":{"manning":0.03},"bed_slope":0.001,`
	for name, c := range map[string]struct {
		into   Request
		body   string
		member string
		units  string
	}{
		"section": {new(SectionRequest), `{"section":` + pit(3) + `,"depths":[` + listOf(986, func(i int) string { return fmt.Sprint(i + 1) }) + `]}`, "/depths", "1001"},
		"depths":  {new(DepthsRequest), `{` + channel + `"discharge":1,"section":` + pit(239) + `}`, "/section", "1004"},
		"rating":  {new(RatingRequest), `{` + channel + `"kind":"uniform","section":` + pit(88) + `,"discharges":[1,2,3,4,5,6,7,8,9,10,11]}`, "/discharges", "1100"},
		"rating by depth": {new(RatingRequest), `{` + channel + `"kind":"uniform","section":` + pit(8) + `,"from_depth":0.1,"to_depth":1,"count":981}`,
			"/count", "1001"},
		"appraisal": {new(AppraisalRequest), `{` + channel + `"criteria":{"greatest_fill":1},"flows":{"a":1,"b":2},"section":` + pit(114) + `}`, "/flows", "1008"},
		"reaches": {new(ProfileRequest), `{"discharge":1,"downstream":{"depth":1},"reaches":[` + listOf(9, func(int) string {
			return `{"length":10,` + channel + `"section":{"kind":"triangular","side_slope":1}}`
		}) + `]}`, "/reaches", "1080"},
		"stations": {new(ProfileRequest), `{"discharge":1,"downstream":{"depth":1},"stations":[` + listOf(4, func(i int) string {
			return fmt.Sprintf(`{"chainage":%d,"bed_level":%d,"roughness":{"manning":0.03},"section":{"kind":"triangular","side_slope":1}}`, 100*i, 10-i)
		}) + `]}`, "/stations", "1152"},
		"report": {new(ProfileRequest), `{"discharge":1,"downstream":{"depth":1},"report":{"spacing":0.02},"reaches":[{"length":10,` + channel + `"section":{"kind":"triangular","side_slope":1}}]}`,
			"/report", "1120"},
	} {
		limits := DefaultLimits()
		if p := Decode([]byte(c.body), SI, &limits, c.into); p != nil {
			t.Errorf("%s: %v", name, p)
			continue
		}
		limits.Work = 1000
		p := Decode([]byte(c.body), SI, &limits, c.into)
		if p == nil || p.Status != 413 || len(p.Errors) != 1 || p.Errors[0].Pointer != c.member || p.Errors[0].Code != "too_much_work" {
			t.Errorf("%s: %+v", name, p)
			continue
		}
		for _, part := range []string{c.units + " units", "more than 1000", "`work`"} {
			if !strings.Contains(p.Detail, part) {
				t.Errorf("%s: no %q in %s", name, part, p.Detail)
			}
		}
		limits.Work = 1200
		if p := Decode([]byte(c.body), SI, &limits, c.into); p != nil {
			t.Errorf("%s within the limit: %v", name, p)
		}
	}
}
