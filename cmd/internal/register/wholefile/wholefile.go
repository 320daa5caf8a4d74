// Package wholefile writes files that appear whole or not at all: under a name of their own beside the one they will have, until they are done.
package wholefile

import (
	"bufio"
	"errors"
	"fmt"
	"os"
	"path/filepath"
)

// A File is being written. It belongs to one goroutine.
type File struct {
	*bufio.Writer
	file *os.File
	path string
}

// bufferBytes are written at a time.
const bufferBytes = 256 << 10

// Create begins a file, under a hidden name that a process that was killed may have left. What stands under the path stays until Finish. While
// one process writes a path, another cannot begin.
func Create(path string) (*File, error) {
	hidden := filepath.Join(filepath.Dir(path), "."+filepath.Base(path)+".unfinished")
	for {
		file, err := os.OpenFile(hidden, os.O_RDWR|os.O_CREATE, 0o600)
		if err != nil {
			return nil, err
		}
		if err := lock(file); err != nil {
			file.Close()
			return nil, fmt.Errorf("another process is writing %s: %w", path, err)
		}
		// Between opening and locking another process may have finished the file and given it its name.
		if !isStill(hidden, file) {
			file.Close()
			continue
		}
		if err := file.Truncate(0); err != nil {
			file.Close()
			return nil, err
		}
		return &File{bufio.NewWriterSize(file, bufferBytes), file, path}, nil
	}
}

// isStill reports whether a name is still that of an open file.
func isStill(name string, file *os.File) bool {
	named, err := os.Stat(name)
	if err != nil {
		return false
	}
	opened, err := file.Stat()
	return err == nil && os.SameFile(named, opened)
}

// Finish makes sure that all is on the disk and gives the file its name.
func (f *File) Finish() error {
	err := errors.Join(f.Flush(), f.mode(), f.file.Sync())
	if err == nil {
		err = os.Rename(f.file.Name(), f.path) // under the lock
	}
	if err != nil {
		return errors.Join(err, f.Discard())
	}
	err, f.file = f.file.Close(), nil
	if err != nil {
		return err
	}
	return syncFolder(filepath.Dir(f.path))
}

// mode gives the file the permissions of the one in whose place it comes, or those of a new file.
func (f *File) mode() error {
	if old, err := os.Stat(f.path); err == nil {
		return f.file.Chmod(old.Mode().Perm())
	}
	const readable = 0o644
	return f.file.Chmod(readable)
}

// Discard removes a file that was not finished.
func (f *File) Discard() error {
	if f.file == nil {
		return nil
	}
	err := errors.Join(os.Remove(f.file.Name()), f.file.Close()) // removed under the lock
	f.file = nil
	return err
}

// syncFolder makes a new name last.
func syncFolder(path string) error {
	folder, err := os.Open(path)
	if err != nil {
		return err
	}
	defer folder.Close()
	return folder.Sync()
}
