package main

import (
	"context"
	"io"
	"os/signal"
	"syscall"

	"leat/cmd/internal/register"
)

// exitProblems is that of leat register where it came to its end, and some rows have problems.
const exitProblems = 3

// runRegister carries a register through a mapping file, until it is done or a signal stops it.
func runRegister(arguments []string, stdout, stderr io.Writer) int {
	ctx, stop := signal.NotifyContext(context.Background(), syscall.SIGINT, syscall.SIGTERM)
	defer stop()
	switch register.Run(ctx, arguments, stdout, stderr) {
	case register.Done:
		return exitOK
	case register.Problems:
		return exitProblems
	case register.Misused:
		return exitMisused
	}
	return exitFailed
}
