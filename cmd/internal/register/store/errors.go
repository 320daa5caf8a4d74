package store

import "errors"

// ErrNoRun is returned by Sharing.Join where no run is open.
var ErrNoRun = errors.New("no run is open")
