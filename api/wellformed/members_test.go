package wellformed

import (
	"encoding/json"
	"reflect"
	"testing"

	"github.com/go-json-experiment/json/jsontext"
)

// TestEachFindsWhatADecoderFinds holds members, names and places to a JSON decoder (RFC 8259) that shares nothing with this walk.
func TestEachFindsWhatADecoderFinds(t *testing.T) {
	for _, object := range []string{
		`{}`, " {\t}\r\n", `{"a":1}`, `{ "a" : -1.5e+3 , "b":[ ] }`, `{"":null,"\u0061\"\\":true}`, `{"a":{"b":[{"c":"}],{"}],"d":"\\"},"e":false}`,
		`{"deep":[[[{}],"\""],[]],"text":"{\"x\":[","n":0}`,
	} {
		var want map[string]json.RawMessage
		if err := json.Unmarshal([]byte(object), &want); err != nil {
			t.Fatal(err)
		}
		got := map[string]json.RawMessage{}
		Each([]byte(object), func(name, value []byte, from, to int) {
			if string(value) != object[from:to] || !jsontext.Value(name).IsValid() {
				t.Errorf("%s: %s %s at %d to %d", object, name, value, from, to)
			}
			got[Name(name)] = value
		})
		if len(want)+len(got) > 0 && !reflect.DeepEqual(got, want) {
			t.Errorf("%s: %s, want %s", object, got, want)
		}
	}
}
