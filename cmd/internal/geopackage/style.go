package geopackage

import (
	"bytes"
	"encoding/xml"
	"fmt"
	"strconv"
	"strings"

	"zombiezen.com/go/sqlite"
)

// A Style draws each row of a layer by the first class that it meets.
type Style struct {
	Name        string
	Description string
	Column      string // whose value decides
	Classes     []Class
}

// A Class is the rows whose value of the style's column is Is, or lies from From to below Below; with neither, all that are in no other class. Classes must not overlap.
type Class struct {
	Is          string
	From, Below *float64
	Label       string
	Colour      Colour
	Width       float64   // of lines, in millimetres on the map
	Dash        []float64 // lengths of marks and gaps in millimetres; none for a solid line
}

// A Colour is red, green and blue.
type Colour [3]uint8

func (c Colour) String() string { return fmt.Sprintf("#%02x%02x%02x", c[0], c[1], c[2]) }

// rest reports whether the class takes what is in no other one.
func (c *Class) rest() bool { return c.Is == "" && c.From == nil && c.Below == nil }

// shape is what symbols must draw.
func shape(geometryType string) string {
	switch geometryType {
	case "POINT", "MULTIPOINT":
		return "point"
	case "POLYGON", "MULTIPOLYGON", "CURVEPOLYGON", "MULTISURFACE", "SURFACE":
		return "polygon"
	}
	return "line" // of a layer of any type too: its lines are what a register of channels is about
}

// Tables of styles are not part of the standard: desktop GIS programs agree on this one.
const stylesTable = `
CREATE TABLE layer_styles (
  id INTEGER PRIMARY KEY AUTOINCREMENT NOT NULL,
  f_table_catalog TEXT(256),
  f_table_schema TEXT(256),
  f_table_name TEXT(256),
  f_geometry_column TEXT(256),
  styleName TEXT(30),
  styleQML TEXT,
  styleSLD TEXT,
  useAsDefault BOOLEAN,
  description TEXT,
  owner TEXT(30),
  ui TEXT(30),
  update_time DATETIME DEFAULT (strftime('%Y-%m-%dT%H:%M:%fZ','now'))
)`

// AddStyle puts a style beside a layer, as OGC's styled layer descriptor (SLD 1.1 with Symbology Encoding 1.1) and in the form that desktop GIS
// programs write (QML). A layer that has a style keeps it: somebody may have changed it to their liking.
func (f *File) AddStyle(t *Table, s *Style) error {
	if has, err := f.Has("layer_styles"); err != nil {
		return err
	} else if !has {
		if err := f.Run(stylesTable); err != nil {
			return err
		}
		err := f.Run("INSERT INTO gpkg_contents (table_name, data_type, identifier, description) VALUES ('layer_styles', 'attributes', 'layer_styles', 'Styles of layers')")
		if err != nil {
			return err
		}
	}
	have := false
	err := f.Rows("SELECT 1 FROM layer_styles WHERE f_table_name = ?", func(*sqlite.Stmt) error { have = true; return nil }, t.Name)
	if err != nil || have {
		return err
	}
	return f.Run("INSERT INTO layer_styles (f_table_catalog, f_table_schema, f_table_name, f_geometry_column, styleName, styleQML, styleSLD, useAsDefault, description, owner) "+
		"VALUES ('', '', ?, ?, ?, ?, ?, 1, ?, '')", t.Name, t.Geometry.Name, s.Name, s.QML(t.Geometry.Type), s.SLD(t.Name, t.Geometry.Type), s.Description)
}

// SLD writes the style as a styled layer descriptor 1.1 (OGC 05-078r4 and 05-077r4).
func (s *Style) SLD(layer, geometryType string) string {
	var w writer
	w.line(`<?xml version="1.0" encoding="UTF-8"?>`)
	w.line(`<StyledLayerDescriptor xmlns="http://www.opengis.net/sld" xmlns:se="http://www.opengis.net/se" xmlns:ogc="http://www.opengis.net/ogc" version="1.1.0">`)
	w.line(`<NamedLayer><se:Name>%s</se:Name><UserStyle><se:Name>%s</se:Name><IsDefault>1</IsDefault><se:FeatureTypeStyle>`, layer, s.Name)
	for i := range s.Classes {
		c := &s.Classes[i]
		w.line(`<se:Rule><se:Name>class %d</se:Name><se:Description><se:Title>%s</se:Title></se:Description>`, i+1, c.Label)
		if c.rest() {
			w.line(`<se:ElseFilter/>`)
		} else {
			w.line(`<ogc:Filter>`)
			s.filter(&w, c)
			w.line(`</ogc:Filter>`)
		}
		switch shape(geometryType) {
		case "point":
			w.line(`<se:PointSymbolizer><se:Graphic><se:Mark><se:WellKnownName>circle</se:WellKnownName><se:Fill><se:SvgParameter name="fill">%s</se:SvgParameter></se:Fill></se:Mark><se:Size>%s</se:Size></se:Graphic></se:PointSymbolizer>`,
				c.Colour.String(), pixels(4*c.Width))
		case "polygon":
			w.line(`<se:PolygonSymbolizer><se:Fill><se:SvgParameter name="fill">%s</se:SvgParameter></se:Fill></se:PolygonSymbolizer>`, c.Colour.String())
		default:
			dash := ""
			if len(c.Dash) > 0 {
				lengths := make([]string, len(c.Dash))
				for i, d := range c.Dash {
					lengths[i] = pixels(d)
				}
				dash = `<se:SvgParameter name="stroke-dasharray">` + strings.Join(lengths, " ") + `</se:SvgParameter>`
			}
			w.line(`<se:LineSymbolizer><se:Stroke><se:SvgParameter name="stroke">%s</se:SvgParameter><se:SvgParameter name="stroke-width">%s</se:SvgParameter>`, c.Colour.String(), pixels(c.Width))
			w.WriteString(dash)
			w.line(`</se:Stroke></se:LineSymbolizer>`)
		}
		w.line(`</se:Rule>`)
	}
	w.line(`</se:FeatureTypeStyle></UserStyle></NamedLayer></StyledLayerDescriptor>`)
	return w.String()
}

