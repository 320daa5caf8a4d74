package wire

import (
	"slices"
	"strings"
	"testing"
)

func TestDescribeRequest(t *testing.T) {
	described := map[string]MemberDescription{}
	for _, m := range DescribeRequest(&DepthsRequest{}) {
		described[strings.Join(m.Path, "_")] = m
	}
	for name, want := range map[string]MemberDescription{
		"discharge":             {Form: FormNumber, Quantity: QuantityDischarge, Required: true},
		"section":               {Form: FormObject, Required: true},
		"barrels":               {Form: FormWhole},
		"section_diameter":      {Form: FormNumber, Quantity: QuantityLength, Variants: []string{"circular"}},
		"section_inverted":      {Form: FormBool, Variants: []string{"egg"}},
		"section_points":        {Form: FormList, Quantity: QuantityLength, Variants: []string{"surveyed"}},
		"roughness_zones":       {Form: FormList, Variants: []string{"zones"}},
		"roughness_bed_manning": {Form: FormNumber, Quantity: QuantityManning, Required: true},
		"units":                 {Form: FormName, Names: []string{"si", "us"}},
	} {
		got, found := described[name]
		if !found || got.Form != want.Form || got.Quantity != want.Quantity || got.Required != want.Required || !slices.Equal(got.Variants, want.Variants) || !slices.Equal(got.Names, want.Names) {
			t.Errorf("%s: %+v, %v", name, got, found)
		}
	}
	if len(described["section_kind"].Names) != 14 {
		t.Errorf("kinds: %v", described["section_kind"].Names)
	}
	if near, found := Nearest("secton_kind", []string{"section_kind", "discharge"}); !found || near != "section_kind" {
		t.Errorf("nearest: %q", near)
	}
}
