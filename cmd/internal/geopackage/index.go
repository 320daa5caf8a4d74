package geopackage

import "strings"

// The spatial index of a layer and its triggers, as the extension gpkg_rtree_index of version 1.4 has them: {t} stands for the table, {c} for the
// column of the geometry, {i} for the INTEGER primary key. The published text of update6 says UPDATE "{t}", where it can only mean the index.
var indexParts = []string{
	`DROP TABLE IF EXISTS "rtree_{t}_{c}"`, // of an earlier table of that name, dropped by a program that left its index behind
	`CREATE VIRTUAL TABLE "rtree_{t}_{c}" USING rtree(id, minx, maxx, miny, maxy)`,
	`INSERT OR REPLACE INTO "rtree_{t}_{c}" SELECT "{i}", ST_MinX("{c}"), ST_MaxX("{c}"), ST_MinY("{c}"), ST_MaxY("{c}") FROM "{t}" WHERE "{c}" NOT NULL AND NOT ST_IsEmpty("{c}")`,
	`CREATE TRIGGER "rtree_{t}_{c}_insert" AFTER INSERT ON "{t}"
  WHEN (new."{c}" NOT NULL AND NOT ST_IsEmpty(NEW."{c}"))
BEGIN
  INSERT OR REPLACE INTO "rtree_{t}_{c}" VALUES (NEW."{i}", ST_MinX(NEW."{c}"), ST_MaxX(NEW."{c}"), ST_MinY(NEW."{c}"), ST_MaxY(NEW."{c}"));
END`,
	`CREATE TRIGGER "rtree_{t}_{c}_update2" AFTER UPDATE OF "{c}" ON "{t}"
  WHEN OLD."{i}" = NEW."{i}" AND (NEW."{c}" ISNULL OR ST_IsEmpty(NEW."{c}"))
BEGIN
  DELETE FROM "rtree_{t}_{c}" WHERE id = OLD."{i}";
END`,
	`CREATE TRIGGER "rtree_{t}_{c}_update4" AFTER UPDATE ON "{t}"
  WHEN OLD."{i}" != NEW."{i}" AND (NEW."{c}" ISNULL OR ST_IsEmpty(NEW."{c}"))
BEGIN
  DELETE FROM "rtree_{t}_{c}" WHERE id IN (OLD."{i}", NEW."{i}");
END`,
	`CREATE TRIGGER "rtree_{t}_{c}_update5" AFTER UPDATE ON "{t}"
  WHEN OLD."{i}" != NEW."{i}" AND (NEW."{c}" NOTNULL AND NOT ST_IsEmpty(NEW."{c}"))
BEGIN
  DELETE FROM "rtree_{t}_{c}" WHERE id = OLD."{i}";
  INSERT OR REPLACE INTO "rtree_{t}_{c}" VALUES (NEW."{i}", ST_MinX(NEW."{c}"), ST_MaxX(NEW."{c}"), ST_MinY(NEW."{c}"), ST_MaxY(NEW."{c}"));
END`,
	`CREATE TRIGGER "rtree_{t}_{c}_update6" AFTER UPDATE OF "{c}" ON "{t}"
  WHEN OLD."{i}" = NEW."{i}" AND (NEW."{c}" NOTNULL AND NOT ST_IsEmpty(NEW."{c}")) AND (OLD."{c}" NOTNULL AND NOT ST_IsEmpty(OLD."{c}"))
BEGIN
  UPDATE "rtree_{t}_{c}" SET minx = ST_MinX(NEW."{c}"), maxx = ST_MaxX(NEW."{c}"), miny = ST_MinY(NEW."{c}"), maxy = ST_MaxY(NEW."{c}") WHERE id = NEW."{i}";
END`,
	`CREATE TRIGGER "rtree_{t}_{c}_update7" AFTER UPDATE OF "{c}" ON "{t}"
  WHEN OLD."{i}" = NEW."{i}" AND (NEW."{c}" NOTNULL AND NOT ST_IsEmpty(NEW."{c}")) AND (OLD."{c}" ISNULL OR ST_IsEmpty(OLD."{c}"))
BEGIN
  INSERT INTO "rtree_{t}_{c}" VALUES (NEW."{i}", ST_MinX(NEW."{c}"), ST_MaxX(NEW."{c}"), ST_MinY(NEW."{c}"), ST_MaxY(NEW."{c}"));
END`,
	`CREATE TRIGGER "rtree_{t}_{c}_delete" AFTER DELETE ON "{t}"
  WHEN old."{c}" NOT NULL
BEGIN
  DELETE FROM "rtree_{t}_{c}" WHERE id = OLD."{i}";
END`,
}

// AddIndex gives a layer its spatial index (requirements 75 to 77), filled from what the layer holds. From then on every connection that writes
// to the layer needs the functions that Open provides.
func (f *File) AddIndex(t *Table) error {
	// The names stand within quotes here, so a quote in them is doubled.
	double := func(name string) string { return strings.ReplaceAll(name, `"`, `""`) }
	fill := strings.NewReplacer("{t}", double(t.Name), "{c}", double(t.Geometry.Name), "{i}", double(t.Key))
	for _, part := range indexParts {
		if err := f.Run(fill.Replace(part)); err != nil {
			return err
		}
	}
	return f.Extend(t.Name, t.Geometry.Name, "gpkg_rtree_index", "http://www.geopackage.org/spec140/#extension_rtree", "write-only")
}
