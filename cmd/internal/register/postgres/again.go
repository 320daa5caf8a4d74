package postgres

import (
	"context"
	"errors"
	"strings"
	"time"

	"github.com/jackc/pgx/v5/pgconn"
)

// patience is for how long a lost database is waited for: long enough for a restart or a change of the leading server.
const patience = 3 * time.Minute

// again calls attempt until it succeeds, fails for a reason of its own, or the database has been away for too long.
func again(ctx context.Context, attempt func() error) error {
	var since time.Time
	pause := 100 * time.Millisecond
	for {
		err := attempt()
		if err == nil || ctx.Err() != nil || !passing(err) {
			return err
		}
		if since.IsZero() {
			since = time.Now()
		} else if time.Since(since) > patience {
			return err
		}
		select {
		case <-ctx.Done():
			return err
		case <-time.After(pause):
		}
		pause = min(2*pause, 3*time.Second)
	}
}

// passing reports whether an error is of the connection or of the server's state, so that the same may succeed later.
func passing(err error) bool {
	if fault, is := errors.AsType[*pgconn.PgError](err); is {
		switch {
		case strings.HasPrefix(fault.Code, "08"), // connection exceptions
			strings.HasPrefix(fault.Code, "57P"), // shutting down, crashed, cannot connect now
			fault.Code == "53300",                // too many connections
			fault.Code == "40001",                // serialization failure
			fault.Code == "40P01",                // deadlock
			fault.Code == "55006":                // object in use
			return fault.Code != "57P04" // the database was dropped
		}
		return false
	}
	if errors.Is(err, context.Canceled) {
		return false
	}
	return lost(err)
}
