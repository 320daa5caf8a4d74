// Package stream is the ordered pump of bulk: it reads records, has them solved on all cores, and writes one answer for
// each in the order of the records, in memory that does not grow with their number. It knows neither HTTP nor JSON: the
// Reader, Writer, Solver and Slot that it needs are handed in.
//
// One run has these goroutines:
//
//	reader -> workers -> writer (order, hash) -> spool -> sender
//
// Records travel in batches whose buffers are used again and again. The spool stands between the writer and the sender,
// so that a client that sends everything before it reads never blocks the reader: answers not yet taken wait in memory
// up to a bound, then in a temporary file up to a bound, and at that bound the run ends early and says where to resume.
// A watch beside them notices drains, idle clients and clients that take nothing.
package stream
