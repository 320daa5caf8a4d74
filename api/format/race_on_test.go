//go:build race

package format

// share of the usual number of lines that a test takes: the race detector is slow.
const share = 10
