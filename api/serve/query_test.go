package serve

import (
	"strings"
	"testing"
)

// A parameter of bulk that one request does not take is told with where it belongs.
func TestParametersOfBulkAreSentThere(t *testing.T) {
	for raw, sent := range map[string]bool{"prefix=leat_": true, "flat=true": true, "colour=blue": false} {
		_, problem := readQuery(raw, parameters, call{})
		if problem == nil || strings.Contains(problem.Errors[0].Detail, "/v1/bulk") != sent {
			t.Errorf("%s: %+v", raw, problem)
		}
		if _, problem = readQuery(raw, bulkParameters, call{}); (problem == nil) != sent {
			t.Errorf("%s in bulk: %+v", raw, problem)
		}
	}
}
