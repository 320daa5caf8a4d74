package operation

import (
	"bytes"
	"os"
	"path/filepath"
	"testing"
)

// Requests are used again: an answer that is kept must be what it was when other requests have been solved, refused ones among them.
func TestAnswersHoldNothingOfTheirRequests(t *testing.T) {
	for name, o := range map[string]*Operation{"ostermere.ndjson": &Depths, "ostermere_appraisals.ndjson": &Appraisal} {
		register, err := os.ReadFile(filepath.Join("..", "..", "testdata", name))
		if err != nil {
			t.Fatal(err)
		}
		lines := bytes.Split(bytes.TrimSpace(register), []byte("\n"))
		lines = lines[:min(400, len(lines))]
		var kept []Solved
		var told [][]byte
		for _, line := range lines {
			solved, problem := o.Solve(line, Options{Fingerprint: true})
			if problem != nil {
				continue // the register has faults of its own
			}
			kept, told = append(kept, solved), append(told, solved.AppendJSON(nil, true))
			if _, problem := o.Solve(line[:len(line)-1], Options{}); problem == nil {
				t.Fatal("half a line was accepted")
			}
		}
		if len(kept) < len(lines)*9/10 {
			t.Errorf("%s: %d answers to %d lines only", name, len(kept), len(lines))
		}
		for i := range kept {
			if again := kept[i].AppendJSON(nil, true); !bytes.Equal(again, told[i]) {
				t.Errorf("%s, answer %d: %s became %s", name, i+1, told[i], again)
			}
		}
	}
}

// A request at rest holds nothing of the one before.
func TestRequestsAtRestAreEmpty(t *testing.T) {
	request := depthsRequests.take()
	request.ID, request.Section.Points = []byte("1"), make([][2]float64, 2)
	depthsRequests.leave(request)
	if request.ID != nil || request.Section.Points != nil {
		t.Errorf("%+v", request)
	}
}
