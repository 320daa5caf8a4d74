package geopackage

import (
	"context"
	"errors"
	"fmt"
	"os"
	"time"

	"zombiezen.com/go/sqlite"
	"zombiezen.com/go/sqlite/sqlitex"
)

// Srs_id of coordinates in a plane that no register of reference systems knows (requirement 11).
const UndefinedPlane = -1

// The tables that every file has, and those of the features option (annex C of the standard).
const coreTables = `
CREATE TABLE gpkg_spatial_ref_sys (
  srs_name TEXT NOT NULL,
  srs_id INTEGER PRIMARY KEY,
  organization TEXT NOT NULL,
  organization_coordsys_id INTEGER NOT NULL,
  definition TEXT NOT NULL,
  description TEXT
);
CREATE TABLE gpkg_contents (
  table_name TEXT NOT NULL PRIMARY KEY,
  data_type TEXT NOT NULL,
  identifier TEXT UNIQUE,
  description TEXT DEFAULT '',
  last_change DATETIME NOT NULL DEFAULT (strftime('%Y-%m-%dT%H:%M:%fZ','now')),
  min_x DOUBLE,
  min_y DOUBLE,
  max_x DOUBLE,
  max_y DOUBLE,
  srs_id INTEGER,
  CONSTRAINT fk_gc_r_srs_id FOREIGN KEY (srs_id) REFERENCES gpkg_spatial_ref_sys(srs_id)
);
` + geometryColumnsTable + `
INSERT INTO gpkg_spatial_ref_sys VALUES
  ('Undefined Cartesian', -1, 'NONE', -1, 'undefined', 'undefined Cartesian coordinate reference system'),
  ('Undefined geographic', 0, 'NONE', 0, 'undefined', 'undefined geographic coordinate reference system'),
  ('WGS 84 geodetic', 4326, 'EPSG', 4326, 'GEOGCS["WGS 84",DATUM["WGS_1984",SPHEROID["WGS 84",6378137,298.257223563,AUTHORITY["EPSG","7030"]],AUTHORITY["EPSG","6326"]],PRIMEM["Greenwich",0,AUTHORITY["EPSG","8901"]],UNIT["degree",0.0174532925199433,AUTHORITY["EPSG","9122"]],AXIS["Latitude",NORTH],AXIS["Longitude",EAST],AUTHORITY["EPSG","4326"]]', 'longitude/latitude coordinates in decimal degrees on the WGS 84 spheroid');
`

const geometryColumnsTable = `
CREATE TABLE gpkg_geometry_columns (
  table_name TEXT NOT NULL,
  column_name TEXT NOT NULL,
  geometry_type_name TEXT NOT NULL,
  srs_id INTEGER NOT NULL,
  z TINYINT NOT NULL,
  m TINYINT NOT NULL,
  CONSTRAINT pk_geom_cols PRIMARY KEY (table_name, column_name),
  CONSTRAINT uk_gc_table_name UNIQUE (table_name),
  CONSTRAINT fk_gc_tn FOREIGN KEY (table_name) REFERENCES gpkg_contents(table_name),
  CONSTRAINT fk_gc_srs FOREIGN KEY (srs_id) REFERENCES gpkg_spatial_ref_sys (srs_id)
);`

const extensionsTable = `
CREATE TABLE gpkg_extensions (
  table_name TEXT,
  column_name TEXT,
  extension_name TEXT NOT NULL,
  definition TEXT NOT NULL,
  scope TEXT NOT NULL,
  CONSTRAINT ge_tce UNIQUE (table_name, column_name, extension_name)
);`

// Create makes a GeoPackage without layers. A file that exists is an error.
func Create(ctx context.Context, path string) (*File, error) {
	if _, err := os.Lstat(path); err == nil {
		return nil, fmt.Errorf("%s exists already", path)
	}
	f, err := connect(ctx, path, sqlite.OpenReadWrite|sqlite.OpenCreate)
	if err != nil {
		return nil, err
	}
	script := "PRAGMA application_id = 1196444487; PRAGMA user_version = 10400;" + coreTables
	if err := sqlitex.ExecuteScript(f.Conn, script, nil); err != nil {
		return nil, errors.Join(Explain(path, err), f.Close())
	}
	return f, nil
}

// Description is a row of gpkg_contents.
type Description struct {
	Table       string
	Identifier  string // what a menu of layers shows; must be unique within the file
	Description string
	Changed     time.Time
}

// timeForm is a DATETIME of the standard (requirement 5).
const timeForm = "2006-01-02T15:04:05.000Z"

// ListAttributes lists a table without geometry in gpkg_contents (requirements 118 and 119 ask an INTEGER primary key of it).
func (f *File) ListAttributes(d Description) error {
	return f.Run("INSERT INTO gpkg_contents (table_name, data_type, identifier, description, last_change) VALUES (?, 'attributes', ?, ?, ?)",
		d.Table, d.Identifier, d.Description, d.Changed.UTC().Format(timeForm))
}

// ListFeatures lists a layer in gpkg_contents and gpkg_geometry_columns.
func (f *File) ListFeatures(d Description, g GeometryColumn) error {
	err := f.Run("INSERT INTO gpkg_contents (table_name, data_type, identifier, description, last_change, srs_id) VALUES (?, 'features', ?, ?, ?, ?)",
		d.Table, d.Identifier, d.Description, d.Changed.UTC().Format(timeForm), g.SRS)
	if err != nil {
		return err
	}
	return f.Run("INSERT INTO gpkg_geometry_columns VALUES (?, ?, ?, ?, ?, ?)", d.Table, g.Name, g.Type, g.SRS, g.Z, g.M)
}

// Touch writes when a listed table was last changed, and of a layer the rectangle that its geometries lie in (requirement 148), from its spatial
// index where it has one: that rounds outwards.
func (f *File) Touch(t *Table, changed time.Time) error {
	at := changed.UTC().Format(timeForm)
	if t.Geometry == nil {
		return f.Run("UPDATE gpkg_contents SET last_change = ? WHERE table_name = ?", at, t.Name)
	}
	g := Quote(t.Geometry.Name)
	bounds := "min(ST_MinX(" + g + ")), max(ST_MaxX(" + g + ")), min(ST_MinY(" + g + ")), max(ST_MaxY(" + g + ")) FROM " + Quote(t.Name)
	index := "rtree_" + t.Name + "_" + t.Geometry.Name
	if has, err := f.Has(index); err != nil {
		return err
	} else if has {
		bounds = "min(minx), max(maxx), min(miny), max(maxy) FROM " + Quote(index)
	}
	return f.Run("UPDATE gpkg_contents SET last_change = ?, (min_x, max_x, min_y, max_y) = (SELECT "+bounds+") WHERE table_name = ?", at, t.Name)
}

// Unlist takes a table out of every table of the standard that speaks of it.
func (f *File) Unlist(table string) error {
	for _, from := range []string{"gpkg_extensions", "gpkg_data_columns", "gpkg_geometry_columns", "gpkg_contents"} {
		if has, err := f.Has(from); err != nil {
			return err
		} else if !has {
			continue
		}
		if err := f.Run("DELETE FROM "+from+" WHERE lower(table_name) = lower(?)", table); err != nil {
			return err
		}
	}
	return nil
}
