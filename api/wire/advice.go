package wire

import (
	"slices"
	"strconv"
	"strings"

	"github.com/go-json-experiment/json/jsontext"
)

// This file holds what to do instead, for what callers often send: a textbook's symbol for a member, a ratio or a unit
// in a string, the members that spatial databases add to a geometry.

// symbols leads from what textbooks and other programs call a thing, in plain letters, to the member that holds it here.
var symbols = map[string][]string{
	"q":          {"discharge", "discharges", "flows"},
	"flow":       {"discharge", "discharges", "flows"},
	"discharge":  {"flows"},
	"discharges": {"flows"},
	"freeboard":  {"least_freeboard"},
	"fill":       {"greatest_fill"},
	"velocity":   {"greatest_velocity"},
	"shear":      {"greatest_shear"},
	"d50":        {"stone_size"},
	"d75":        {"grain_size"},
	"n":          {"manning"},
	"kst":        {"strickler"},
	"c":          {"chezy"},
	"ks":         {"sand_roughness"},
	"nu":         {"kinematic_viscosity"},
	"b":          {"bottom_width"},
	"z":          {"side_slope"},
	"d":          {"diameter"},
	"dn":         {"diameter"},
	"s":          {"bed_slope"},
	"slope":      {"bed_slope"},
	"s0":         {"bed_slope"},
	"so":         {"bed_slope"},
	"y":          {"depth"},
	"l":          {"length"},
	"g":          {"gravity"},
	"alpha":      {"energy_coefficient"},
	"beta":       {"momentum_coefficient"},
	"type":       {"kind"},
	"shape":      {"kind"},
	"fid":        {"id"},
	"assetid":    {"id"},
}

// bySymbol returns the known member that a symbol or a common name stands for.
func bySymbol(name string, known []string) (string, bool) {
	for _, member := range symbols[plainName(name)] {
		if slices.Contains(known, member) {
			return member, true
		}
	}
	return "", false
}

// extremes are what others put before a name where the contract says least and greatest.
var extremes = []struct{ before, here string }{
	{"minimum", "least"}, {"maximum", "greatest"}, {"min", "least"}, {"max", "greatest"}, {"lowest", "least"}, {"highest", "greatest"},
	{"smallest", "least"}, {"largest", "greatest"}, {"permissible", "greatest"}, {"allowable", "greatest"},
}

// byExtreme returns the known member of the least or the greatest of a thing that a name in others' words stands for.
func byExtreme(name string, known []string) (string, bool) {
	plain := plainName(name)
	for _, e := range extremes {
		thing, found := strings.CutPrefix(plain, e.before)
		if !found {
			thing, found = strings.CutSuffix(plain, e.before)
		}
		for _, member := range known {
			if found && thing != "" && strings.HasPrefix(plainName(member), e.here+thing) {
				return member, true
			}
		}
	}
	return "", false
}

// unknownMemberAdvice says which of the known members an unknown one of an object was meant to be, or which are accepted.
func unknownMemberAdvice(name string, known, accepted []string) string {
	switch {
	case name == "crs" && slices.Contains(known, "coordinates"):
		return " Leave it out: coordinates come back in the system in which they were sent."
	case name == "bbox" && slices.Contains(known, "coordinates"):
		return " Leave it out: type and coordinates are enough."
	}
	if member, ok := bySymbol(name, known); ok {
		return " Did you mean " + member + "?"
	}
	if member, ok := byExtreme(name, known); ok {
		return " Did you mean " + member + "?"
	}
	if near, ok := nearest(name, known); ok {
		return " Did you mean " + near + "?"
	}
	return " Accepted are " + list(accepted, "and") + "."
}

// unknownValueAdvice says which name an unknown one was meant to be, if that can be told.
func unknownValueAdvice(given string, known []string) string {
	if len(given) > longestMisspelt {
		return ""
	}
	if given == "MultiLineString" && slices.Contains(known, "LineString") {
		return " Merge its parts to one LineString, from upstream to downstream."
	}
	if kind, ok := linings[plainName(given)]; ok && slices.Contains(known, kind) {
		return ` Did you mean "` + kind + `"?`
	}
	if kinds, ok := shapes[plainName(given)]; ok && slices.Contains(known, string(kinds[0])) {
		quoted := make([]string, len(kinds))
		for i, kind := range kinds {
			quoted[i] = strconv.Quote(string(kind))
		}
		return " Did you mean " + list(quoted, "or") + "?"
	}
	if system, ok := systems[plainName(given)]; ok && slices.Contains(known, system) {
		return ` Did you mean "` + system + `"?`
	}
	if plainName(given) == "concrete" && slices.Contains(known, string(ShearLimited)) {
		return " Concrete is judged by criteria such as greatest_velocity: leave lining out."
	}
	if near, ok := nearest(given, known); ok {
		return ` Did you mean "` + near + `"?`
	}
	return ""
}

// systems leads from what a system of units is called elsewhere, in plain letters, to its name.
var systems = map[string]string{
	"metric": SI.String(), "m": SI.String(), "metre": SI.String(), "metres": SI.String(), "meter": SI.String(), "meters": SI.String(), "mks": SI.String(),
	"imperial": US.String(), "english": US.String(), "customary": US.String(), "uscustomary": US.String(), "usc": US.String(), "ft": US.String(), "foot": US.String(), "feet": US.String(),
}

