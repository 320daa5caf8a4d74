package wire

import (
	"reflect"
	"strings"
	"testing"
)

// TestKinds: the list is that of the rule on the member.
func TestKinds(t *testing.T) {
	field, _ := reflect.TypeFor[Section]().FieldByName("Kind")
	var names []string
	for _, kind := range Kinds() {
		names = append(names, string(kind))
	}
	if rule := field.Tag.Get("validate"); rule != "required,oneof="+strings.Join(names, " ") {
		t.Errorf("the rule is %q, the list %q", rule, names)
	}
}

func TestKindOfARun(t *testing.T) {
	run := func(kinds ...Kind) (r ProfileRequest) {
		for _, kind := range kinds {
			r.Reaches = append(r.Reaches, Reach{Section: Section{Kind: kind}})
		}
		return r
	}
	for want, r := range map[Kind]ProfileRequest{"": run(), Box: run(Box, Box), SeveralKinds: run(Box, Egg, Box)} {
		if got := r.SectionKind(); got != want {
			t.Errorf("%q, want %q", got, want)
		}
	}
}
