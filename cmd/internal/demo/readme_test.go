package demo_test

import (
	"bytes"
	"encoding/json"
	"os"
	"regexp"
	"strings"
	"testing"

	"leat/api/operation"
)

// The requests that the README shows get the answers that it shows, but for line breaks and a problem's instance.
func TestReadmeShowsRealAnswers(t *testing.T) {
	readme, err := os.ReadFile("../../../README.md")
	if err != nil {
		t.Fatal(err)
	}
	shown := regexp.MustCompile("(?s)```sh\n(curl [^`]*?/v1/depths[^`]*?)-d '(.*?)'\n```\n\n```json\n(.*?)```").FindAllSubmatch(readme, -1)
	if len(shown) != 2 {
		t.Fatalf("%d requests with answers in the README, want 2", len(shown))
	}
	instance := regexp.MustCompile(`"instance":"[^"]*",`)
	depths := depths(t)
	for _, s := range shown {
		options := operation.Options{Brief: strings.Contains(string(s[1]), "detail=brief"), Inside: true}
		got, _, problem := depths.Answer(nil, s[2], options)
		if problem != nil {
			got = problem.AppendJSON(nil)
		}
		var want bytes.Buffer
		if err := json.Compact(&want, s[3]); err != nil {
			t.Fatalf("the README shows an answer that is no JSON: %v", err)
		}
		if want := instance.ReplaceAll(want.Bytes(), nil); !bytes.Equal(got, want) {
			t.Errorf("the README shows\n%s\nwhere the answer is\n%s", want, got)
		}
	}
}
