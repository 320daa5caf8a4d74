// Package wellformed takes apart JSON that a decoder has found well-formed, without reading its values. It allocates nothing but names with escapes.
package wellformed

import (
	"bytes"

	"github.com/go-json-experiment/json/jsontext"
)

// Each calls f for each member of a JSON object: its name with quotes, its value, and where that begins and ends in the object.
func Each(object []byte, f func(name, value []byte, from, to int)) {
	i := SkipSpace(object, 0)
	i = SkipSpace(object, i+1)
	for object[i] != '}' {
		start := i
		i = SkipString(object, i)
		name := object[start:i]
		i = SkipSpace(object, SkipSpace(object, i)+1)
		start = i
		i = SkipValue(object, i)
		f(name, object[start:i], start, i)
		if i = SkipSpace(object, i); object[i] == ',' {
			i = SkipSpace(object, i+1)
		}
	}
}

// SkipSpace returns the place of the first byte from i on that is no white space.
func SkipSpace(data []byte, i int) int {
	for i < len(data) && (data[i] == ' ' || data[i] == '\t' || data[i] == '\n' || data[i] == '\r') {
		i++
	}
	return i
}

// SkipString returns the place after a string that begins at i.
func SkipString(data []byte, i int) int {
	for i++; i < len(data) && data[i] != '"'; i++ {
		if data[i] == '\\' {
			i++
		}
	}
	return min(i+1, len(data))
}

// SkipValue returns the place after a value that begins at i; of a number, true, false or null that ends with the data, the data's end.
func SkipValue(data []byte, i int) int {
	depth := 0
	for i < len(data) {
		switch data[i] {
		case '"':
			i = SkipString(data, i)
		case '{', '[':
			depth++
			i++
		case '}', ']':
			depth--
			i++
		default:
			if depth == 0 {
				for i < len(data) && data[i] != ',' && data[i] != ']' && data[i] != '}' && data[i] > ' ' {
					i++
				}
				return i
			}
			i++
			continue
		}
		if depth == 0 {
			return i
		}
	}
	return i
}

// Name returns a member's name without its quotes and escapes.
func Name(quoted []byte) string {
	if bytes.IndexByte(quoted, '\\') < 0 {
		return string(quoted[1 : len(quoted)-1])
	}
	name, _ := jsontext.AppendUnquote(nil, quoted) // cannot fail: it is well-formed
	return string(name)
}
