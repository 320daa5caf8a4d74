package wire

import (
	"reflect"
	"testing"
)

func TestNearest(t *testing.T) {
	section := plans[reflect.TypeFor[Section]()].names
	depths := plans[reflect.TypeFor[DepthsRequest]()].names
	kinds := plans[reflect.TypeFor[Section]()].fields[0].enum
	for _, c := range []struct {
		name  string
		known []string
		want  string
	}{
		{"bottom_widht", section, "bottom_width"},
		{"bottomWidth", section, "bottom_width"},
		{"BOTTOM-WIDTH", section, "bottom_width"},
		{"Bottom Width", section, "bottom_width"},
		{"daimeter", section, "diameter"},
		{"left_slope", section, "left_side_slope"},
		{"slope", depths, "bed_slope"},
		{"dischrage", depths, "discharge"},
		{"discharge_m3s", depths, "discharge"},
		{"unit", depths, "units"},
		{"circle", kinds, "circular"},
		{"trapezoid", kinds, "trapezoidal"},
		{"TwoStage", kinds, "two_stage"},
		{"rect", kinds, "rectangular"},
		{"flow", depths, ""},
		{"x", section, ""},
		{"", section, ""},
		{"ünïcödé", section, ""},
		{string(make([]byte, 65)), section, ""},
	} {
		if got, _ := nearest(c.name, c.known); got != c.want {
			t.Errorf("nearest(%q) = %q, want %q", c.name, got, c.want)
		}
	}
}

func TestDistance(t *testing.T) {
	for _, c := range []struct {
		a, b string
		want int
	}{
		{"", "", 0}, {"", "abc", 3}, {"abc", "", 3}, {"abc", "abc", 0}, {"abc", "acb", 1}, {"abc", "ab", 1}, {"abc", "xbc", 1},
		{"kitten", "sitting", 3}, // the textbook example of V. I. Levenshtein's distance
		{"ca", "abc", 3},         // what sets the restricted distance apart from the full one, which is 2
	} {
		if got := distance(c.a, c.b); got != c.want {
			t.Errorf("distance(%q, %q) = %d, want %d", c.a, c.b, got, c.want)
		}
		if got := distance(c.b, c.a); got != c.want {
			t.Errorf("distance(%q, %q) = %d, want %d", c.b, c.a, got, c.want)
		}
	}
}
