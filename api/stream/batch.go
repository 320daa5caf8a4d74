package stream

import "sync"

const (
	// batchRecords, batchBytes and batchAnswers bound what one batch carries, single records excepted.
	batchRecords = 64
	batchBytes   = 64 << 10
	batchAnswers = 256 << 10
	// keptBytes is the largest buffer that is kept for use again: a rare huge record must not stay for ever.
	keptBytes = 1 << 20
)

// A batch is some consecutive records with, later, their answers. It passes from the reader to a worker to the writer and
// back; only one of them has it at a time.
type batch struct {
	in      []byte // the records' bytes, one after another
	records []entry

	// Answers pass to the writer in pieces, mostly one: the answers to records[first:ready] are in out.
	out          []byte
	first, ready int
	solved       chan struct{} // of capacity 1: a worker has made a piece
	taken        chan struct{} // of capacity 1: the writer has taken a piece that was not the last
}

// last reports whether the piece in out is the last.
func (b *batch) last() bool { return b.ready == len(b.records) }

// next makes room for the next piece.
func (b *batch) next() {
	b.first, b.out = b.ready, b.out[:0]
}

// An entry is one record of a batch and where its parts end in the buffers.
type entry struct {
	line    int64
	in, out int
	cause   error // why it is refused, or nil
	problem bool
}

var batches = sync.Pool{New: func() any {
	return &batch{records: make([]entry, 0, batchRecords), solved: make(chan struct{}, 1), taken: make(chan struct{}, 1)}
}}

func (b *batch) reset() {
	if cap(b.in) > keptBytes {
		b.in = nil
	}
	if cap(b.out) > keptBytes {
		b.out = nil
	}
	b.in, b.out = b.in[:0], b.out[:0]
	clear(b.records)
	b.records = b.records[:0]
	b.first, b.ready = 0, 0
}
