package main

import (
	"context"
	"io"
	"os/signal"
	"syscall"

	"leat/cmd/internal/drive"
)

// runDrive makes load on a service, until the plan is carried out or a signal stops it.
func runDrive(arguments []string, stdout, stderr io.Writer) int {
	ctx, stop := signal.NotifyContext(context.Background(), syscall.SIGINT, syscall.SIGTERM)
	defer stop()
	switch drive.Run(ctx, arguments, stdout, stderr) {
	case drive.Held:
		return exitOK
	case drive.Misused:
		return exitMisused
	}
	return exitFailed
}
