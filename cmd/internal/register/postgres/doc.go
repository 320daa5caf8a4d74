// Package postgres reads registers from PostgreSQL, with or without PostGIS, writes results back, and shares a run among processes.
//
// No SQL is built from a value: values travel as parameters or as COPY data, and every identifier goes through quote. What reads and what writes use
// connections of their own, so that a page is read while another is solved and a third is committed.
package postgres
