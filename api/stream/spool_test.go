package stream

import (
	"bytes"
	"io"
	"os"
	"path/filepath"
	"sync"
	"testing"

	"pgregory.net/rapid"
)

// A spool is a queue, whatever the order of puts and takes and wherever the bytes wait; it never holds more than its bounds
// and gives everything back.
func TestSpoolIsAQueue(t *testing.T) {
	folder := t.TempDir()
	rapid.Check(t, func(t *rapid.T) {
		memory := rapid.Int64Range(1, 4*pageSize).Draw(t, "memory")
		file := rapid.Int64Range(1, 8*pageSize).Draw(t, "file")
		store := NewStore(folder, memory, file, 0)
		s := newSpool(store)
		defer func() {
			s.close()
			if store.Used() != 0 {
				t.Fatalf("%d bytes in use after closing", store.Used())
			}
		}()
		var model []byte
		next := byte(0)
		check := func(p *page) {
			if p.n > len(model) || !bytes.Equal(p.data[:p.n], model[:p.n]) {
				t.Fatal("not the oldest bytes")
			}
			model = model[p.n:]
			p.recycle()
		}
		steps := rapid.IntRange(1, 60).Draw(t, "steps")
		for range steps {
			if rapid.Bool().Draw(t, "put") {
				data := make([]byte, rapid.IntRange(0, 3*pageSize).Draw(t, "bytes"))
				for i := range data {
					data[i] = next
					next = next*31 + 7
				}
				fits := len(model) == 0 || int64(len(model)+len(data)) <= memory+file
				if s.fits(int64(len(data))) != fits {
					t.Fatalf("fits is %t with %d waiting, %d more", !fits, len(model), len(data))
				}
				if fits {
					s.append(data)
					model = append(model, data...)
				}
			} else if p, err := s.take(); err != nil {
				t.Fatal(err)
			} else if p != nil {
				check(p)
			} else if len(model) > 0 {
				t.Fatalf("%d bytes lost", len(model))
			}
			if s.waits() != (len(model) > 0) {
				t.Fatal("waits is wrong")
			}
			if kept := s.memory * pageSize; kept > memory {
				t.Fatalf("%d bytes of full pages in memory, bound %d", kept, memory)
			}
		}
		s.end([]byte("end"))
		model = append(model, "end"...)
		for {
			p, err := s.take()
			if err == io.EOF {
				break
			}
			if err != nil {
				t.Fatal(err)
			}
			check(p)
		}
		if len(model) > 0 {
			t.Fatalf("%d bytes lost", len(model))
		}
		if s.file != nil {
			if info, err := s.file.Stat(); err != nil || info.Size() != 0 {
				t.Fatalf("an empty spool keeps %d bytes of disk (%v)", info.Size(), err)
			}
		}
	})
}

// Blocks that were read are used again, so that the file is no larger than what waited at most.
func TestSpoolUsesBlocksAgain(t *testing.T) {
	s := newSpool(NewStore(t.TempDir(), 1, 0, 0))
	defer s.close()
	data := make([]byte, pageSize)
	for range 4 {
		s.append(data)
	}
	for range 100 {
		s.append(data)
		p, err := s.take()
		if err != nil {
			t.Fatal(err)
		}
		p.recycle()
	}
	if info, err := s.file.Stat(); err != nil || info.Size() > 6*pageSize {
		t.Fatalf("the file has %d bytes for 5 pages (%v)", info.Size(), err)
	}
}

func TestSpoolFileHasNoName(t *testing.T) {
	folder := t.TempDir()
	s := newSpool(NewStore(folder, 1, 0, 0))
	defer s.close()
	s.append(make([]byte, 3*pageSize))
	if s.store.Used() != 3*pageSize {
		t.Fatalf("%d bytes in the file", s.store.Used())
	}
	if names, err := filepath.Glob(filepath.Join(folder, "*")); err != nil || len(names) > 0 {
		t.Fatalf("files %v (%v)", names, err)
	}
}

// Where the file cannot be made, or the store has no room in all, nothing is lost and nothing more is accepted.
func TestSpoolWithoutItsFileIsFull(t *testing.T) {
	shared := NewStore(t.TempDir(), 1, 0, 2*pageSize)
	other := newSpool(shared)
	defer other.close()
	other.append(make([]byte, 2*pageSize))
	for name, store := range map[string]*Store{
		"no folder": NewStore(filepath.Join(t.TempDir(), "absent"), 1, 0, 0),
		"no room":   shared,
	} {
		used := store.Used()
		s := newSpool(store)
		data := bytes.Repeat([]byte("0123456789"), pageSize/4)
		s.append(data)
		if s.fits(1) {
			t.Errorf("%s: not full", name)
		}
		s.end(nil)
		var all []byte
		for {
			p, err := s.take()
			if err != nil {
				break
			}
			all = append(all, p.data[:p.n]...)
		}
		if !bytes.Equal(all, data) {
			t.Errorf("%s: bytes lost", name)
		}
		s.close()
		if store.Used() != used {
			t.Errorf("%s: %d bytes in use", name, store.Used()-used)
		}
	}
}

func TestStoreCheck(t *testing.T) {
	folder := t.TempDir()
	if err := NewStore(folder, 0, 0, 0).Check(); err != nil {
		t.Error(err)
	}
	if err := NewStore("", 0, 0, 0).Check(); err != nil {
		t.Error(err)
	}
	file := filepath.Join(folder, "file")
	if err := os.WriteFile(file, nil, 0o600); err != nil {
		t.Fatal(err)
	}
	for _, bad := range []string{filepath.Join(folder, "absent"), file} {
		if NewStore(bad, 0, 0, 0).Check() == nil {
			t.Errorf("no error for %s", filepath.Base(bad))
		}
	}
}

func TestSpoolWithBothSidesAtWork(t *testing.T) {
	s := newSpool(NewStore(t.TempDir(), pageSize, 0, 0))
	defer s.close()
	const n = 20_000
	var puts sync.WaitGroup
	puts.Go(func() {
		data := make([]byte, 1000)
		for i := range n {
			for j := range data {
				data[j] = byte(i)
			}
			s.append(data)
		}
		s.end(nil)
	})
	at := 0
	for {
		p, err := s.take()
		if err == io.EOF {
			break
		}
		if err != nil {
			t.Fatal(err)
		}
		if p == nil {
			<-s.filled
			continue
		}
		for _, c := range p.data[:p.n] {
			if c != byte(at/1000) {
				t.Fatalf("wrong byte at %d", at)
			}
			at++
		}
		p.recycle()
	}
	puts.Wait()
	if at != n*1000 {
		t.Fatalf("%d bytes of %d", at, n*1000)
	}
}
