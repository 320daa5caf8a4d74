//go:build !race

package serve

const share = 1
