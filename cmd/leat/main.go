// Command leat is the one binary: the HTTP service and what belongs to running it.
package main

import (
	"fmt"
	"io"
	"os"
)

// Exit codes.
const (
	exitOK       = 0
	exitFailed   = 1
	exitMisused  = 2
	usageMessage = `Leat computes what open-channel flow does in ditches, lined channels, culverts and pipes.

  leat serve      start the HTTP service; leat serve --help lists its settings
  leat register   carry a register of assets through a mapping file; leat register --help tells more
  leat key        make a caller's key and its line for --keys-file; leat key --help tells more
  leat drive      make load on a service in staging; leat drive --help tells more
  leat health     ask a running service whether it is ready; exit code 0 if so, else 1
  leat version    say what this binary is; with --components, what it is made of (CycloneDX)
  leat help       this text

Exit codes: 0 done, 1 failed, 2 misused; of register also 3: done, and some rows have problems.
`
)

func main() {
	os.Exit(run(os.Args[1:], os.Environ(), os.Stdout, os.Stderr))
}

// run is main with its surroundings handed in.
func run(arguments, environment []string, stdout, stderr io.Writer) int {
	if len(arguments) == 0 {
		fmt.Fprint(stderr, usageMessage)
		return exitMisused
	}
	rest := arguments[1:]
	switch arguments[0] {
	case "serve":
		return runServe(rest, environment, stdout, stderr)
	case "register":
		return runRegister(rest, stdout, stderr)
	case "key":
		return runKey(rest, stdout, stderr)
	case "drive":
		return runDrive(rest, stdout, stderr)
	case "health":
		return runHealth(rest, environment, stdout, stderr)
	case "version", "--version":
		return runVersion(rest, stdout, stderr)
	case "help", "--help", "-h":
		if len(rest) == 1 && (rest[0] == "serve" || rest[0] == "health" || rest[0] == "key" || rest[0] == "register" || rest[0] == "drive") {
			return run([]string{rest[0], "--help"}, environment, stdout, stderr)
		}
		fmt.Fprint(stdout, usageMessage)
		return exitOK
	}
	fmt.Fprintf(stderr, "leat: unknown command %q\n\n%s", arguments[0], usageMessage)
	return exitMisused
}
