//go:build !race

package stream

const share = 1
