package postgrestest_test

import (
	"context"
	"testing"

	"github.com/jackc/pgx/v5"

	"leat/cmd/internal/register/postgres/postgrestest"
)

func TestServerKeepsRowsOverRestarts(t *testing.T) {
	server := postgrestest.Start(t, postgrestest.Options{Settings: []string{"work_mem=8MB"}})
	ctx := context.Background()
	connection, err := pgx.Connect(ctx, server.URL())
	if err != nil {
		t.Fatal(err)
	}
	if _, err := connection.Exec(ctx, "create table kept (x int)"); err != nil {
		t.Fatal(err)
	}
	add := func(expected int) {
		t.Helper()
		connection, err := pgx.Connect(ctx, server.URL())
		if err != nil {
			t.Fatal(err)
		}
		defer connection.Close(ctx)
		if _, err := connection.Exec(ctx, "insert into kept values (1)"); err != nil {
			t.Fatal(err)
		}
		var rows int
		if err := connection.QueryRow(ctx, "select count(*) from kept").Scan(&rows); err != nil {
			t.Fatal(err)
		}
		if rows != expected {
			t.Errorf("%d rows, expected %d", rows, expected)
		}
	}
	add(1)
	server.Stop(t)
	if err := connection.Ping(ctx); err == nil {
		t.Error("a stopped server answers")
	}
	server.Run(t)
	add(2)
	server.Crash(t)
	server.Run(t)
	add(3)
}

func TestDatabasesAreApart(t *testing.T) {
	first, second := postgrestest.Database(t), postgrestest.Database(t)
	if first == second {
		t.Fatal("one database for two")
	}
	ctx := context.Background()
	for _, address := range []string{first, second} {
		connection, err := pgx.Connect(ctx, address)
		if err != nil {
			t.Fatal(err)
		}
		if _, err := connection.Exec(ctx, "create table same_name (x int)"); err != nil {
			t.Error(err)
		}
		connection.Close(ctx)
	}
}
