// Package operation holds one file an operation of the contract: decode, check, solve, answer. It knows no HTTP.
package operation

import "leat/api/wire"

// Options are what a call says beside its request.
type Options struct {
	Units  wire.System  // default units of the call (?units=)
	Brief  bool         // ?detail=brief
	Inside bool         // put the id inside the answer object (unary); in bulk it stands beside it
	Limits *wire.Limits // nil for the defaults
}

// An Operation is one calculation of the contract. It is immutable and safe for concurrent use.
type Operation struct {
	// Name is the last part of the route: "depths".
	Name string
	// Answer decodes one request object, checks it, solves it and appends the JSON answer object to dst. On failure it returns dst
	// unchanged and the problem, without Instance. id is the caller's id as its JSON literal, nil where none was given
	// or none could be read; it is returned with a problem too, where the body could be parsed that far. It may be a part of body.
	Answer func(dst, body []byte, options Options) (answer []byte, id []byte, problem *wire.Problem)
}

// All returns the operations in the order of the contract.
func All() []*Operation { return []*Operation{&Section, &Depths, &Rating} }

// answer is what an operation makes of a request.
type answer interface {
	AppendJSON(dst []byte, units wire.System, id wire.ID) []byte
}

// defaultLimits hold where a caller sets none.
var defaultLimits = wire.DefaultLimits()

// run is the path that every operation takes: decode into request, solve it, append what came of it.
func run(dst, body []byte, options Options, request wire.Request, id *wire.ID, units *wire.System, solve func() (answer, *wire.Problem)) ([]byte, []byte, *wire.Problem) {
	limits := options.Limits
	if limits == nil {
		limits = &defaultLimits
	}
	if problem := wire.Decode(body, options.Units, limits, request); problem != nil {
		return dst, *id, problem
	}
	result, problem := solve()
	if problem != nil {
		return dst, *id, problem
	}
	inside := *id
	if !options.Inside {
		inside = nil
	}
	return result.AppendJSON(dst, *units, inside), *id, nil
}
