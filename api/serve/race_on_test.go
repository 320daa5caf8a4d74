//go:build race

package serve

// share of the usual number of lines that a test takes: the race detector is slow.
const share = 10
