// Package postgrestest gives tests a PostgreSQL server: the one that LEAT_TEST_POSTGRES names, or a private one that is started from
// Debian's binaries in a temporary folder, reached over a unix socket only, and gone with the test.
package postgrestest

import (
	"context"
	"crypto/rand"
	"encoding/hex"
	"net/url"
	"os"
	"sync"
	"testing"
	"time"

	"github.com/jackc/pgx/v5"
)

// Variable names a server for tests as a URL whose user may create databases. Unset, a private server is started.
const Variable = "LEAT_TEST_POSTGRES"

// shared is the server of all tests of a process that need no server of their own.
var shared struct {
	sync.Mutex
	server *Server
}

// Database creates an empty database and returns its URL; it is dropped when the test ends. Its server is the one named in the environment, or one
// that all tests of the process share. Where there is neither it skips the test, or fails it under LEAT_ALL_PARTS=1.
func Database(t testing.TB) string {
	t.Helper()
	address := os.Getenv(Variable)
	if address != "" {
		return Create(t, address)
	}
	shared.Lock()
	defer shared.Unlock()
	if shared.server == nil {
		shared.server = start(t, Options{}) // its keeper stops it and tidies up after it when the process ends
	}
	return Create(t, shared.server.URL())
}

// Create creates an empty database in the server at address and returns its URL; it is dropped when the test ends.
func Create(t testing.TB, address string) string {
	t.Helper()
	var random [6]byte
	if _, err := rand.Read(random[:]); err != nil {
		t.Fatal(err)
	}
	name := "leat_test_" + hex.EncodeToString(random[:])
	execute(t, address, "create database "+pgx.Identifier{name}.Sanitize())
	t.Cleanup(func() {
		execute(t, address, "drop database if exists "+pgx.Identifier{name}.Sanitize()+" with (force)")
	})
	parsed, err := url.Parse(address)
	if err != nil {
		t.Fatalf("%s is not a URL", Variable)
	}
	parsed.Path = "/" + name
	return parsed.String()
}

func execute(t testing.TB, address, statement string) {
	t.Helper()
	ctx, cancel := context.WithTimeout(context.Background(), time.Minute)
	defer cancel()
	connection, err := pgx.Connect(ctx, address)
	if err != nil {
		t.Fatalf("connecting to the server for tests: %v", err)
	}
	defer connection.Close(ctx)
	if _, err := connection.Exec(ctx, statement); err != nil {
		t.Fatalf("%s: %v", statement, err)
	}
}
