//go:build !race

package format

const share = 1
