package serve

import (
	"leat/api/operation"
	"leat/api/wire"
)

// counted returns an operation that counts how its solves end, panics included. Unary and bulk share it.
func (s *Server) counted(op *operation.Operation) *operation.Operation {
	result := s.metrics.solves.WithLabelValues(op.Name, outcomeResult)
	refused := s.metrics.solves.WithLabelValues(op.Name, outcomeProblem)
	panicked := s.metrics.solves.WithLabelValues(op.Name, outcomePanic)
	counting := *op
	counting.Solve = func(body []byte, options operation.Options) (operation.Solved, *wire.Problem) {
		counter := panicked
		defer func() { counter.Inc() }()
		solved, problem := op.Solve(body, options)
		counter = result
		if problem != nil {
			counter = refused
		}
		return solved, problem
	}
	return &counting
}

// lineCounter returns what counts the answered lines of an operation's streams.
func (s *Server) lineCounter(name string) func(lines, problems int) {
	result := s.metrics.lines.WithLabelValues(name, outcomeResult)
	problem := s.metrics.lines.WithLabelValues(name, outcomeProblem)
	return func(lines, problems int) {
		result.Add(float64(lines - problems))
		problem.Add(float64(problems))
	}
}
