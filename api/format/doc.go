// Package format holds the forms in which bulk requests come and answers go: for each a reader of records, a solver that
// turns a record into an answer, and a writer that frames answers, in the terms of package stream. It knows no HTTP.
//
// It also holds the forms, beside JSON, of the answer to one request: see Rendering.
//
// A Format's parts fit together only through bytes: what its Reader finds is what an operation takes (one JSON object), and
// what its Solver appends is what its Writer frames.
package format
