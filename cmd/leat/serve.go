package main

import (
	"context"
	"errors"
	"flag"
	"fmt"
	"io"
	"log/slog"
	"os/signal"
	"syscall"

	"leat/api/operation"
	"leat/api/serve"
	"leat/openapi"
)

// runServe serves until a signal asks to stop.
func runServe(arguments, environment []string, stdout, stderr io.Writer) int {
	config, err := serve.Load(arguments, environment)
	if errors.Is(err, flag.ErrHelp) {
		fmt.Fprint(stdout, serve.Help())
		return exitOK
	}
	if err != nil {
		fmt.Fprintf(stderr, "leat serve: %v\n", err)
		return exitMisused
	}
	// Before anything listens, so that no signal finds the default action, which would cut requests.
	ctx, stop := signal.NotifyContext(context.Background(), syscall.SIGINT, syscall.SIGTERM)
	defer stop()
	log := serve.NewLog(stderr)
	if err := serveUntil(ctx, config, log); err != nil {
		log.Error("stopped", slog.String("error", err.Error()))
		return exitFailed
	}
	log.Info("stopped")
	return exitOK
}

// serveUntil wires the service together, serves until ctx is done, and stops it gracefully. A second signal changes nothing.
func serveUntil(ctx context.Context, config serve.Config, log *slog.Logger) error {
	operations := operation.All()
	known, err := serve.KnownAnswer(operations)
	if err != nil {
		return err
	}
	build := serve.ReadBuild()
	server, err := serve.New(config, operations, serve.Surroundings{
		Log: log, Build: build, Ready: known, Contract: openapi.YAML,
	})
	if err != nil {
		return err
	}
	address, err := server.Start()
	if err != nil {
		return err
	}
	log.Info("listening", slog.String("address", address.String()), slog.String("version", build.Version), slog.String("revision", build.Revision))
	select {
	case err := <-server.Served():
		return err
	case <-ctx.Done():
		log.Info("stopping")
		return server.Stop()
	}
}
