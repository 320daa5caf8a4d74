package wire

import (
	"bytes"

	"github.com/go-json-experiment/json/jsontext"
)

// fewNames is the number of names in one object up to which a new one is compared with each.
const fewNames = 48

// addName notes a name of the object f and reports whether it is new there.
func (s *scanner) addName(f *frame, name []byte) bool {
	if f.set == nil {
		for _, other := range s.names[f.first:] {
			if bytes.Equal(other, name) {
				return false
			}
		}
		s.names = append(s.names, name)
		if len(s.names)-f.first == fewNames {
			f.set = make(map[string]struct{}, 4*fewNames)
			for _, other := range s.names[f.first:] {
				f.set[string(other)] = struct{}{}
			}
		}
		return true
	}
	if _, found := f.set[string(name)]; found {
		return false
	}
	f.set[string(name)] = struct{}{}
	return true
}

// unescaped returns the name that a checked string, quotes included, stands for.
func (s *scanner) unescaped(quoted []byte) []byte {
	start := len(s.room)
	s.room, _ = jsontext.AppendUnquote(s.room, quoted) // cannot fail: the scanner has read it
	return s.room[start:]
}
