// Package wire holds the contract's types, the strict codec, units and problems.
//
// A request is read in two steps. A scanner goes over the bytes and refuses whatever is not I-JSON within the contract's bounds,
// so that nothing after it meets a literal, a list or a nesting that costs more than its length suggests. Then a walk reads the JSON into
// a struct by the plan that was compiled from the struct's tags, in SI units, and checks it on the way; it stops at the first fault.
// Only then does a second walk, by the same code, collect all of them, with their places and with sentences that say what would be accepted.
//
// A new operation is a new request type with tags, put into the list of plans, and an answer type with its AppendJSON.
package wire
