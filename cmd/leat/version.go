package main

import (
	"fmt"
	"io"
	"runtime"

	"leat/api/serve"
	"leat/compute"
)

func runVersion(arguments []string, stdout, stderr io.Writer) int {
	if len(arguments) > 0 {
		fmt.Fprintf(stderr, "leat version takes no arguments\n")
		return exitMisused
	}
	build := serve.ReadBuild()
	modified := ""
	if build.Modified {
		modified = " (modified)"
	}
	fmt.Fprintf(stdout, "leat %s, revision %s%s, engine %s, %s\n", build.Version, build.Revision, modified, compute.EngineVersion, runtime.Version())
	return exitOK
}
