// Package geopackage reads and writes GeoPackages (OGC 12-128, version 1.4): SQLite files that hold layers and tables with their description.
// It knows the standard's own tables, the geometry's binary form, spatial indexes, descriptions of columns, and the styles that desktop GIS
// programs look for beside a layer. It knows nothing of hydraulics.
//
// SQLite is zombiezen.com/go/sqlite, which needs no C compiler. Values always travel as bound parameters; names of tables and columns are quoted
// by Quote.
package geopackage
