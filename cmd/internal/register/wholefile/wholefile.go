// Package wholefile writes files that appear whole or not at all: under a name of their own beside the one they will have, until they are done.
package wholefile

import (
	"bufio"
	"errors"
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

// Create begins a file. What stands under the path stays until Finish.
func Create(path string) (*File, error) {
	file, err := os.CreateTemp(filepath.Dir(path), "."+filepath.Base(path)+".unfinished-*")
	if err != nil {
		return nil, err
	}
	return &File{bufio.NewWriterSize(file, bufferBytes), file, path}, nil
}

// Finish makes sure that all is on the disk and gives the file its name.
func (f *File) Finish() error {
	err := errors.Join(f.Flush(), f.mode(), f.file.Sync(), f.file.Close())
	if err == nil {
		err = os.Rename(f.file.Name(), f.path)
	}
	if err != nil {
		os.Remove(f.file.Name())
		return err
	}
	f.file = nil
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
	name := f.file.Name()
	err := errors.Join(f.file.Close(), os.Remove(name))
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
