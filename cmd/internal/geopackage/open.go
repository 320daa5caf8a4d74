package geopackage

import (
	"context"
	"errors"
	"fmt"
	"io/fs"
	"os"
	"slices"
	"time"

	"zombiezen.com/go/sqlite"
	"zombiezen.com/go/sqlite/sqlitex"
)

// Patience is how long a statement waits for a lock that another program holds before it fails with ErrBusy.
const Patience = 20 * time.Second

// Application ids of the header: "GPKG" since 1.2 (requirement 2), "GP10" and "GP11" before.
var applicationIDs = []int64{0x47504B47, 0x47503130, 0x47503131}

// A File is an open GeoPackage. It is one connection to the file, for one goroutine at a time.
type File struct {
	*sqlite.Conn
	Path string
}

// Access says what a file is opened for.
type Access int

const (
	// Read opens a file that is not to be changed.
	Read Access = iota
	// Write opens a file that is to be changed.
	Write
)

// Open opens a GeoPackage that exists. Once the context is done, statements on the file are interrupted. An error says what the file is instead,
// or who may not open it.
func Open(ctx context.Context, path string, access Access) (*File, error) {
	info, err := os.Stat(path)
	switch {
	case errors.Is(err, fs.ErrNotExist):
		return nil, fmt.Errorf("there is no file %s", path)
	case err != nil:
		return nil, err
	case info.IsDir():
		return nil, fmt.Errorf("%s is a folder; a GeoPackage is one file", path)
	}
	flags := sqlite.OpenReadOnly
	if access == Write {
		// Whether it really can be written to is SQLite's to find out: to open the file here and close it again would take away the locks that
		// other connections of this process hold on it.
		if flags = sqlite.OpenReadWrite; info.Mode().Perm()&0o222 == 0 {
			return nil, fmt.Errorf("%s is read-only", path)
		}
	}
	f, err := connect(ctx, path, flags)
	if err != nil {
		return nil, err
	}
	if err := f.check(); err != nil {
		return nil, errors.Join(err, f.Close())
	}
	return f, nil
}

func connect(ctx context.Context, path string, flags sqlite.OpenFlags) (*File, error) {
	conn, err := sqlite.OpenConn(path, flags)
	if err != nil {
		return nil, Explain(path, err)
	}
	f := &File{Conn: conn, Path: path}
	conn.SetInterrupt(ctx.Done())
	conn.SetBusyTimeout(Patience)
	for _, set := range []string{"PRAGMA foreign_keys = ON", "PRAGMA cache_size = -8192"} {
		if err := f.Run(set); err != nil {
			return nil, errors.Join(err, conn.Close())
		}
	}
	if err := addFunctions(conn); err != nil {
		return nil, errors.Join(err, conn.Close())
	}
	return f, nil
}

// check tells a GeoPackage from another SQLite file and from no SQLite file at all.
func (f *File) check() error {
	id, err := f.Integer("PRAGMA application_id")
	if err != nil {
		return err
	}
	tables, err := f.Integer("SELECT count(*) FROM sqlite_master WHERE name IN ('gpkg_contents', 'gpkg_spatial_ref_sys')")
	if err != nil {
		return err
	}
	if tables < 2 || !slices.Contains(applicationIDs, id) && id != 0 {
		return fmt.Errorf("%s is an SQLite file, but no GeoPackage: it lacks gpkg_contents and gpkg_spatial_ref_sys, or bears another application's mark", f.Path)
	}
	return nil
}

// Run executes one statement that gives no rows, with its parameters in order: nil, int64, int, float64, string, []byte or bool.
func (f *File) Run(statement string, parameters ...any) error {
	return f.Rows(statement, nil, parameters...)
}

// Rows executes one statement and calls each for its rows. An error of each ends it.
func (f *File) Rows(statement string, each func(*sqlite.Stmt) error, parameters ...any) error {
	return Explain(f.Path, sqlitex.ExecuteTransient(f.Conn, statement, &sqlitex.ExecOptions{Args: parameters, ResultFunc: each}))
}

// Integer returns the first column of the first row, 0 if there is none.
func (f *File) Integer(statement string, parameters ...any) (int64, error) {
	var out int64
	err := f.Rows(statement, func(s *sqlite.Stmt) error { out = s.ColumnInt64(0); return nil }, parameters...)
	return out, err
}

// Text returns the first column of the first row, "" if there is none.
func (f *File) Text(statement string, parameters ...any) (string, error) {
	out := ""
	err := f.Rows(statement, func(s *sqlite.Stmt) error { out = s.ColumnText(0); return nil }, parameters...)
	return out, err
}

// Within runs work in one transaction that takes the right to write at its start. With an error nothing of it stays.
func (f *File) Within(work func() error) (err error) {
	end, err := sqlitex.ImmediateTransaction(f.Conn)
	if err != nil {
		return Explain(f.Path, err)
	}
	err = work()
	end(&err)
	return Explain(f.Path, err)
}
