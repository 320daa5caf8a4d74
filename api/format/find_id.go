package format

import (
	"bytes"

	"github.com/go-json-experiment/json/jsontext"
)

// longestID is more than the literal of any id that a request may have: 256 characters, each written as an escaped pair.
const longestID = 256*12 + 2

// findID finds the id, under some name, of a request that nobody else could read, as its JSON literal; nil where there is none. It goes
// as far as the request is JSON.
func findID(request []byte, name string) []byte {
	d := jsontext.NewDecoder(bytes.NewReader(request))
	if t, err := d.ReadToken(); err != nil || t.Kind() != '{' {
		return nil
	}
	for {
		member, err := d.ReadToken()
		if err != nil || member.Kind() != '"' {
			return nil
		}
		isID := member.String() == name
		value, err := d.ReadValue()
		if err != nil {
			return nil
		}
		if isID {
			if kind := value.Kind(); kind != '"' && kind != '0' || len(value) > longestID {
				return nil
			}
			return bytes.Clone(value)
		}
	}
}
