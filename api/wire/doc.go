// Package wire holds the contract's types, the strict codec, units, problems and, later, the canonical form and the fingerprint.
package wire
