package serve

import (
	"errors"
	"fmt"
	"math"

	"github.com/go-json-experiment/json"

	"leat/api/operation"
)

// knownRequest has an answer that needs no computer. A triangle of side slope 1 filled to 1 m has the area 1 m2 and the hydraulic
// radius 1/(2 sqrt 2) = 2^(-3/2) m, whose power 2/3 is 1/2; so Manning's equation gives Q = 1/n * 1 * 1/2 * sqrt(S), which is
// 0.8 m3/s for n = 0.0125 and S = 0.0004. At that discharge the normal depth is therefore 1 m.
const knownRequest = `{"section":{"kind":"triangular","side_slope":1},"roughness":{"manning":0.0125},"bed_slope":0.0004,"discharge":0.8}`

const (
	knownDepth     = 1.0
	knownTolerance = 1e-12
)

// KnownAnswer returns the readiness check that solves a request with a known answer by the operation `depths`.
func KnownAnswer(operations []*operation.Operation) (func() error, error) {
	for _, op := range operations {
		if op.Name == "depths" {
			return func() error { return checkKnownAnswer(op) }, nil
		}
	}
	return nil, errors.New("no operation depths to check readiness with")
}

func checkKnownAnswer(op *operation.Operation) error {
	text, _, problem := op.Answer(nil, []byte(knownRequest), operation.Options{Brief: true})
	if problem != nil {
		return problem
	}
	var answer struct {
		NormalDepth *float64 `json:"normal_depth"`
	}
	if err := json.Unmarshal(text, &answer); err != nil {
		return err
	}
	switch depth := answer.NormalDepth; {
	case depth == nil:
		return errors.New("normal depth is absent, must be 1 m")
	case !(math.Abs(*depth-knownDepth) <= knownTolerance):
		return fmt.Errorf("normal depth is %v m, must be 1 m", *depth)
	}
	return nil
}
