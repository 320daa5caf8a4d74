package appraise_test

import (
	"errors"
	"regexp"
	"strings"
	"testing"

	"leat/compute"
	"leat/compute/appraise"
)

// codes returns the members and codes of faults.
func codes(err error) string {
	var faults compute.Faults
	if err == nil {
		return ""
	}
	if !errors.As(err, &faults) {
		return err.Error()
	}
	var all []string
	for _, f := range faults {
		all = append(all, strings.TrimSpace(f.Member+" "+f.Code))
	}
	return strings.Join(all, ", ")
}

// TestNames: every name is one in snake_case, and no two are the same.
func TestNames(t *testing.T) {
	snake := regexp.MustCompile(`^[a-z]+(_[a-z]+)*$`)
	groups := map[string][]string{}
	for _, c := range appraise.Criteria() {
		groups["criteria"] = append(groups["criteria"], c.String())
	}
	for c := appraise.Excellent; c <= appraise.Poor; c++ {
		groups["conditions"] = append(groups["conditions"], c.String())
	}
	for g := appraise.Sod; g <= appraise.Mixed; g++ {
		groups["growth forms"] = append(groups["growth forms"], g.String())
	}
	for g := appraise.SiltyGravel; g <= appraise.FatClay; g++ {
		groups["soil groups"] = append(groups["soil groups"], g.String())
	}
	for e := appraise.FineSand; e <= appraise.Cobbles; e++ {
		groups["soils"] = append(groups["soils"], e.String())
	}
	for l := appraise.ClearWater; l <= appraise.SandOrGravel; l++ {
		groups["loads"] = append(groups["loads"], l.String())
	}
	for r := appraise.Canal; r <= appraise.Chute; r++ {
		groups["rules"] = append(groups["rules"], r.String())
	}
	for v := appraise.Undetermined; v <= appraise.Meets; v++ {
		groups["verdicts"] = append(groups["verdicts"], v.String())
	}
	if len(groups) != 8 || len(groups["criteria"]) != 10 || len(groups["soils"]) != 14 {
		t.Fatalf("groups %v", groups)
	}
	for group, names := range groups {
		seen := map[string]bool{}
		for _, name := range names {
			if !snake.MatchString(name) || seen[name] {
				t.Errorf("%s: %q", group, name)
			}
			seen[name] = true
		}
	}
}
