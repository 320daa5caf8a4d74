package district

import (
	"context"
	"errors"
	"strings"
	"time"

	"leat/cmd/internal/geopackage"
)

// made is when the demo says it was made, so that its bytes do not depend on the clock.
var made = time.Date(2026, 6, 1, 12, 0, 0, 0, time.UTC)

// WriteGeoPackage makes the register as a GeoPackage: the layer channels, whose lines have levels (Z) and distances (M), and the table section_points.
// A file that exists is an error.
func WriteGeoPackage(ctx context.Context, path string) (err error) {
	f, err := geopackage.Create(ctx, path)
	if err != nil {
		return err
	}
	defer func() { err = errors.Join(err, f.Close()) }()
	if err := f.Run("PRAGMA synchronous = OFF"); err != nil { // a demo cut short is made again
		return err
	}
	return f.Within(func() error { return fill(f) })
}

func fill(f *geopackage.File) error {
	names, declared, marks := []string{"geom"}, []string{"geom LINESTRING"}, []string{"?"}
	var texts []geopackage.ColumnText
	for _, c := range columns {
		names, declared, marks = append(names, c.name), append(declared, geopackage.Quote(c.name)+" "+c.geo), append(marks, "?")
		texts = append(texts, geopackage.ColumnText{Column: c.name, Title: c.title, Description: c.about})
	}
	for _, statement := range []string{
		"CREATE TABLE channels (fid INTEGER PRIMARY KEY, " + strings.Join(declared, ", ") + ")",
		`CREATE TABLE section_points (fid INTEGER PRIMARY KEY, asset_code TEXT, place INTEGER, "offset" DOUBLE, level DOUBLE)`,
	} {
		if err := f.Run(statement); err != nil {
			return err
		}
	}
	err := f.Run("INSERT INTO gpkg_spatial_ref_sys VALUES (?, ?, 'NONE', ?, ?, 'the grid of an invented district')", GridName, GridID, GridID, GridDefinition)
	if err != nil {
		return err
	}
	err = f.ListFeatures(geopackage.Description{Table: "channels", Identifier: "channels", Description: "Channels, drains, sewers and culverts of Ostermere (invented)", Changed: made},
		geopackage.GeometryColumn{Name: "geom", Type: "LINESTRING", SRS: GridID, Z: 1, M: 1})
	if err != nil {
		return err
	}
	err = f.ListAttributes(geopackage.Description{Table: "section_points", Identifier: "section_points", Description: "Points of surveyed sections, as they were booked", Changed: made})
	if err != nil {
		return err
	}
	table, err := f.Table("channels")
	if err != nil {
		return err
	}
	if err := f.AddIndex(table); err != nil {
		return err
	}
	put := "INSERT INTO channels (" + geopackage.QuoteAll(names) + ") VALUES (" + strings.Join(marks, ", ") + ")"
	for _, c := range Channels() {
		points := make([]geopackage.Point, len(c.Line))
		for i, v := range c.Line {
			points[i] = geopackage.Point(v)
		}
		cells := []any{geopackage.Line(GridID, points, true, true)}
		for _, k := range columns {
			cells = append(cells, k.cell(&c))
		}
		if err := f.Run(put, cells...); err != nil {
			return err
		}
		for _, p := range c.Points {
			if err := f.Run("INSERT INTO section_points (asset_code, place, \"offset\", level) VALUES (?, ?, ?, ?)", c.Code, p.Place, p.Offset, p.Level); err != nil {
				return err
			}
		}
	}
	for _, index := range []string{"CREATE UNIQUE INDEX channels_asset_code ON channels (asset_code)", "CREATE INDEX section_points_asset_code ON section_points (asset_code)"} {
		if err := f.Run(index); err != nil {
			return err
		}
	}
	if err := f.Describe("channels", texts); err != nil {
		return err
	}
	return f.Touch(table, made)
}
