package stream

import (
	"errors"
	"fmt"
	"os"
	"sync/atomic"
)

const (
	// DefaultMemory is how many bytes of answers wait in memory for each run.
	DefaultMemory = 4 << 20
	// DefaultFile is how many bytes of answers wait in a file for each run.
	DefaultFile = 4 << 30
)

// A Store holds the bounds for answers that clients have not taken, and the folder where they wait. One Store serves
// all runs of a process.
type Store struct {
	folder string
	memory int64
	file   int64
	total  int64
	used   atomic.Int64
}

// NewStore returns a store with room for memory bytes in memory and file bytes in a file for each run, and total bytes in
// the files of all runs together; 0 means DefaultMemory, DefaultFile and no bound of its own. Without a folder there are no
// files: a run whose memory is full stops reading until its client takes something.
func NewStore(folder string, memory, file, total int64) *Store {
	if memory <= 0 {
		memory = DefaultMemory
	}
	if file <= 0 {
		file = DefaultFile
	}
	return &Store{folder: folder, memory: memory, file: file, total: total}
}

// Used is the number of bytes in the files of all runs now.
func (s *Store) Used() int64 { return s.used.Load() }

// Check reports whether files can be created, written and unlinked in the folder. Without a folder it always can.
func (s *Store) Check() error {
	if s.folder == "" {
		return nil
	}
	f, err := s.open()
	if err != nil {
		return err
	}
	_, err = f.WriteAt(make([]byte, 512), 0)
	return errors.Join(err, f.Close())
}

// open creates a file that has no name any more, so that it goes when the process does, however that ends.
func (s *Store) open() (*os.File, error) {
	f, err := os.CreateTemp(s.folder, "leat-spool-*")
	if err != nil {
		return nil, fmt.Errorf("spool: %w", err)
	}
	if err := os.Remove(f.Name()); err != nil {
		f.Close()
		return nil, fmt.Errorf("spool: %w", err)
	}
	return f, nil
}

// reserve takes one page of the total, or reports that there is none.
func (s *Store) reserve() bool {
	if used := s.used.Add(pageSize); s.total > 0 && used > s.total {
		s.used.Add(-pageSize)
		return false
	}
	return true
}

func (s *Store) release(pages int64) { s.used.Add(-pages * pageSize) }
