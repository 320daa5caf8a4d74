package geopackage_test

import (
	"encoding/xml"
	"errors"
	"io"
	"strings"
	"testing"

	"leat/cmd/internal/geopackage"
)

func TestStylesAreWellFormed(t *testing.T) {
	low, high := 0.8, 1.0
	s := &geopackage.Style{Name: `a "style" & more`, Column: `ver"dict`, Classes: []geopackage.Class{
		{Is: "falls' <short>", Label: "a & b", Width: 1, Dash: []float64{3, 1.5}}, {From: &low, Below: &high, Label: "some"}, {From: &high, Label: "more"}, {Below: &low, Label: "less"}, {Label: "rest"},
	}}
	for _, kind := range []string{"POINT", "LINESTRING", "MULTIPOLYGON", "GEOMETRY"} {
		for form, text := range map[string]string{"SLD": s.SLD("a<layer>", kind), "QML": s.QML(kind)} {
			d := xml.NewDecoder(strings.NewReader(text))
			rules := 0
			for {
				token, err := d.Token()
				if errors.Is(err, io.EOF) {
					break
				}
				if err != nil {
					t.Fatalf("%s for %s: %v\n%s", form, kind, err, text)
				}
				if e, is := token.(xml.StartElement); is && strings.EqualFold(e.Name.Local, "rule") {
					rules++
				}
			}
			if rules != len(s.Classes) {
				t.Errorf("%s for %s has %d rules, want %d", form, kind, rules, len(s.Classes))
			}
		}
	}
}
