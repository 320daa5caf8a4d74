package serve

import (
	"strings"
	"testing"

	"leat/api/operation"
	"leat/api/wire"
)

func TestKnownAnswerOfTheRealOperation(t *testing.T) {
	known, err := KnownAnswer(operation.All())
	if err != nil {
		t.Fatal(err)
	}
	if err := known(); err != nil {
		t.Error(err)
	}
}

func TestKnownAnswerNoticesAWrongOne(t *testing.T) {
	for text, says := range map[string]string{
		`{"normal_depth":1.00000000001}`: "must be 1 m",
		`{"normal_depth":null}`:          "absent",
		`{}`:                             "absent",
		`{"normal_depth":`:               "EOF",
		"":                               "as asked",
	} {
		known, err := KnownAnswer([]*operation.Operation{{Name: "depths", Solve: func([]byte, operation.Options) (operation.Solved, *wire.Problem) {
			if text == "" {
				return operation.Solved{}, wire.Internal("as asked")
			}
			return operation.Solved{Answer: fakeAnswer(text)}, nil
		}}})
		if err != nil {
			t.Fatal(err)
		}
		if err := known(); err == nil || !strings.Contains(err.Error(), says) {
			t.Errorf("answer %s: error %v, want one that says %q", text, err, says)
		}
	}
	if _, err := KnownAnswer(nil); err == nil {
		t.Error("no operation depths, and no error")
	}
}
