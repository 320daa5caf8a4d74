package geopackage

import (
	"strings"

	"leat/cmd/internal/geopackage"
	"leat/cmd/internal/register/store"
)

// Colours that stay apart for people who see red and green alike (TestColoursStayApart); width and dashes tell the classes apart on paper too.
var (
	blue   = geopackage.Colour{0x1b, 0x6c, 0xa8}
	amber  = geopackage.Colour{0xd9, 0xa4, 0x06}
	orange = geopackage.Colour{0xc8, 0x3e, 0x12}
	grey   = geopackage.Colour{0x80, 0x80, 0x80}
)

// styleOf returns how the layer of results is drawn: by verdict, or else by how much of the capacity is used; nil where the results have neither.
func styleOf(layout *store.Layout) *geopackage.Style {
	find := func(name string) string {
		for _, c := range layout.Columns {
			if c.Role == store.RoleAnswer && (c.Name == name || strings.HasSuffix(c.Name, "_"+name)) {
				return c.Name
			}
		}
		return ""
	}
	near, full := 0.8, 1.0
	if column := find("verdict"); column != "" {
		return &geopackage.Style{Name: "verdict", Description: "Whether each asset meets its criteria", Column: column, Classes: []geopackage.Class{
			{Is: "falls_short", Label: "Falls short of a criterion", Colour: orange, Width: 1.1},
			{Is: "undetermined", Label: "Undetermined: something needed is not known", Colour: amber, Width: 0.8, Dash: []float64{3, 1.5}},
			{Is: "meets", Label: "Meets its criteria", Colour: blue, Width: 0.5},
			{Label: "No verdict", Colour: grey, Width: 0.4, Dash: []float64{1, 1}},
		}}
	}
	if column := find("capacity_ratio"); column != "" {
		return &geopackage.Style{Name: "capacity_ratio", Description: "Discharge as a share of the capacity", Column: column, Classes: []geopackage.Class{
			{From: &full, Label: "Over capacity", Colour: orange, Width: 1.1},
			{From: &near, Below: &full, Label: "0.8 of the capacity or more", Colour: amber, Width: 0.8, Dash: []float64{3, 1.5}},
			{Below: &near, Label: "Less than 0.8 of the capacity", Colour: blue, Width: 0.5},
			{Label: "Capacity not known", Colour: grey, Width: 0.4, Dash: []float64{1, 1}},
		}}
	}
	return nil
}
