package stream

import "sync"

// pageSize is the unit in which answers wait, in memory and in the file.
const pageSize = 64 << 10

// A page holds answers from its first byte on.
type page struct {
	n    int
	data [pageSize]byte
}

var pages = sync.Pool{New: func() any { return new(page) }}

func newPage() *page {
	p := pages.Get().(*page)
	p.n = 0
	return p
}

func (p *page) recycle() { pages.Put(p) }
