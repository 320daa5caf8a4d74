package main

import (
	"fmt"
	"io"
	"runtime"
	"runtime/debug"

	"leat/api/serve"
	"leat/compute"
)

func runVersion(arguments []string, stdout, stderr io.Writer) int {
	build := serve.ReadBuild()
	if len(arguments) == 1 && (arguments[0] == "--components" || arguments[0] == "-components") {
		info, found := debug.ReadBuildInfo()
		if !found {
			fmt.Fprintln(stderr, "leat version: this binary does not say what it is made of; build it with Go's modules")
			return exitFailed
		}
		if err := writeComponents(stdout, info, build); err != nil {
			fmt.Fprintf(stderr, "leat version: %v\n", err)
			return exitFailed
		}
		fmt.Fprintln(stdout)
		return exitOK
	}
	if len(arguments) > 0 {
		fmt.Fprintf(stderr, "leat version takes no arguments but --components, which lists what the binary is made of (CycloneDX 1.6, JSON)\n")
		return exitMisused
	}
	modified := ""
	if build.Modified {
		modified = " (modified)"
	}
	fmt.Fprintf(stdout, "leat %s, revision %s%s, engine %s, %s\n", build.Version, build.Revision, modified, compute.EngineVersion, runtime.Version())
	return exitOK
}
