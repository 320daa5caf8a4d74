package operation

import (
	"errors"
	"sync"

	"leat/api/wire"
	"leat/compute"
	"leat/compute/profile"
)

// Profile is the operation profile: one steady run of gradually varied flow.
var Profile = newProfile(solve)

// solvers keep their memory from one run to the next.
var solvers = sync.Pool{New: func() any { return new(profile.Solver) }}

func solve(run *profile.Run) (*profile.Answer, error) {
	s := solvers.Get().(*profile.Solver)
	answer, err := s.Solve(run)
	solvers.Put(s)
	return answer, err
}

// newProfile returns the operation with a solver.
func newProfile(solve func(*profile.Run) (*profile.Answer, error)) Operation {
	return Operation{Name: "profile", Form: (*wire.ProfileAnswer)(nil), Request: (*wire.ProfileRequest)(nil), Long: true, Solve: func(body []byte, options Options) (Solved, *wire.Problem) {
		var request wire.ProfileRequest
		var p *profileRun
		solved, problem := Run("profile", body, options, &request, &request.Common, func() (wire.Answer, *wire.Problem) {
			var problem *wire.Problem
			if p, problem = newProfileRun(&request, options); problem != nil {
				return nil, problem
			}
			answer, err := solve(&p.run)
			if err != nil {
				return nil, p.problem(err)
			}
			return p.answer(answer), nil
		})
		solved.profile = p
		return solved, problem
	}}
}

// problem tells why a run has no answer.
func (p *profileRun) problem(err error) *wire.Problem {
	var faults compute.Faults
	var none *profile.NoSolution
	var problem *wire.Problem
	switch {
	case errors.As(err, &problem):
		return problem
	case errors.As(err, &none):
		return wire.NoSolution(p.pointer(none.Member), none.Code, none.Detail)
	case errors.As(err, &faults):
		list := make([]wire.Fault, len(faults))
		for i, f := range faults {
			list[i] = wire.Fault{Pointer: p.pointer(f.Member), Code: f.Code, Detail: f.Detail}
			if f.Code == tooManyStations {
				return wire.TooLarge(list[i])
			}
		}
		return wire.InvalidRequest(list...)
	}
	return wire.Internal("The solver did not converge on this run; nothing is given rather than a guess.")
}

// tooManyStations is the solver's code of a run that needs more stations than it may report.
const tooManyStations = "too_many_stations"
