package serve

import (
	"github.com/prometheus/client_golang/prometheus"

	"leat/api/operation"
	"leat/api/wire"
)

// outcomes are the counters of one operation, looked up once.
type outcomes struct {
	result, problem, panicked          prometheus.Counter // solves
	lineResult, lineProblem, linePanic prometheus.Counter // bulk lines
}

func (s *Server) outcomes(name string) outcomes {
	return outcomes{
		s.metrics.solves.WithLabelValues(name, outcomeResult),
		s.metrics.solves.WithLabelValues(name, outcomeProblem),
		s.metrics.solves.WithLabelValues(name, outcomePanic),
		s.metrics.lines.WithLabelValues(name, outcomeResult),
		s.metrics.lines.WithLabelValues(name, outcomeProblem),
		s.metrics.lines.WithLabelValues(name, outcomePanic),
	}
}

// answer calls an operation and counts how it ended, a panic included.
func (o *outcomes) answer(op *operation.Operation, dst, body []byte, options operation.Options) (answer []byte, problem *wire.Problem) {
	counter := o.panicked
	defer func() { counter.Inc() }()
	answer, _, problem = op.Answer(dst, body, options)
	counter = o.result
	if problem != nil {
		counter = o.problem
	}
	return answer, problem
}
