// Package postgrestest gives tests a PostgreSQL server: the one that LEAT_TEST_POSTGRES names, or a private one that is started from
// Debian's binaries in a temporary folder, reached over a unix socket only, and gone with the test.
package postgrestest

import (
	"context"
	"crypto/rand"
	"encoding/hex"
	"net/url"
	"os"
	"testing"
	"time"

	"github.com/jackc/pgx/v5"
)

// Variable names a server for tests as a URL whose user may create databases. Unset, a private server is started.
const Variable = "LEAT_TEST_POSTGRES"

// Database creates an empty database of a server that lives as long as the test, and returns its URL. It skips the test, or fails it under
// LEAT_ALL_PARTS=1, where there is no server and no binaries to start one.
func Database(t testing.TB) string {
	t.Helper()
	address := os.Getenv(Variable)
	if address == "" {
		address = Start(t, Options{}).URL()
	}
	return Create(t, address)
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
