// Package geopackage reads a register from a GeoPackage and writes results into one, in place: the same file may be both.
//
// Locks. During a run the target is in SQLite's WAL mode, in which readers (a desktop GIS that shows the file) and the one writer do not wait for
// each other; at its end it goes back to the mode it had. Rows are read page by page, results written batch by batch, each in a transaction of its own, so
// that no lock is held while anything is computed. Another program that writes makes the run wait, for geopackage.Patience at most.
package geopackage
