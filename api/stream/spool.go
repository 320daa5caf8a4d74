package stream

import (
	"io"
	"os"
	"sync"
)

// A spool is a queue of bytes between one goroutine that puts and one that takes: pages in memory up to a bound, then in
// a file up to a bound. The youngest page, still being filled, is always in memory.
type spool struct {
	store *Store

	mutex  sync.Mutex
	queue  []waiting // full pages, oldest first from front on
	front  int
	tail   *page // the youngest bytes, or nil
	size   int64 // bytes waiting, tail included
	memory int64 // pages of queue in memory
	over   bool  // more waited at once than the memory's bound
	full   bool  // the file failed or the store has no room: nothing more is accepted
	ended  bool  // nothing will be put any more

	file    *os.File // opened by the first page that goes there; only the side that puts writes to it
	blocks  int64    // pages in the file, those being written or read included
	highest int64    // blocks that the file has had since it was last empty
	free    []int64  // blocks below highest to use again

	filled  chan struct{} // of capacity 1: something was put, or the end came
	emptied chan struct{} // of capacity 1: something was taken
}

// waiting is a full page of the queue: in memory, or in a block of the file where page is nil.
type waiting struct {
	page  *page
	block int64
}

func newSpool(store *Store) *spool {
	return &spool{store: store, filled: make(chan struct{}, 1), emptied: make(chan struct{}, 1)}
}

// end appends the last bytes, within the bounds or not, and ends the queue.
func (s *spool) end(data []byte) {
	s.append(data)
	s.mutex.Lock()
	s.ended = true
	s.mutex.Unlock()
	signal(s.filled)
}

// fits reports whether size more bytes stay within the bounds. Into an empty queue anything does: the answers of one
// batch may be more than the memory's bound.
func (s *spool) fits(size int64) bool {
	s.mutex.Lock()
	defer s.mutex.Unlock()
	bound := s.store.memory
	if s.store.folder != "" {
		bound += s.store.file
	}
	if !s.full && (s.size == 0 || s.size+size <= bound) {
		return true
	}
	s.over = true
	signal(s.filled) // to a sender that holds back
	return false
}

// state returns how much waits, whether that is all, and whether it ever was more than the memory's bound.
func (s *spool) state() (size int64, ended, over bool) {
	s.mutex.Lock()
	defer s.mutex.Unlock()
	return s.size, s.ended, s.over
}

func (s *spool) append(data []byte) {
	for len(data) > 0 {
		s.mutex.Lock()
		if s.tail == nil {
			s.tail = newPage()
		}
		n := copy(s.tail.data[s.tail.n:], data)
		s.tail.n += n
		s.size += int64(n)
		s.over = s.over || s.size > s.store.memory
		var filled *page
		if s.tail.n == pageSize {
			filled, s.tail = s.tail, nil
		}
		spill := s.store.folder != "" && !s.full && (s.memory+1)*pageSize > s.store.memory
		s.mutex.Unlock()
		data = data[n:]
		if filled == nil {
			break // the tail may be taken already, and serve another stream
		}
		// Nobody else knows of the page until it is pushed: the side that takes waits for the signal if there is nothing older.
		w := waiting{page: filled}
		if spill {
			w = s.spill(filled)
		}
		s.push(w)
	}
	signal(s.filled)
}

// spill moves a page to the file. If that fails the page stays in memory, beyond the bound, and the spool is full.
func (s *spool) spill(p *page) waiting {
	block, ok := s.reserve()
	if ok {
		var err error
		if s.file == nil {
			s.file, err = s.store.open()
		}
		if err == nil {
			_, err = s.file.WriteAt(p.data[:], block*pageSize)
		}
		if err == nil {
			p.recycle()
			return waiting{block: block}
		}
		s.release(block)
	}
	s.mutex.Lock()
	s.full = true
	s.mutex.Unlock()
	return waiting{page: p}
}

func (s *spool) push(w waiting) {
	s.mutex.Lock()
	defer s.mutex.Unlock()
	if len(s.queue) == cap(s.queue) && s.front > len(s.queue)/2 {
		n := copy(s.queue, s.queue[s.front:])
		clear(s.queue[n:])
		s.queue, s.front = s.queue[:n], 0
	}
	s.queue = append(s.queue, w)
	if w.page != nil {
		s.memory++
	}
}

// take returns the oldest page, to be recycled by the caller; nil where nothing waits now, and io.EOF where nothing will any more.
func (s *spool) take() (*page, error) {
	s.mutex.Lock()
	if s.front < len(s.queue) {
		w := s.queue[s.front]
		s.queue[s.front] = waiting{}
		s.front++
		s.size -= pageSize
		if w.page != nil {
			s.memory--
		}
		s.mutex.Unlock()
		if w.page == nil {
			w.page = newPage()
			w.page.n = pageSize
			if _, err := s.file.ReadAt(w.page.data[:], w.block*pageSize); err != nil {
				return nil, err
			}
			s.release(w.block)
		}
		signal(s.emptied)
		return w.page, nil
	}
	defer s.mutex.Unlock()
	if p := s.tail; p != nil {
		s.tail = nil
		s.size -= int64(p.n)
		signal(s.emptied)
		return p, nil
	}
	if s.ended {
		return nil, io.EOF
	}
	return nil, nil
}

// waits reports whether anything waits to be taken.
func (s *spool) waits() bool {
	s.mutex.Lock()
	defer s.mutex.Unlock()
	return s.size > 0
}

// reserve finds a block of the file for one more page, the lowest that was never used or one that was read.
func (s *spool) reserve() (int64, bool) {
	if !s.store.reserve() {
		return 0, false
	}
	s.mutex.Lock()
	defer s.mutex.Unlock()
	s.blocks++
	if n := len(s.free); n > 0 {
		block := s.free[n-1]
		s.free = s.free[:n-1]
		return block, true
	}
	s.highest++
	return s.highest - 1, true
}

// release gives a block back, and the disk with the last one.
func (s *spool) release(block int64) {
	s.store.release(1)
	s.mutex.Lock()
	defer s.mutex.Unlock()
	s.blocks--
	s.free = append(s.free, block)
	if s.blocks == 0 {
		s.free, s.highest = s.free[:0], 0
		if s.file != nil {
			// Should it fail the disk is given back when the file is closed.
			_ = s.file.Truncate(0)
		}
	}
}

// close frees all there is. Both sides have ended.
func (s *spool) close() {
	for _, w := range s.queue[s.front:] {
		if w.page != nil {
			w.page.recycle()
		}
	}
	if s.tail != nil {
		s.tail.recycle()
	}
	s.queue, s.front, s.tail = nil, 0, nil
	s.store.release(s.blocks)
	s.blocks = 0
	if s.file != nil {
		s.file.Close()
	}
}

func signal(c chan struct{}) {
	select {
	case c <- struct{}{}:
	default:
	}
}
