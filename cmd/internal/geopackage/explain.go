package geopackage

import (
	"errors"
	"fmt"

	"zombiezen.com/go/sqlite"
)

// ErrBusy is the error of a statement that waited in vain for another program's lock on the file.
var ErrBusy = errors.New("the file is locked")

// Explain puts an error of SQLite into words that say what to do about it. Other errors, and nil, come back as they are.
func Explain(path string, err error) error {
	if err == nil || errors.As(err, new(*explained)) {
		return err
	}
	say := func(text string) error {
		return &explained{fmt.Sprintf("%s: %s (%s)", path, text, sqlite.ErrCode(err)), err}
	}
	switch sqlite.ErrCode(err).ToPrimary() {
	case sqlite.ResultBusy, sqlite.ResultLocked:
		return say("another program, perhaps a desktop GIS in which the file is being edited, has held its lock for " +
			Patience.String() + "; save or end the edit there, or close the file, and start again: what was committed stays")
	case sqlite.ResultReadOnly, sqlite.ResultPerm, sqlite.ResultAuth:
		return say("the file or its folder is read-only here; SQLite needs both to be writable, since it keeps its journal beside the file")
	case sqlite.ResultCantOpen:
		return say("the file cannot be opened; if its -wal file lies beside it, the folder must be writable too")
	case sqlite.ResultNotADB:
		return say("this is no SQLite file, and so no GeoPackage")
	case sqlite.ResultCorrupt:
		return say("the file is damaged; take a copy that passes SQLite's integrity_check")
	case sqlite.ResultFull:
		return say("there is no room left on the disk")
	case sqlite.ResultIOErr:
		return say("reading or writing failed; on a network drive, copy the file to a local disk first")
	}
	return err
}

type explained struct {
	text  string
	cause error
}

func (e *explained) Error() string { return e.text }
func (e *explained) Unwrap() error { return e.cause }

// Is makes errors.Is(err, ErrBusy) true for a lock.
func (e *explained) Is(target error) bool {
	code := sqlite.ErrCode(e.cause).ToPrimary()
	return target == ErrBusy && (code == sqlite.ResultBusy || code == sqlite.ResultLocked)
}
