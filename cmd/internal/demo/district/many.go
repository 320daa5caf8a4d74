package district

import (
	"fmt"

	"leat/cmd/internal/geopackage"
)

// Multiply makes the register in a GeoPackage, as WriteGeoPackage wrote it, so many times as long, for trials with long ones: the copies of an asset have its code with
// a number behind it, and lie where it lies. Points are copied with their assets.
func Multiply(f *geopackage.File, times int) error {
	const number = "WITH RECURSIVE n(i) AS (SELECT 1 UNION ALL SELECT i + 1 FROM n WHERE i < ?) "
	list := geopackage.QuoteAll([]string{"geom"})
	chosen := "c." + list
	for _, c := range columns {
		name := geopackage.Quote(c.name)
		list += ", " + name
		if c.name == "asset_code" {
			name = "asset_code || '-' || printf('%05d', n.i)"
		}
		chosen += ", " + name
	}
	if times < 2 {
		return fmt.Errorf("a register cannot be made %d times as long", times)
	}
	return f.Within(func() error {
		err := f.Run("INSERT INTO channels ("+list+") "+number+"SELECT "+chosen+" FROM n, channels c WHERE c.fid <= ?", times-1, Rows)
		if err != nil {
			return err
		}
		return f.Run(`INSERT INTO section_points (asset_code, place, "offset", level) `+number+
			`SELECT asset_code || '-' || printf('%05d', n.i), place, "offset", level FROM n, section_points p WHERE p.fid <= (SELECT max(fid) FROM section_points)`, times-1)
	})
}
