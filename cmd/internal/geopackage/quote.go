package geopackage

import (
	"fmt"
	"strings"
)

// Quote writes a name of a table or column as an SQL identifier. Any name that SQLite can hold comes through.
func Quote(name string) string { return `"` + strings.ReplaceAll(name, `"`, `""`) + `"` }

// QuoteAll writes names as a list of identifiers.
func QuoteAll(names []string) string {
	out := make([]string, len(names))
	for i, name := range names {
		out[i] = Quote(name)
	}
	return strings.Join(out, ", ")
}

// CheckName says why a name will not do for a new table or column: it must be a letter or an underscore followed by letters, digits and
// underscores, at most 60 of them, so that every program that reads GeoPackages can name it, and not one of the standard's or SQLite's own.
func CheckName(name string) error {
	if name == "" || len(name) > 60 {
		return fmt.Errorf("a name has 1 to 60 characters, and %.80q has %d", name, len(name))
	}
	for i, r := range name {
		letter := r == '_' || r >= 'a' && r <= 'z' || r >= 'A' && r <= 'Z'
		if !letter && (i == 0 || r < '0' || r > '9') {
			return fmt.Errorf("the name %q may hold letters without accents, digits and underscores only, and must not begin with a digit", name)
		}
	}
	for _, reserved := range []string{"gpkg_", "sqlite_", "rtree_"} {
		if strings.HasPrefix(strings.ToLower(name), reserved) {
			return fmt.Errorf("names that begin with %s are reserved, so %q will not do", reserved, name)
		}
	}
	return nil
}
