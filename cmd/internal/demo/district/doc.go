// Package district makes the asset register of Ostermere as an authority would keep it: a table of channels, drains, sewers and culverts with lines on a
// map, codes for shapes and materials, sizes in the units of each trade, levels at both ends, flows, and a table of surveyed points; as a GeoPackage and
// as SQL for PostgreSQL. Everything in it is invented: places, sizes, surveys, flows, and the grid that the coordinates are in.
//
// A fixed seed gives the same bytes on every run. Some rows are wrong on purpose; Mistakes lists them with what happened in the office.
package district
