package main

import (
	"context"
	"errors"
	"flag"
	"fmt"
	"io"
	"log/slog"
	"os"
	"os/signal"
	"runtime"
	"syscall"
	"time"

	"leat/api/operation"
	"leat/api/serve"
	"leat/openapi"
)

// lastLines is how long the process waits at its end for its log to be taken.
const lastLines = time.Second

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
	lines := serve.NewPatientLog(stderr)
	defer lines.Close(lastLines)
	log := serve.NewLog(lines)
	memory := limitMemory(environment)
	if config.Solves == 0 {
		config.Solves = runtime.GOMAXPROCS(0)
	}
	defer runtime.GOMAXPROCS(runtime.GOMAXPROCS(config.Solves + edgeThreads))
	if err := serveUntil(ctx, config, memory, log); err != nil {
		log.Error("stopped", slog.String("error", err.Error()))
		return exitFailed
	}
	log.Info("stopped")
	return exitOK
}

// edgeThreads is how many threads may run Go beside those that solve: for them Go's scheduler, which would let a ready goroutine wait for solvers
// that never block, has a thread of its own, and the operating system shares the processors among all, in slices of a few milliseconds.
const edgeThreads = 1

// serveUntil wires the service together, serves until ctx is done, and stops it gracefully. A second signal changes nothing.
func serveUntil(ctx context.Context, config serve.Config, memory int64, log *slog.Logger) error {
	// By custom this signal asks to read files anew. Where there are none, its default action stands: the end of a service whose terminal is closed.
	hangUp := make(chan os.Signal, 1)
	if config.KeysFile != "" || config.TLSCertificate != "" {
		signal.Notify(hangUp, syscall.SIGHUP)
		defer signal.Stop(hangUp)
	}
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
	said := []any{slog.String("address", address.String()), slog.String("version", build.Version), slog.String("revision", build.Revision)}
	if admin := server.AdminAddress(); admin != nil {
		said = append(said, slog.String("admin_address", admin.String()))
	}
	if memory > 0 {
		said = append(said, slog.Int64("memory_limit_bytes", memory))
	}
	log.Info("listening", said...)
	for {
		select {
		case err := <-server.Served():
			return err
		case <-hangUp:
			server.Renew()
		case <-ctx.Done():
			log.Info("stopping")
			return server.Stop()
		}
	}
}
