package postgres

import (
	"errors"
	"io"
	"net"
	"strings"

	"github.com/jackc/pgx/v5/pgconn"
)

// lost reports whether an error without a code of the server is that of a broken or refused connection.
func lost(err error) bool {
	if _, is := errors.AsType[*pgconn.ConnectError](err); is {
		return true
	}
	if _, is := errors.AsType[net.Error](err); is {
		return true
	}
	if errors.Is(err, io.EOF) || errors.Is(err, io.ErrUnexpectedEOF) || errors.Is(err, net.ErrClosed) || pgconn.SafeToRetry(err) {
		return true
	}
	return strings.Contains(err.Error(), "conn closed") // pgx has no value for it
}
