// Package solve holds the few numerical tools that the hydraulics share: bracketed roots, powers, elliptic integrals and
// sums in twice the precision. Nothing in it allocates, and nothing depends on fused instructions of the machine,
// so that the same input gives the same bits everywhere.
package solve
