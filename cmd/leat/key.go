package main

import (
	"fmt"
	"io"

	"leat/api/serve"
)

const keyHelp = `leat key NAME makes a key for the caller of that name. Standard output gets the line for the file that leat serve --keys-file names; it
holds only the key's hash. Standard error gets the key itself, which is shown this once: hand it to the caller, who sends it as
Authorization: Bearer KEY.

  leat key survey_office >> keys.txt

Several lines may bear one name, so that a key can be changed without a gap: add the new line, have the caller change over, remove the old
one. A running service takes changes of the file over within seconds, or at once on SIGHUP.
`

// runKey makes a key. Line and key go different ways, so that the file can be written by redirection and never holds a key.
func runKey(arguments []string, stdout, stderr io.Writer) int {
	if len(arguments) == 1 && (arguments[0] == "--help" || arguments[0] == "-h" || arguments[0] == "-help") {
		fmt.Fprint(stdout, keyHelp)
		return exitOK
	}
	if len(arguments) != 1 {
		fmt.Fprintln(stderr, "leat key: give one argument, the caller's name; leat key --help tells more")
		return exitMisused
	}
	key, line, err := serve.NewKey(arguments[0])
	if err != nil {
		fmt.Fprintf(stderr, "leat key: %v\n", err)
		return exitMisused
	}
	if _, err := fmt.Fprintln(stdout, line); err != nil {
		fmt.Fprintf(stderr, "leat key: %v\n", err)
		return exitFailed
	}
	fmt.Fprintf(stderr, "key, shown this once: %s\n", key)
	return exitOK
}