// shapes leads from what a section is called elsewhere, in plain letters, to the kinds that may be meant.
var shapes = map[string][]Kind{
	"round": {Circular}, "circle": {Circular}, "pipe": {Circular}, "sewer": {Circular, Egg}, "culvert": {Circular, Box}, "tunnel": {Horseshoe, Circular},
	"square": {Box, Rectangular}, "boxculvert": {Box}, "oval": {Egg, Elliptical}, "ovoid": {Egg}, "ellipse": {Elliptical}, "arch": {Horseshoe},
	"ditch": {Trapezoidal}, "channel": {Trapezoidal, Rectangular}, "canal": {Trapezoidal, Rectangular}, "drain": {Trapezoidal, Rectangular},
	"swale": {Parabolic, Trapezoidal, Triangular}, "flume": {Rectangular}, "open": {Trapezoidal, Rectangular}, "v": {Triangular}, "vshaped": {Triangular}, "vditch": {Triangular},
	"u": {UShaped}, "uchannel": {UShaped}, "street": {Gutter}, "compound": {TwoStage, Surveyed}, "natural": {Surveyed}, "irregular": {Surveyed, Tabulated},
}

// linings leads from what a lining is called elsewhere, in plain letters, to its kind.
var linings = map[string]string{
	"grass": string(Vegetation), "turf": string(Vegetation), "vegetated": string(Vegetation), "grasslined": string(Vegetation),
	"rock": string(Riprap), "stone": string(Riprap), "stones": string(Riprap), "rockfill": string(Riprap), "cobbles": string(Riprap),
	"unlined": string(BareSoil), "bare": string(BareSoil), "mat": string(ShearLimited), "geotextile": string(ShearLimited), "mattress": string(ShearLimited),
}

// objectExamples hold, for members that are objects or pairs, the shortest one that says something.
var objectExamples = map[string]string{
	"section":         `{"kind": "rectangular", "bottom_width": 2}`,
	"roughness":       `{"manning": 0.03}`,
	"upstream":        `{"control": "normal"}`,
	"downstream":      `{"level": 12.8}`,
	"weir":            `{"kind": "sharp_crested", "crest_height": 0.6, "crest_width": 2}`,
	"gate":            `{"opening": 0.4}`,
	"report":          `{"spacing": 50}`,
	"flows":           `{"ten_year": 1.2, "hundred_year": 2.6}`,
	"criteria":        `{"least_freeboard": 0.3, "greatest_velocity": 2}`,
	"criterion_flows": `{"least_freeboard": ["hundred_year"]}`,
	"lining":          `{"kind": "riprap", "stone_size": 0.15}`,
	"bend":            `{"radius": 30}`,
	"critical_band":   `[0.86, 1.13]`,
	"geometry":        `{"type": "LineString", "coordinates": [[0, 0], [100, 20]]}`,
}

// notAnObjectAdvice says what to send in place of a value that is no object, where that is known.
func notAnObjectAdvice(at pointer, kind jsontext.Kind) string {
	if at == "" && kind == '[' {
		return " Send one object a request, or one a line in bulk."
	}
	if example, known := objectExamples[string(at[strings.LastIndexByte(string(at), '/')+1:])]; known {
		return " Give one such as " + example + "."
	}
	return ""
}

// stringForNumberAdvice says what to do about a string that stands where a number is wanted.
func stringForNumberAdvice(raw jsontext.Value) string {
	text := strings.ToLower(strings.TrimSpace(string(raw[1 : len(raw)-1])))
	number, after, _ := strings.Cut(text, " ")
	number, percent := strings.CutSuffix(number, "%")
	switch {
	case text == "" || text == "none" || text == "null" || strings.HasPrefix(strings.TrimLeft(text, "+-"), "nan") || strings.HasPrefix(strings.TrimLeft(text, "+-"), "inf"):
		return " Leave an unknown number out or give null."
	case isNumber(text):
		return " Write the number without quotes."
	case strings.Count(text, ",") == 1 && isNumber(strings.Replace(text, ",", ".", 1)):
		return " Write the number without quotes, with a point before its decimals."
	case isRatio(text):
		return " Write a ratio as one decimal number, without quotes."
	case percent || strings.TrimSpace(after) == "%":
		return " Write a percentage as a fraction, without quotes: 0.02 for 2 %."
	case after != "" && isNumber(number):
		return " Write the number alone, without its unit and without quotes."
	}
	return ""
}

// stringForTruthAdvice says what to do about a string that stands where true or false is wanted.
func stringForTruthAdvice(raw jsontext.Value) string {
	switch strings.ToLower(strings.TrimSpace(string(raw[1 : len(raw)-1]))) {
	case "t", "true", "1", "yes":
		return " Write true, without quotes."
	case "f", "false", "0", "no":
		return " Write false, without quotes."
	}
	return ""
}

// stringForListAdvice says what to do about a string that stands where a list is wanted.
func stringForListAdvice(raw jsontext.Value) string {
	if strings.HasPrefix(strings.TrimSpace(string(raw[1:len(raw)-1])), "[") {
		return " Write the list without quotes."
	}
	return ""
}

// isNoData reports whether a number, as text, is one that maps and loggers write where they have none (common practice).
func isNoData(text string) bool {
	return text == "-999" || text == "-9999" || text == "-99999"
}

// isRatio reports whether a text is one number to, in or over another.
func isRatio(text string) bool {
	for _, sign := range []string{":", "/", " in ", " to "} {
		a, b, found := strings.Cut(text, sign)
		if found && isNumber(strings.TrimSpace(a)) && isNumber(strings.TrimSpace(b)) {
			return true
		}
	}
	return false
}

func isNumber(text string) bool {
	v := jsontext.Value(text)
	return v.Kind() == '0' && v.IsValid()
}