// filter writes the condition of a class in OGC's Filter Encoding 1.1.
func (s *Style) filter(w *writer, c *Class) {
	compare := func(how, value string) {
		w.line(`<ogc:`+how+`><ogc:PropertyName>%s</ogc:PropertyName><ogc:Literal>%s</ogc:Literal></ogc:`+how+`>`, s.Column, value)
	}
	switch {
	case c.Is != "":
		compare("PropertyIsEqualTo", c.Is)
	case c.From != nil && c.Below != nil:
		w.line(`<ogc:And>`)
		compare("PropertyIsGreaterThanOrEqualTo", number(*c.From))
		compare("PropertyIsLessThan", number(*c.Below))
		w.line(`</ogc:And>`)
	case c.From != nil:
		compare("PropertyIsGreaterThanOrEqualTo", number(*c.From))
	default:
		compare("PropertyIsLessThan", number(*c.Below))
	}
}

// QML writes the style as rules in the XML that desktop GIS programs keep in layer_styles.
func (s *Style) QML(geometryType string) string {
	kind := map[string]string{"point": "marker", "line": "line", "polygon": "fill"}[shape(geometryType)]
	var w writer
	w.line(`<!DOCTYPE qgis PUBLIC 'http://mrcc.com/qgis.dtd' 'SYSTEM'>`)
	w.line(`<qgis version="3.22.0" styleCategories="Symbology">`)
	w.line(`<renderer-v2 type="RuleRenderer" symbollevels="0" forceraster="0" enableorderby="0">`)
	w.line(`<rules key="{root}">`)
	for i := range s.Classes {
		c := &s.Classes[i]
		w.line(`<rule key="{class-%d}" symbol="%d" label="%s" filter="%s"/>`, i+1, i, c.Label, s.expression(c))
	}
	w.line(`</rules>`)
	w.line(`<symbols>`)
	for i := range s.Classes {
		c := &s.Classes[i]
		colour := fmt.Sprintf("%d,%d,%d,255", c.Colour[0], c.Colour[1], c.Colour[2])
		w.line(`<symbol name="%d" type="%s" alpha="1" clip_to_extent="1" force_rhr="0">`, i, kind)
		var options []string
		switch kind {
		case "marker":
			w.line(`<layer class="SimpleMarker" pass="0" locked="0" enabled="1"><Option type="Map">`)
			options = []string{"name", "circle", "color", colour, "outline_color", "60,60,60,255", "size", number(4 * c.Width), "size_unit", "MM"}
		case "fill":
			w.line(`<layer class="SimpleFill" pass="0" locked="0" enabled="1"><Option type="Map">`)
			options = []string{"color", colour, "style", "solid", "outline_color", "60,60,60,255", "outline_width", "0.2", "outline_width_unit", "MM"}
		default:
			w.line(`<layer class="SimpleLine" pass="0" locked="0" enabled="1"><Option type="Map">`)
			options = []string{"line_color", colour, "line_style", "solid", "line_width", number(c.Width), "line_width_unit", "MM", "capstyle", "flat", "joinstyle", "round"}
			if len(c.Dash) > 0 {
				lengths := make([]string, len(c.Dash))
				for i, d := range c.Dash {
					lengths[i] = number(d)
				}
				options = append(options, "use_custom_dash", "1", "customdash", strings.Join(lengths, ";"), "customdash_unit", "MM")
			}
		}
		for i := 0; i < len(options); i += 2 {
			w.line(`<Option type="QString" name="%s" value="%s"/>`, options[i], options[i+1])
		}
		w.line(`</Option></layer></symbol>`)
	}
	w.line(`</symbols></renderer-v2>`)
	layer := map[string]string{"point": "0", "line": "1", "polygon": "2"}[shape(geometryType)]
	w.line(`<layerGeometryType>%s</layerGeometryType></qgis>`, layer)
	return w.String()
}

// expression is the condition of a class in the words that desktop GIS programs share with SQL.
func (s *Style) expression(c *Class) string {
	column := Quote(s.Column)
	switch {
	case c.rest():
		return "ELSE"
	case c.Is != "":
		return column + " = '" + strings.ReplaceAll(c.Is, "'", "''") + "'"
	case c.From == nil:
		return column + " < " + number(*c.Below)
	case c.Below == nil:
		return column + " >= " + number(*c.From)
	}
	return column + " >= " + number(*c.From) + " AND " + column + " < " + number(*c.Below)
}

func number(v float64) string { return strconv.FormatFloat(v, 'f', -1, 64) }

// pixels converts millimetres to the pixels of the standard, 0.28 mm each (OGC 05-077r4, clause 9).
func pixels(millimetres float64) string { return strconv.FormatFloat(millimetres/0.28, 'f', 2, 64) }

// A writer writes XML; the arguments of line are escaped.
type writer struct{ bytes.Buffer }

func (w *writer) line(form string, arguments ...any) {
	for i, a := range arguments {
		if text, is := a.(string); is {
			var escaped bytes.Buffer
			_ = xml.EscapeText(&escaped, []byte(text)) // a buffer takes what it gets
			arguments[i] = escaped.String()
		}
	}
	fmt.Fprintf(w, form, arguments...)
	w.WriteByte('\n')
}
