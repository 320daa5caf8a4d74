package serve

import (
	"github.com/prometheus/client_golang/prometheus"

	"leat/api/operation"
	"leat/api/wire"
)

// unknownKind is the kind of section of a request that could not be read that far, or panicked.
const unknownKind wire.Kind = "unknown"

// solveKinds are the values of the label kind that an operation's solves have.
func solveKinds(operation string) []wire.Kind {
	kinds := append(wire.Kinds(), unknownKind)
	if operation == "profile" {
		kinds = append(kinds, wire.SeveralKinds)
	}
	return kinds
}

// counted returns an operation that counts how its solves end, panics included. Unary and bulk share it.
func (s *Server) counted(op *operation.Operation) *operation.Operation {
	type counters struct{ result, problem prometheus.Counter }
	byKind := map[wire.Kind]counters{}
	for _, kind := range solveKinds(op.Name) {
		byKind[kind] = counters{s.metrics.solves.WithLabelValues(op.Name, string(kind), outcomeResult), s.metrics.solves.WithLabelValues(op.Name, string(kind), outcomeProblem)}
	}
	panicked := s.metrics.solves.WithLabelValues(op.Name, string(unknownKind), outcomePanic)
	counting := *op
	counting.Solve = func(body []byte, options operation.Options) (operation.Solved, *wire.Problem) {
		counter := panicked
		defer func() { counter.Inc() }()
		solved, problem := op.Solve(body, options)
		of, known := byKind[solved.Kind]
		if !known {
			of = byKind[unknownKind]
		}
		counter = of.result
		if problem != nil {
			counter = of.problem
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
