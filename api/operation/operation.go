// Package operation holds one file an operation of the contract: decode, check, solve, answer. It knows no HTTP.
package operation

import "leat/api/wire"

// Options are what a call says beside its request.
type Options struct {
	Units  wire.System  // default units of the call (?units=)
	Brief  bool         // ?detail=brief
	Inside bool         // put the id inside the answer object (unary); in bulk it stands beside it
	Limits *wire.Limits // nil for the defaults

	Fingerprint bool // ?fingerprint=true: the answer tells its request's fingerprint

	// Begin, unless nil, is called with Worker where a solve begins that may take long. What it returns is called at least every 0.1 ms of the
	// solve of a Long operation, between the parts of others, and an error of it ends the solve: where that is a *wire.Problem, it is the request's.
	Begin  func(worker int) (checkpoint func() error)
	Worker int // which of several that solve at once does
}

// An Operation is one calculation of the contract. It is immutable and safe for concurrent use.
type Operation struct {
	// Name is the last part of the route: "depths".
	Name string
	// Form is an answer without content of the type that the operation gives: its methods say in which forms beside JSON answers can be told.
	Form wire.Answer
	// Request is a nil pointer to the type of request that the operation takes: its flat names follow from it.
	Request wire.Request
	// Long says that requests may be long and their solves take a while.
	Long bool
	// Solve decodes one request object, checks it and solves it. With a problem, which is without Instance, what it returns holds
	// ID and Kind alone, where the body could be read that far.
	Solve func(body []byte, options Options) (Solved, *wire.Problem)
}

// Answer solves one request object and appends the JSON answer object to dst. On failure it returns dst unchanged and the problem.
// id is the caller's id as its JSON literal, nil where none was given or none could be read; it may be a part of body.
func (o *Operation) Answer(dst, body []byte, options Options) (answer []byte, id []byte, problem *wire.Problem) {
	solved, problem := o.Solve(body, options)
	if problem != nil {
		return dst, solved.ID, problem
	}
	return solved.AppendJSON(dst, options.Inside), solved.ID, nil
}

// Fingerprint returns the fingerprint that Solve would give a request, without solving it: that of the answer that is kept for the same
// request, if there is one. A request that is not JSON as the contract accepts it has none, and a problem; whether it keeps all
// other rules is for Solve to say.
func (o *Operation) Fingerprint(body []byte, options Options) (string, *wire.Problem) {
	system, problem := wire.Scan(body, options.Units, options.limits())
	if problem != nil {
		return "", problem
	}
	return wire.Fingerprint(o.Name, body, system), nil
}

// Solved is the answer to one request, with what its forms need beside it.
type Solved struct {
	Answer wire.Answer
	Units  wire.System // of the request, in which the answer is told
	ID     wire.ID     // of the request; a part of its body
	Kind   wire.Kind   // of its section; what the request gives in its place where it could not be read or is none that there is

	Fingerprint string // of the request; empty where it was not asked for

	// What Figure samples from: the request as it came, since the decoded one may be in use for another by then; of a profile, what was built of it.
	body         []byte
	defaultUnits wire.System
	limits       *wire.Limits
	profile      *profileRun
}

// Request returns the request as it came: a part of its body, and no longer there than that.
func (s *Solved) Request() []byte { return s.body }

// AppendJSON appends the answer object, with the id inside it or without.
func (s *Solved) AppendJSON(dst []byte, inside bool) []byte {
	if !inside {
		return s.Answer.AppendJSON(dst, s.Units, nil)
	}
	return s.Answer.AppendJSON(dst, s.Units, s.ID)
}

// All returns the operations in the order of the contract.
func All() []*Operation { return []*Operation{&Section, &Depths, &Rating, &Profile, &Appraisal} }

// begin returns the checkpoint of a solve that begins.
func (o *Options) begin() (checkpoint func() error) {
	if o.Begin == nil {
		return func() error { return nil }
	}
	return o.Begin(o.Worker)
}

// defaultLimits hold where a caller sets none.
var defaultLimits = wire.DefaultLimits()

func (o *Options) limits() *wire.Limits {
	if o.Limits == nil {
		return &defaultLimits
	}
	return o.Limits
}

// Run is the path that every operation takes: decode into request, solve it, and look whether all numbers of the answer are some.
func Run(name string, body []byte, options Options, request wire.Request, common *wire.Common, solve func() (wire.Answer, *wire.Problem)) (Solved, *wire.Problem) {
	if problem := wire.Decode(body, options.Units, options.limits(), request); problem != nil {
		return Solved{ID: common.ID, Kind: request.SectionKind()}, problem
	}
	answer, problem := solve()
	if problem != nil {
		return Solved{ID: common.ID, Kind: request.SectionKind()}, problem
	}
	if what := answer.NonFinite(); what != "" {
		return Solved{ID: common.ID, Kind: request.SectionKind()}, wire.NonFiniteResult("The calculation ended, but " + what + " came out infinite or as no number; nothing is given rather than that.")
	}
	solved := Solved{Answer: answer, Units: common.System, ID: common.ID, Kind: request.SectionKind(), body: body, defaultUnits: options.Units, limits: options.limits()}
	if options.Fingerprint {
		solved.Fingerprint = wire.Fingerprint(name, body, solved.Units)
		answer.SetFingerprint(solved.Fingerprint)
	}
	return solved, nil
}
